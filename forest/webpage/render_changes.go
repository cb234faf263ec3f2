package webpage

// changes writes what differs from an earlier sheet; nil stays away.
func (m *markup) changes(c *changesView) {
	if c == nil {
		return
	}
	m.raw("<section id=\"changed\" aria-labelledby=\"h-changed\">\n<span class=\"items\">PRISMA 24</span>\n")
	m.element("h2", "What changed since "+c.Before+"?", "id", "h-changed")
	m.raw("\n")
	m.element("p", c.Conclusion, "class", "under")
	m.raw("\n")
	m.paragraphs(c.Settings)
	for i := range c.Outcomes {
		o := &c.Outcomes[i]
		if o.Name != "" {
			m.element("h3", o.Name)
			m.raw("\n")
		}
		m.paragraphs(o.Rows)
		for j := range o.Tables {
			m.table(&o.Tables[j])
		}
		m.paragraphs(keep(o.Looks))
	}
	m.raw("</section>\n")
}

// eligible writes which study is in which synthesis; nil stays away.
func (m *markup) eligible(t *tableView) {
	if t == nil {
		return
	}
	m.raw("<section id=\"eligible\" aria-labelledby=\"h-eligible\">\n<span class=\"items\">PRISMA 13a</span>\n<h2 id=\"h-eligible\">What went into which synthesis</h2>\n")
	m.table(t)
	m.raw("</section>\n")
}
