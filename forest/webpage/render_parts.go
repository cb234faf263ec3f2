package webpage

// figure writes a chart with its caption, or says why there is none.
func (m *markup) figure(f *figureView) {
	if f.Problem != "" {
		m.element("p", "No chart: "+f.Problem)
		m.raw("\n")
		return
	}
	m.open("figure", "id", f.ID)
	switch {
	case f.Small:
		m.raw(`<div class="small">`, f.Narrow, "</div>")
	case f.Long:
		m.open("div", "class", "scroll long", "role", "region", "aria-label", "Figure "+whole(f.Number), "tabindex", "0")
		m.raw(f.Wide, "</div>")
	default:
		m.raw(`<div class="wide">`, f.Wide, `</div><div class="narrow">`, f.Narrow, "</div>")
	}
	m.raw("\n<figcaption>")
	m.element("b", "Figure "+whole(f.Number)+". "+f.Title)
	for _, note := range f.Notes {
		m.raw(" ")
		if note.Head != "" {
			m.element("b", note.Head)
			m.raw(" ")
		}
		m.text(note.Text)
	}
	m.raw("</figcaption></figure>\n")
}

// table writes a table, behind its summary if it is folded.
func (m *markup) table(t *tableView) {
	if t.Folded {
		m.raw(`<details class="more">`)
		m.element("summary", t.Summary)
	}
	if t.Sortable {
		m.filters(t)
	}
	m.open("div", "class", "scroll", "role", "region", "aria-label", t.Caption, "tabindex", "0")
	m.open("table", "id", t.ID, "class", when(t.Sortable, "sort"))
	m.element("caption", "Table "+whole(t.Number)+". "+t.Caption)
	m.raw("\n<thead><tr>")
	for _, h := range t.Heads {
		m.element("th", h.Text, "scope", "col", "class", when(h.Number, "n"))
	}
	m.raw("</tr></thead>\n<tbody>\n")
	for i := range t.Rows {
		m.row(&t.Rows[i], t.Sortable)
	}
	m.raw("</tbody></table></div>\n")
	for _, note := range t.Notes {
		m.element("p", note, "class", "cell")
		m.raw("\n")
	}
	if t.Folded {
		m.raw("</details>\n")
	}
}

// filters writes what narrows a table down.
func (m *markup) filters(t *tableView) {
	m.open("div", "class", "filter live", "hidden", on, "role", "search", "aria-label", "Narrow table "+whole(t.Number))
	m.raw("\n<label>Find a row<input type=\"search\" data-filter=\"text\" autocomplete=\"off\"></label>")
	for _, f := range t.Filters {
		m.raw("\n<label>")
		m.text(f.Label)
		m.open("select", "data-filter", "column", "data-column", whole(f.Column), "autocomplete", "off")
		m.raw(`<option value="">all</option>`)
		for _, value := range f.Values {
			m.element("option", value)
		}
		m.raw("</select></label>")
	}
	rows := whole(len(t.Rows))
	m.raw("\n")
	m.element("output", rows+" of "+rows+" rows", "aria-live", "polite")
	m.raw("</div>\n")
}

// row writes a row of a table; its first cell is its heading.
func (m *markup) row(r *rowView, sortable bool) {
	m.open("tr", "class", when(r.Main, "main"), "data-study", r.Study)
	for i, c := range r.Cells {
		if i == 0 {
			m.raw("<th scope=row>")
		} else {
			m.open("td", "class", when(c.Number, "n"), "data-s", when(sortable, c.Key))
		}
		m.text(c.Text)
		if c.Soft != "" {
			m.raw(" <span class=ci>")
			m.text(c.Soft)
			m.raw("</span>")
		}
		if c.Dagger != "" {
			m.raw(" ")
			m.element("abbr", "†", "title", c.Dagger)
		}
	}
	m.raw("\n")
}
