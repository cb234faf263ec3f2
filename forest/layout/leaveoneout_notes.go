package layout

import (
	"fmt"
	"strings"

	"steelyard/forest/words"
)

// footItems draws both axes at a height, and the directions under them; it
// returns the lowest baseline.
func (l *leaveOneOut) footItems(y float64) (items []Item, bottom float64) {
	m, a, r := l.metrics, l.axis, l.rail
	const tickLength = 2.2
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
	whole, _ := r.labels(m.second)
	if last := &whole[len(whole)-1]; last.x+Width(last.label, m.second, false)/2 > l.style.Width-m.margin {
		last.label = ""
	}
	effects := a.ticks
	if n := len(effects); n > 0 && effects[n-1].x+Width(effects[n-1].label, m.second, false)/2 > whole[0].x-Width(whole[0].label, m.second, false)/2-lastApart {
		effects = effects[:n-1]
	}
	draw(a.x0, a.x1, effects)
	draw(r.place.low, r.place.high, whole)
	bottom = numbers + m.second + 3.5
	null, zero := a.x(l.in.Scale.Null), r.zero()
	within := span{m.margin, l.style.Width - m.margin}
	place := func(text string, at float64, right bool) direction {
		return placeDirection(text, at, right, within, m.second)
	}
	directions := []direction{place(l.in.Sides.Lower, null, false)}
	for _, text := range []string{"for an effect", "effect"} {
		if d := place(text, zero, true); d.text == text {
			directions = append(directions, d)
			break
		}
	}
	if a.x1-null >= directionLeast {
		directions = append(directions, place(l.in.Sides.Higher, null, true))
	}
	if r.steps.low < 0 {
		directions = append(directions, place("none", zero, false))
	}
	for _, d := range clearDirections(directions, within) {
		items = append(items, d.items(bottom, m.second)...)
	}
	return items, bottom
}

// directionLeast is the part of an axis beside no effect, in points, that is
// worth a direction.
const directionLeast = 20

// notes are those that say how to read the chart, and the caller's.
func (l *leaveOneOut) notes() []Note {
	one, many := l.in.plural(1), l.in.plural(2)
	bars := "from the evidence of all " + many + " to the evidence without this one. Solid: the " + one + " carries evidence for an effect. Hollow: it held the evidence back."
	if l.clips() {
		bars += " Arrow: past the axis."
	}
	if l.metrics.twoLine {
		bars += " Under each bar: the odds without it, and the steps it carries."
	}
	notes := []Note{{Head: "Bars", Text: bars}, {Head: "Tipping", Text: l.tipping()}}
	band := levelText(l.in.Level) + " interval of all " + many + "; the model is refitted each time."
	if len(l.in.Rows) == 2 {
		band += " Without one of two, the other’s own effect is left."
	}
	return append(append(notes, Note{Head: "Band", Text: band}), l.in.Notes...)
}

// clips reports whether something ends in an arrow.
func (l *leaveOneOut) clips() bool {
	for _, o := range append([]Omission{l.in.All}, l.in.Rows...) {
		if o.Problem == "" && (o.Low < l.axis.low || o.High > l.axis.high || !l.onRail(o.LnEvidence)) {
			return true
		}
	}
	return false
}

// mostTipping is the number of studies that the note on tipping names.
const mostTipping = 6

// tipping says which single omissions take the evidence across the threshold:
// below it from above, or above it from below.
func (l *leaveOneOut) tipping() string {
	limit := l.in.Below * lnStep
	above := l.in.All.LnEvidence >= limit
	var names []string
	n := 0
	for i, o := range l.in.Rows {
		if o.Problem == "" && (o.LnEvidence >= limit) != above {
			n++
			names = append(names, l.shortName(i))
		}
	}
	place := stepsPhrase(l.in.Below) + " (" + words.Odds(limit) + ")"
	brings, keeps := "below "+place, "at "+place+" or more"
	if !above {
		brings, keeps = "to "+place+" or more", "below "+place
	}
	anyOne := "leaving out any one " + l.in.plural(1)
	switch {
	case n == 0:
		return anyOne + " keeps the evidence " + keeps + "."
	case n == 1:
		return "leaving out " + names[0] + " brings the evidence " + brings + "."
	case n == len(l.in.Rows):
		return anyOne + " brings the evidence " + brings + "."
	case n > mostTipping && above:
		return "leaving out any one of the first " + words.Count(n) + " rows brings the evidence " + brings + "."
	case n > mostTipping:
		return "leaving out any one of the last " + words.Count(n) + " rows brings the evidence " + brings + "."
	}
	return "leaving out any one of " + strings.Join(names[:n-1], ", ") + " or " + names[n-1] + " brings the evidence " + brings + "."
}

// stepsPhrase is a number of steps in words: "2 steps", "even" for none.
func stepsPhrase(steps float64) string {
	text := strings.TrimSuffix(words.Steps(steps), ".0")
	switch text {
	case "0":
		return "even"
	case "1", "−1":
		return text + " step"
	}
	return text + " steps"
}

// shortName is a study's name, with its year where another has the same name.
func (l *leaveOneOut) shortName(i int) string {
	o := l.in.Rows[i]
	for j, other := range l.in.Rows {
		if j != i && other.Name == o.Name {
			return joinName(o.Name, o.Year)
		}
	}
	if o.Name == "" {
		return o.Year
	}
	return o.Name
}

// description tells a page's numbers in words.
func (l *leaveOneOut) description(p pageRange) string {
	var b strings.Builder
	if l.in.Title != "" {
		b.WriteString(l.in.Title + ". ")
	}
	if l.pages > 1 {
		fmt.Fprintf(&b, "Page %d of %d. ", p.number, l.pages)
	}
	numbers := func(o Omission) {
		fmt.Fprintf(&b, "%s, evidence %s", l.in.Scale.notation().Estimate(l.in.Scale.shown(o.Estimate), l.in.Scale.shown(o.Low), l.in.Scale.shown(o.High)), words.Odds(o.LnEvidence))
		if o.Tau >= 0 {
			b.WriteString(", τ " + spreadText(o.Tau))
		}
	}
	fmt.Fprintf(&b, "Pooled %s of all %s: ", l.in.Scale.Measure, l.in.plural(2))
	numbers(l.in.All)
	fmt.Fprintf(&b, ", %s.", strengthText(l.in.All.LnEvidence))
	for i := p.from; i < p.to; i++ {
		o := l.in.Rows[i]
		b.WriteString(" Without " + l.texts[i+1].fullName + ": ")
		if o.Problem != "" {
			b.WriteString("no result, " + o.Problem + ".")
			continue
		}
		numbers(o)
		b.WriteString(", carries " + l.texts[i+1].carried + " steps.")
	}
	return b.String()
}
