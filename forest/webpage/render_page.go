package webpage

// mark is the program's sign: a beam with its counterpoise.
const mark = `<svg viewBox="0 0 44 22" aria-hidden="true"><path d="M1 6h42" stroke="currentColor" stroke-width="2"/><path d="M5 2.5v7M22 2.5v7M29 2.5v7M36 2.5v7" stroke="currentColor" stroke-width="1.4"/><path d="M15 7l5 9h-10z" fill="currentColor"/><path d="M32.5 6v5" stroke="currentColor" stroke-width="1.4"/><path d="M30.5 11h4l2.5 7h-9z" fill="currentColor"/></svg>`

// page writes the whole page.
func (m *markup) page(v *view) {
	m.raw("<!doctype html>\n<html lang=\"en\">\n<head>\n<meta charset=\"utf-8\">\n<meta name=\"viewport\" content=\"width=device-width,initial-scale=1\">\n")
	m.open("meta", "http-equiv", "Content-Security-Policy", "content", v.Policy)
	m.raw("\n<meta name=\"color-scheme\" content=\"light dark\">\n")
	m.element("title", v.Title+" – evidence report")
	m.raw("\n<link rel=\"icon\" href=\"data:,\">\n<style>", v.Style, "</style>\n</head>\n<body>\n<a class=\"skip\" href=\"#answer\">Skip to the answer</a>\n<div class=\"page\">\n<header class=\"top\">\n<span class=\"name\">", mark, "steelyard report</span>\n")
	m.element("span", v.Kicker, "class", "where")
	m.raw("\n<button type=\"button\" class=\"theme live\" id=\"theme\" hidden>Dark page</button>\n</header>\n<div class=\"shell\">\n")
	m.contents(v)
	m.raw("\n")
	m.open("main", "class", when(v.One, "one"))
	m.raw("\n<section id=\"answer\" aria-labelledby=\"h-answer\">\n")
	m.element("p", v.Kicker, "class", "kicker")
	m.raw("\n")
	m.element("h1", v.Title, "id", "h-answer")
	m.raw("\n")
	if v.Live != nil {
		m.raw("<p class=\"left\" id=\"whatif-status\" role=\"status\" hidden></p>\n")
	}
	for _, o := range v.Outcomes {
		m.opening(o, v.One)
	}
	m.raw("</section>\n")
	for _, o := range v.Outcomes {
		m.open("div", "class", "outcome", "id", o.ID, "data-outcome", o.ID)
		m.raw("\n")
		m.outcome(o)
		m.raw("</div>\n")
	}
	m.back(v)
	m.raw("\n</main>\n</div>\n<footer><p>Decision support only: qualified methodologists, clinicians and local procedures come first. Results depend on the sheet and hold as of the search date.</p></footer>\n</div>\n<script type=\"application/json\" id=\"data\">", v.Data, "</script>\n")
	if v.Live != nil {
		m.raw("<script type=\"application/json\" id=\"sheet\">", v.Sheet, "</script>\n<script type=\"text/plain\" id=\"worker\">", v.Live.Worker, "</script>\n<script type=\"text/plain\" id=\"engine\">", v.Live.Code, "</script>\n")
	}
	m.raw("<script>", v.Script, "</script>\n</body>\n</html>\n")
}

// contents writes the table of contents.
func (m *markup) contents(v *view) {
	m.raw("<nav class=\"toc\" aria-label=\"Contents\"><details id=\"toc\" open><summary>Contents</summary><ol>\n<li><a href=\"#answer\">The answer</a></li>\n")
	for _, o := range v.Outcomes {
		m.raw("<li>")
		m.element("a", o.Name, "href", "#"+o.ID)
		if o.Answer != nil {
			m.raw("<ol>")
			for _, part := range o.parts() {
				m.raw("<li>")
				m.element("a", part.title, "href", "#"+o.ID+"-"+part.name)
				m.raw("</li>")
			}
			m.raw("</ol>")
		}
		m.raw("</li>\n")
	}
	if v.Changes != nil {
		m.raw("<li><a href=\"#changed\">What changed</a></li>")
	}
	if v.Eligible != nil {
		m.raw("<li><a href=\"#eligible\">Which synthesis</a></li>")
	}
	m.raw("<li><a href=\"#findings\">Findings in the sheet</a></li><li><a href=\"#methods\">Methods</a></li><li><a href=\"#cautions\">Cautions</a></li><li><a href=\"#record\">Record</a></li>\n</ol></details></nav>")
}

