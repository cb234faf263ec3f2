package webpage

import "steelyard/forest/words"

// panel writes what an effect means for 1000 people, and the panel's card; nil stays
// away.
func (m *markup) panel(v *panelView) {
	if v == nil {
		return
	}
	m.open("section", "id", v.ID+"-panel", "aria-labelledby", v.ID+"-h-panel")
	m.raw("\n<span class=\"items\">PRISMA 20b, 22</span>\n")
	m.element("h3", "What does it mean for 1000 people?", "id", v.ID+"-h-panel")
	m.raw("\n")
	if v.Under != "" {
		m.element("p", "No absolute effect: "+v.Under+".", "class", "under")
		m.raw("\n")
	}
	if v.Control != nil {
		m.baseline(v, v.Control)
	}
	if v.Figure != nil {
		m.figure(v.Figure)
	}
	if v.Absolute != nil {
		m.table(v.Absolute)
	}
	m.card(v.ID, &v.Card)
	m.raw("\n</section>\n")
}

// baseline writes the slider of baseline risks and what it moves.
func (m *markup) baseline(v *panelView, b *baselineView) {
	texts := b.Stop.Texts
	m.raw(`<div class="control bg live" hidden>`)
	m.element("label", "Baseline risk, "+v.Unit, "for", v.ID+"-baseline")
	m.raw("\n")
	m.slider(v.ID+"-baseline", "baseline", b.Last, b.Start)
	m.element("output", texts["base"], "for", v.ID+"-baseline", "data-t", "base")
	m.raw(`<span class="ends">`)
	m.element("span", b.From)
	m.element("span", b.To)
	m.raw("</span></div>\n<div class=\"per\">\n<span>Without treatment</span><div class=\"track\" aria-hidden=\"true\">")
	m.element("span", "", "class", "fill "+b.Base, "data-bar", "base")
	m.raw(`</div><p class="val">`)
	m.slot("b", "base", texts["base"])
	m.raw(" of 1000 (assumed)</p>\n")
	m.element("span", words.Capital(v.Treated))
	m.raw(`<div class="track with" aria-hidden="true">`)
	m.element("span", "", "class", "fill "+b.With, "data-bar", "with")
	m.element("span", "", "class", "wh "+b.WhiskerLeft+" "+b.WhiskerWidth, "data-bar", "low high")
	m.raw(`</div><p class="val">`)
	m.slot("b", "with", texts["with"])
	m.raw(" of 1000 (")
	m.slot("span", "withinterval", texts["withinterval"])
	m.raw(")</p>\n</div>\n<p class=\"say\"><b>")
	m.slot("span", "difference", texts["difference"])
	m.raw(" per 1000</b> (")
	m.slot("span", "interval", texts["interval"])
	m.raw("). Number needed to treat: ")
	m.slot("span", "needed", texts["needed"])
	m.raw(".</p>\n")
}

// card writes the panel's card.
func (m *markup) card(id string, c *words.Card) {
	m.open("div", "class", "card", "role", "group", "aria-labelledby", id+"-h-card")
	m.element("h4", "Panel card", "id", id+"-h-card")
	m.raw("\n")
	for _, sentence := range c.Sentences {
		m.element("p", sentence, "class", "line")
		m.raw("\n")
	}
	m.raw("<p class=\"under\">The numbers each domain asks about. No level is computed; rating and reason are the panel’s own.</p>\n<dl class=\"domains\">")
	for _, large := range c.Large {
		m.raw("\n<div>")
		m.element("dt", large.Label)
		m.element("dd", large.Text)
		m.raw("</div>")
	}
	for i := range c.Domains {
		d := &c.Domains[i]
		m.raw("\n<div>")
		m.element("dt", words.Capital(d.Domain))
		m.raw("<dd>")
		for _, n := range d.Numbers {
			m.element("p", n)
		}
		m.raw("</dd>")
		m.rating(d)
		m.raw("</div>")
	}
	m.raw("\n<div><dt>Certainty</dt><dd>")
	for i, n := range c.Certainty.Numbers {
		if i > 0 {
			m.raw(" ")
		}
		m.text(n)
	}
	m.raw("</dd>")
	m.rating(&c.Certainty)
	m.raw("</div>\n</dl>")
	for _, remark := range c.Remarks {
		m.element("p", remark, "class", "cell")
		m.raw("\n")
	}
	m.raw("</div>")
}

// rating writes the panel's own rating with its reason.
func (m *markup) rating(d *words.DomainCard) {
	m.open("dd", "class", when(!d.Rated, "blank"))
	m.text(d.Rating)
	if d.Reason != "" {
		m.text(": " + d.Reason)
	}
	m.shut("dd")
}
