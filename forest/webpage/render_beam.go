package webpage

import "strconv"

// beam writes the beam on which evidence turns beliefs into others.
func (m *markup) beam(id string, b *beliefsView) {
	m.open("div", "class", "beamwrap", "role", "group", "aria-labelledby", id+"-h-beam")
	m.raw("\n")
	m.element("h3", "From evidence to probability", "id", id+"-h-beam")
	m.raw("\n<p>The upper scale is the evidence, fixed by the data. The lower scale is probability: it slides until a prior stands under 1 : 1, and the weight then hangs over the answer.")
	if !b.Stated {
		m.raw(" No prior is stated; even odds stand here as an example.")
	}
	m.raw("</p>\n<div class=\"beam\" aria-hidden=\"true\">\n<div class=\"row words\">")
	for _, w := range b.Words {
		m.element("span", w.Text, "class", "bw "+w.Class)
	}
	m.raw("</div>\n<div class=\"row odds\">")
	for _, line := range b.Lines {
		m.element("span", line.Text, "class", line.Class)
	}
	m.raw("</div>\n<div class=\"row bar\"><span class=\"rod\"></span>")
	for _, line := range b.Lines {
		m.element("span", "", "class", "bt "+line.Class)
	}
	m.element("span", "", "class", "arm "+b.Arm+" "+b.ArmWidth)
	m.element("span", "", "class", "pivot "+b.Pivot)
	m.element("span", "", "class", "poise "+b.Poise)
	m.raw("</div>\n<div class=\"row probs\">")
	m.open("div", "class", "slide "+b.Slide)
	for _, p := range b.Probs {
		m.element("span", p.Text, "class", "bp "+p.Class+when(p.Minor, " minor")+when(p.Off, " off"), "data-at", strconv.FormatFloat(p.At, 'g', -1, 64))
	}
	m.raw("</div>")
	m.element("span", "", "class", "tip "+b.Poise)
	m.raw("</div>\n")
	start := b.Stops[b.Start]
	m.raw(`<div class="row mark">`)
	m.open("span", "class", b.Pivot)
	m.slot("b", "prior", start.Prior)
	m.raw(" before</span>")
	m.open("span", "class", "now "+b.Poise)
	m.slot("b", "posterior", start.Posterior)
	m.raw(" after</span></div>\n</div>\n<div class=\"control live\" hidden>")
	m.element("label", "Probability of an effect before the data", "for", id+"-prior")
	m.raw("\n")
	m.slider(id+"-prior", "prior", len(b.Stops)-1, b.Start)
	m.element("output", start.Prior, "for", id+"-prior", "data-t", "prior")
	m.raw("<span class=\"ends\"><span>1%</span><span>99%</span></span></div>\n")
	m.element("p", "Probability of an effect after the data, "+b.Others+".", "class", "beliefs")
	m.raw("\n</div>")
}

// slider writes a slider over numbered stops.
func (m *markup) slider(id, control string, last, start int) {
	m.open("input", "type", "range", "id", id, "data-control", control, "min", "0", "max", whole(last), "step", "1", "value", whole(start), "autocomplete", "off")
}