// part is a section of an outcome in the table of contents.
type part struct{ name, title string }

// parts lists the sections that an outcome has.
func (o *outcomeView) parts() []part {
	var all []part
	for _, p := range []struct {
		part
		there bool
	}{
		{part{"trials", "What was found"}, o.Trials != nil},
		{part{"accrual", "How evidence arrived"}, o.Accrual != nil},
		{part{"rests", "What it rests on"}, o.Rests != nil},
		{part{"panel", "Per 1000 people"}, o.Panel != nil},
		{part{"other", "Other beliefs"}, o.Other != nil},
		{part{"posterior", "What is probable"}, o.Posterior != nil},
		{part{"small", "Small studies"}, o.Small != nil},
		{part{"data", "The data"}, true},
	} {
		if p.there {
			all = append(all, p.part)
		}
	}
	return all
}

// opening writes the sentence with which the page opens for an outcome.
func (m *markup) opening(o *outcomeView, one bool) {
	if !one {
		m.raw(`<article class="ans"><h2>`)
		m.element("a", o.Name, "href", "#"+o.ID)
		m.raw("</h2>\n")
	}
	m.open("div", "id", o.ID+"-lead")
	m.lead(o)
	m.raw("</div>\n")
	if !one {
		m.raw("</article>\n")
	}
}

// lead writes the answer in one sentence, and names the rows left out.
func (m *markup) lead(o *outcomeView) {
	switch a := o.Answer; {
	case o.Problem != "":
		m.element("p", "No result: "+o.Problem, "class", "lead")
		m.raw("\n")
	case a != nil:
		m.raw(`<p class="lead">In `)
		m.text(a.Pooled + " the " + a.Measure + " is ")
		m.element("b", a.Estimate)
		m.text(" (" + a.Interval + "). " + a.Direction)
		if a.Evidence != "" {
			m.raw(" The evidence is ")
			m.element("b", a.Evidence)
			m.text(": " + a.Strength + when(a.Bias != "", "; "+a.Bias) + ".")
		}
		m.raw("</p>\n")
	}
	m.leftOut(o.LeftOut)
}

// leftOut names the rows that were not pooled.
func (m *markup) leftOut(rows []leftOutView) {
	if len(rows) == 0 {
		return
	}
	verb := " rows are"
	if len(rows) == 1 {
		verb = " row is"
	}
	m.raw(`<div class="left">`)
	m.element("b", whole(len(rows))+verb+" left out:")
	m.raw("<ul>")
	for len(rows) > 0 {
		alike := 1 // rows left out for one reason, as by a filter
		for alike < len(rows) && rows[alike].Reason == rows[0].Reason {
			alike++
		}
		m.raw("<li>")
		for i, row := range rows[:alike] {
			m.text(when(i > 0, ", ") + row.Study + " ")
			m.element("span", row.Where, "class", "cell")
		}
		m.text(": " + rows[0].Reason)
		m.raw("</li>")
		rows = rows[alike:]
	}
	m.raw("</ul></div>\n")
}

