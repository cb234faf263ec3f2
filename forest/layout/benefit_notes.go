package layout

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"steelyard/forest/words"
)

// rowID is the id of a row's group.
func rowID(i int) string { return fmt.Sprintf("row-%d", i+1) }

// footItems draws both axes and the directions under them; it returns the lowest
// baseline.
func (b *benefit) footItems() (items []Item, bottom float64) {
	m, a, r := b.metrics, b.axis, b.rail
	const tickLength = 2.2
	y := b.bottom()
	numbers := y + tickLength + m.second
	draw := func(from, to float64, ticks []tick) {
		items = append(items, Line{X1: from, Y1: y, X2: to, Y2: y, Width: 0.5})
		for _, t := range ticks {
			items = append(items, Line{X1: t.x, Y1: y, X2: t.x, Y2: y + tickLength, Width: 0.5})
			if t.label != "" {
				items = append(items, label(t.x, numbers, m.second, Middle, Ordinary, t.label))
			}
		}
	}
	effects, whole := a.ticks, b.railTicks()
	if n := len(effects); n > 0 && effects[n-1].x+Width(effects[n-1].label, m.second, false)/2 > whole[0].x-Width(whole[0].label, m.second, false)/2-lastApart {
		effects = effects[:n-1]
	}
	if n := len(effects); n > 0 && effects[0].x-Width(effects[0].label, m.second, false)/2 < 0 {
		effects = effects[1:]
	}
	draw(a.x0, a.x1, effects)
	draw(r.place.low, r.place.high, whole)
	bottom = numbers + m.second + 3.5
	within := span{m.margin, b.style.Width - m.margin}
	null, zero := a.x(b.in.null()), r.zero()
	all := []direction{
		placeDirection("important", zero, true, within, m.second), placeDirection(b.in.Sides.Lower, null, false, within, m.second),
		placeDirection(b.in.Sides.Higher, null, true, within, m.second), placeDirection("trivial", zero, false, within, m.second),
	}
	for _, d := range clearDirections(all, within) {
		items = append(items, d.items(bottom, m.second)...)
	}
	return items, bottom
}

// railTicks are the step lines with their odds, alike on both sides of even; labels
// that would touch are dropped, even odds never.
func (b *benefit) railTicks() []tick {
	r, size := b.rail, b.metrics.second
	right := b.style.Width - b.metrics.margin
	for every := 1.0; ; every++ {
		var ticks []tick
		clear := true
		last := math.Inf(-1)
		for n := r.steps.low; n <= r.steps.high; n++ {
			t := tick{x: r.x(n)}
			if math.Mod(n, every) == 0 {
				t.label = railLabel(math.Abs(n))
				half := Width(t.label, size, false) / 2
				if t.x+half > right {
					t.label = ""
				} else {
					clear = clear && t.x-half >= last+othersApart
					last = t.x + half
				}
			}
			ticks = append(ticks, t)
		}
		if clear || every > r.steps.high-r.steps.low {
			return ticks
		}
	}
}

// notes are those that say how to read the chart, and the caller's.
func (b *benefit) notes() []Note {
	diamond := "Diamond: " + b.shape() + " with its " + levelText(b.in.Level) + " interval."
	thresholds := "dashed; between them, grey, an effect is trivial. " + diamond
	if b.in.alike() {
		thresholds = b.thresholds(b.in.Rows[0]) + ". " + diamond
	}
	rail := fmt.Sprintf("evidence for %s (right) against a trivial effect (left), for the mean effect.", b.benefitName())
	if b.hasSettings() && !b.metrics.twoLine {
		rail += " Settings: share predicted beyond the threshold."
	}
	notes := []Note{{Head: "Thresholds", Text: thresholds}, {Head: "Rail", Text: rail}}
	if b.metrics.twoLine {
		notes = append(notes, Note{Head: capital(strings.ToLower(b.in.Heads[1])), Text: b.harms()})
	}
	return append(notes, b.in.Notes...)
}

// harms are the texts of the last column: once where they are all alike.
func (b *benefit) harms() string {
	var odds []string
	for _, r := range b.in.Rows {
		odds = append(odds, harmText(r.Harm))
	}
	switch {
	case len(odds) == 1:
		return odds[0] + "."
	case len(slices.Compact(slices.Clone(odds))) == 1:
		return odds[0] + " in every row."
	}
	return strings.Join(odds, "; ") + ", in the order of the rows."
}

// harmText is the evidence of the last column in one text.
func harmText(ln float64) string {
	if math.IsNaN(ln) {
		return outOfReach
	}
	return words.Odds(ln)
}

func (b *benefit) hasSettings() bool {
	for _, r := range b.in.Rows {
		if r.Settings != "" {
			return true
		}
	}
	return false
}

func (b *benefit) shape() string {
	if b.in.PerThousand {
		return "difference"
	}
	return b.in.Scale.Measure
}

// benefitName names what the rail weighs.
func (b *benefit) benefitName() string {
	name, _, _ := strings.Cut(b.in.Heads[0], " : ")
	return "an " + strings.ToLower(name)
}

// thresholds says which effects are important in a row.
func (b *benefit) thresholds(r BenefitRow) string {
	var parts []string
	for i, v := range []float64{r.From, r.To} {
		if math.IsNaN(v) {
			parts = append(parts, b.in.Zones[i]+" is out of reach")
			continue
		}
		parts = append(parts, b.valueText(v)+" is "+article(b.in.Zones[i]))
	}
	return strings.Join(parts, ", ")
}

func article(name string) string {
	if strings.HasPrefix(name, "important") {
		return "an " + name
	}
	return name
}

// valueText writes a value of the axis.
func (b *benefit) valueText(v float64) string {
	if b.in.PerThousand {
		return words.AbsoluteValue(v) + " per 1000"
	}
	return effectText(b.in.Scale, v)
}

// description carries all numbers of the chart.
func (b *benefit) description() string {
	var all []string
	if b.in.alike() {
		all = append(all, "Thresholds: "+b.thresholds(b.in.Rows[0])+".")
	}
	for _, r := range b.in.Rows {
		text := joinName(r.Name, r.Below)
		if text != "" {
			text += ": "
		}
		text += r.Value + " (" + r.Interval + ")"
		if !b.in.alike() {
			text += "; " + b.thresholds(r)
		}
		text += "; " + strings.ToLower(b.in.Heads[0]) + " " + harmText(r.Benefit)
		if r.Settings != "" {
			text += ", " + r.Settings + " beyond the threshold"
		}
		text += "; " + strings.ToLower(b.in.Heads[1]) + " " + harmText(r.Harm) + "."
		all = append(all, text)
	}
	return strings.Join(all, " ")
}
