package webpage

// outcome writes all sections of an outcome.
func (m *markup) outcome(o *outcomeView) {
	for i, section := range o.sections() {
		m.raw(section.HTML)
		if i == 0 {
			m.whatIf(o.ID, o.WhatIf)
		}
	}
}

// sections returns the sections of an outcome, each as a whole element.
func (o *outcomeView) sections() []Section {
	var all []Section
	add := func(name string, write func(m *markup)) {
		var m markup
		if write(&m); m.Len() > 0 {
			all = append(all, Section{ID: o.ID + "-" + name, HTML: m.String()})
		}
	}
	add("answer", func(m *markup) { m.answer(o) })
	add("trials", func(m *markup) { m.section(o.ID, "trials", o.Trials) })
	add("accrual", func(m *markup) { m.section(o.ID, "accrual", o.Accrual) })
	add("rests", func(m *markup) { m.section(o.ID, "rests", o.Rests) })
	add("panel", func(m *markup) { m.panel(o.Panel) })
	add("other", func(m *markup) { m.section(o.ID, "other", o.Other) })
	add("posterior", func(m *markup) { m.section(o.ID, "posterior", o.Posterior) })
	add("small", func(m *markup) { m.section(o.ID, "small", o.Small) })
	add("data", func(m *markup) { m.studyData(o.ID, o.Data) })
	return all
}

// answer writes the answer in words for three readers, and the key numbers; or why there
// is none.
func (m *markup) answer(o *outcomeView) {
	a := o.Answer
	m.open("section", "id", o.ID+"-answer", "aria-labelledby", o.ID+"-h")
	m.raw("\n")
	m.element("h2", o.Name, "id", o.ID+"-h")
	if a == nil {
		m.element("p", "No result: "+o.Problem)
		m.raw("</section>\n")
		return
	}
	m.element("span", "", a.Facts...)
	m.raw("\n<div class=\"readers\">\n<article><h3>For the reviewer</h3>\n")
	m.paragraphs(a.Reviewer)
	m.raw("</article>\n<article><h3>For the panel</h3>\n")
	if b := a.Baseline; b != nil {
		m.raw("<p>With a baseline risk of ")
		m.slot("span", "base", b.Stop.Texts["base"])
		m.raw(" in 1000, expect <b>")
		m.slot("span", "difference", b.Stop.Texts["difference"])
		m.raw(" per 1000</b> (")
		m.slot("span", "interval", b.Stop.Texts["interval"])
		m.raw(").</p>\n")
	}
	m.paragraphs(a.Panel)
	m.belief(a.Beliefs)
	m.raw("</article>\n<article><h3>For the living review</h3>\n")
	m.paragraphs(a.Living)
	if len(a.Living) == 0 {
		m.raw("<p>No order of arrival is known: give the sheet a date column.</p>\n")
	}
	m.raw("</article>\n</div>\n<dl class=\"keys\">")
	for _, k := range a.Keys {
		m.key(k)
	}
	m.raw("\n</dl>\n")
	if a.Beliefs != nil {
		m.beam(o.ID, a.Beliefs)
	}
	if len(a.Remarks) > 0 {
		m.raw("\n<h3 class=\"vh\">Remarks</h3><ul class=\"remarks\">")
		for _, remark := range a.Remarks {
			m.element("li", remark)
		}
		m.raw("</ul>\n")
	}
	m.raw("</section>\n")
}

// slot writes a text that a slider changes, by the slot's name.
func (m *markup) slot(element, name, text string) { m.element(element, text, "data-t", name) }

// key writes one of the key numbers.
func (m *markup) key(k keyView) {
	m.raw("\n<div><dt>")
	switch k.Slot {
	case "posterior":
		m.raw("Probability, from ")
		m.slot("span", "prior", k.Name)
	case "difference":
		m.raw("Per 1000, at ")
		m.slot("span", "base", k.Name)
	default:
		m.text(k.Name)
	}
	m.raw("</dt><dd>")
	m.slot("b", k.Slot, k.Value)
	for i, about := range k.About {
		if i > 0 {
			m.raw("<br>")
		}
		if k.Slot == "difference" {
			m.slot("span", "interval", about)
		} else {
			m.text(about)
		}
	}
	m.raw("</dd></div>")
}

// belief says what a stated belief becomes; nil where nothing is weighed.
func (m *markup) belief(b *beliefsView) {
	switch {
	case b == nil:
	case b.Stated:
		stop := b.Stops[b.Start]
		m.raw("<p>Who gave an effect a probability of ")
		m.slot("span", "prior", stop.Prior)
		m.raw(" before the data should give it ")
		m.slot("b", "posterior", stop.Posterior)
		m.raw(" now.</p>\n")
	default:
		m.element("p", "No probability of an effect before the data is stated. Who started "+b.Others+".")
		m.raw("\n")
	}
}

// section writes a section that asks, answers in a line, and shows charts and tables; nil
// stays away.
func (m *markup) section(id, name string, s *sectionView) {
	if s == nil {
		return
	}
	m.open("section", "id", id+"-"+name, "aria-labelledby", id+"-h-"+name)
	if len(s.Figures) > 0 {
		m.raw(`<div class="keep">`)
	}
	m.raw("\n")
	m.element("span", "PRISMA "+s.Items, "class", "items")
	m.raw("\n")
	m.element("h3", s.Heading, "id", id+"-h-"+name)
	m.raw("\n")
	if len(s.Under) > 0 {
		m.raw(`<p class="under">`)
		for i, text := range s.Under {
			if i > 0 {
				m.raw(" ")
			}
			m.text(text)
		}
		m.raw("</p>\n")
	}
	for i := range s.Figures {
		m.figure(&s.Figures[i])
	}
	if len(s.Figures) > 0 {
		m.raw("</div>")
	}
	m.raw("\n")
	for i := range s.Tables {
		m.table(&s.Tables[i])
	}
	m.paragraphs(s.After)
	m.raw("</section>\n")
}

// studyData writes the table of studies.
func (m *markup) studyData(id string, t *tableView) {
	if t == nil {
		return
	}
	m.open("section", "id", id+"-data", "aria-labelledby", id+"-h-data")
	m.raw("\n<span class=\"items\">PRISMA 13a, 13b, 19</span>\n")
	m.element("h3", "The data", "id", id+"-h-data")
	m.raw("\n<p class=\"under\">As read from the sheet, each row with its cells.<span class=\"live\" hidden> Choose a heading to sort; point at a row to find it in the charts.</span></p>\n")
	m.table(t)
	m.raw("</section>\n")
}