// back writes what stands once for all outcomes.
func (m *markup) back(v *view) {
	m.changes(v.Changes)
	m.eligible(v.Eligible)
	m.findings(&v.Findings)
	m.raw("<section id=\"methods\" aria-labelledby=\"h-methods\">\n<span class=\"items\">PRISMA 12, 13d, 13e, 13f</span>\n<h2 id=\"h-methods\">Methods</h2>\n<p class=\"under\">Written from what was run; edit before you publish.</p>\n")
	for i := range v.Methods {
		m.methods(&v.Methods[i], v.One)
	}
	if len(v.Defaults) > 0 {
		m.settings("Settings at their defaults", "Settings at their defaults", v.Defaults)
	}
	m.raw("</section>\n<section id=\"cautions\" aria-labelledby=\"h-cautions\">\n<h2 id=\"h-cautions\">Cautions</h2>\n<ol class=\"plain\">")
	for _, caution := range v.Cautions {
		m.raw("\n")
		m.element("li", caution)
	}
	m.raw("\n</ol>\n</section>\n<section id=\"record\" aria-labelledby=\"h-record\">\n<span class=\"items\">PRISMA 24, 27</span>\n<h2 id=\"h-record\">Record</h2>\n<dl class=\"record\">")
	for _, row := range v.Record.Rows {
		m.raw("\n")
		m.element("dt", row.Name)
		m.element("dd", row.Value)
	}
	m.raw("\n</dl>\n</section>")
}

// findings writes what was found in the sheet.
func (m *markup) findings(f *findingsView) {
	m.raw("<section id=\"findings\" aria-labelledby=\"h-findings\">\n<span class=\"items\">PRISMA 9</span>\n<h2 id=\"h-findings\">Findings in the sheet</h2>\n")
	m.element("p", f.Under, "class", "under")
	m.raw("\n")
	if len(f.Rows) > 0 {
		m.raw("<div class=\"scroll\" role=\"region\" aria-label=\"Findings\" tabindex=\"0\"><table><caption class=\"vh\">Findings</caption><thead><tr><th scope=\"col\">Kind</th><th scope=\"col\">Where</th><th scope=\"col\">What was found</th><th scope=\"col\">What was done</th></tr></thead><tbody>\n")
		for _, row := range f.Rows {
			m.raw("<tr>")
			m.element("td", row.Kind, "class", "sev")
			m.raw("<td>")
			m.text(row.Study + " ")
			m.element("span", row.Where, "class", "cell")
			m.raw("</td>")
			m.element("td", row.Message)
			m.element("td", row.Done)
			m.raw("</tr>\n")
		}
		m.raw("</tbody></table></div>")
	}
	m.raw("\n</section>\n")
}

// methods writes the methods of an outcome under its name.
func (m *markup) methods(v *methodsView, one bool) {
	m.element("h3", v.Name, "class", when(one, "vh"))
	m.raw("\n", v.section().HTML)
}

// section returns the methods of an outcome and its settings, as a whole element.
func (v *methodsView) section() Section {
	var m markup
	m.open("div", "id", v.ID+"-methods")
	m.raw("\n<div class=\"methods\">")
	m.paragraphs(v.Paragraphs)
	m.raw("</div>\n")
	if len(v.Settings) > 0 {
		m.settings("Settings of "+v.Name, "Settings that were given, and where", v.Settings)
	}
	m.raw("</div>\n")
	return Section{ID: v.ID + "-methods", HTML: m.String()}
}

// settings writes settings behind a summary; those at their defaults come from nowhere
// and have no reason.
func (m *markup) settings(caption, summary string, settings []settingView) {
	given := settings[0].Origin != ""
	m.raw(`<details class="more">`)
	m.element("summary", summary)
	m.open("div", "class", "scroll", "role", "region", "aria-label", caption, "tabindex", "0")
	m.raw("<table>")
	m.element("caption", caption, "class", "vh")
	m.raw("<thead><tr><th scope=\"col\">Setting</th><th scope=\"col\">Value</th>")
	if given {
		m.raw("<th scope=\"col\">From</th><th scope=\"col\">Reason</th>")
	}
	m.raw("</tr></thead><tbody>\n")
	for _, s := range settings {
		m.raw("<tr>")
		m.element("th", s.Name, "scope", "row")
		m.element("td", s.Value)
		if given {
			m.element("td", s.Origin)
			m.element("td", s.Reason)
		}
		m.raw("</tr>\n")
	}
	m.raw("</tbody></table></div></details>\n")
}
