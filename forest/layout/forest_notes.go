package layout

import (
	"fmt"
	"strings"

	"steelyard/forest/words"
)

// noteItems draws the notes under the chart and returns the height of the page.
// A page that is not the last says that the chart goes on.
func (f *forest) noteItems(p pageRange, bottom float64) (items []Item, height float64) {
	m := f.metrics
	y := bottom + m.note + 7
	if m.twoLine {
		y--
	}
	notes := f.notes()
	if !p.last {
		notes = []Note{{Text: "Continued on the next page."}}
	}
	return placeNotes(notes, m, f.width, y)
}

// placeNotes draws notes from a first baseline on; it returns the height of a
// page that ends with them.
func placeNotes(notes []Note, m metrics, width, y float64) (items []Item, height float64) {
	lead := m.lead * m.note
	last := y - lead
	for _, n := range notes {
		var lines []Item
		lines, last = wrapNote(n, m.margin, y, width-2*m.margin, m.note, lead)
		items = append(items, lines...)
		y = last + lead
	}
	return items, last + 0.36*m.note + 1
}

// notes are those on key and rail, which say only what the chart shows, and the
// caller's.
func (f *forest) notes() []Note {
	return append([]Note{{Head: "Key", Text: f.keyNote()}, {Head: "Rail", Text: f.railNote()}}, f.in.Notes...)
}

func (f *forest) keyNote() string {
	one := f.in.plural(1)
	parts := []string{"square, one " + one + ", area by weight"}
	interval := "line, " + f.level() + " interval"
	if f.clips() {
		interval += ", arrow if past the axis"
	}
	parts = append(parts, interval)
	if f.pooled != nil {
		parts = append(parts, f.diamondKey())
	}
	if pi := f.in.Prediction; pi != nil && pi.Reason == "" && f.pooled != nil {
		parts = append(parts, "pale bar, "+f.level()+" prediction for the next "+one+"’s true effect")
	}
	text := strings.Join(parts, "; ") + "."
	if len(f.in.Rows) == 1 && f.pooled == nil {
		text += " One " + one + ": nothing to pool, and no spread to estimate."
	}
	return text
}

// clips reports whether something ends in an arrow at the effect axis.
func (f *forest) clips() bool {
	out := func(low, high float64) bool { return low < f.axis.low || high > f.axis.high }
	for _, r := range f.in.Rows {
		if out(r.Low, r.High) {
			return true
		}
	}
	for _, r := range f.in.subtotalRows() {
		if out(r.Low, r.High) {
			return true
		}
	}
	if p := f.in.Pooled; p != nil && out(p.Low, p.High) {
		return true
	}
	p := f.in.Prediction
	return p != nil && p.Reason == "" && out(p.Low, p.High)
}

func (f *forest) railNote() string {
	text := "bar to the right, evidence for an effect"
	if wanted, unwanted, ok := f.hollow(); ok {
		text += " (solid: " + wanted + "; hollow: " + unwanted + ")"
	}
	most := "the most there can be"
	if f.in.Pooled != nil && f.in.Pooled.OfPriors {
		most = "the most that a study alone can have"
	}
	text += "; to the left, for none (dotted: " + most + ", " + words.Odds(mostForNone) + "). A step is 3.73-fold."
	if f.pooled != nil && len(f.in.Rows) > 1 {
		text += " Single bars do not add up to the pooled one."
	}
	return text
}

// hollow returns the words for the wanted and the other direction if any bar is
// hollow.
func (f *forest) hollow() (wanted, unwanted string, ok bool) {
	check := func(estimate float64) {
		wanted, unwanted, ok = f.in.Sides.Lower, f.in.Sides.Higher, true
		if estimate < f.in.Scale.Null {
			wanted, unwanted = unwanted, wanted
		}
	}
	for _, r := range f.in.Rows {
		if r.Unwanted && r.LnEvidence >= 0 {
			check(r.Estimate)
		}
	}
	for _, r := range f.in.subtotalRows() {
		if r.Unwanted && r.LnEvidence >= 0 {
			check(r.Estimate)
		}
	}
	if p := f.in.Pooled; p != nil && p.Unwanted && p.LnEvidence >= 0 {
		check(p.Estimate)
	}
	return wanted, unwanted, ok
}

// description tells a page's numbers in words.
func (f *forest) description(p pageRange) string {
	var b strings.Builder
	if f.in.Title != "" {
		b.WriteString(f.in.Title + ". ")
	}
	if f.pages > 1 {
		fmt.Fprintf(&b, "Page %d of %d. ", p.number, f.pages)
	}
	if pooled := f.in.Pooled; pooled != nil {
		fmt.Fprintf(&b, "Pooled %s %s; evidence, effect against none, %s, %s. ", f.in.Scale.Measure,
			f.in.estimate(pooled.Estimate, pooled.Low, pooled.High), words.Odds(pooled.LnEvidence), strengthText(pooled.LnEvidence))
	}
	if f.in.BiasOpen {
		b.WriteString("Bias is not in this number. ")
	}
	if pi := f.in.Prediction; pi != nil && f.pooled != nil {
		if pi.Reason == "" {
			fmt.Fprintf(&b, "%s prediction interval %s. ", f.level(), intervalText(f.in.Scale, pi.Low, pi.High))
		} else {
			fmt.Fprintf(&b, "Prediction interval: %s. ", Clean(pi.Reason))
		}
	}
	if s := f.in.Spread; s != nil && f.pooled != nil {
		fmt.Fprintf(&b, "Spread between %s, tau, %s", f.in.plural(2), words.Tau(s.Tau))
		if s.HasLimits {
			b.WriteString(" (" + words.Interval(words.Tau(s.Low), words.Tau(s.High)) + ")")
		}
		b.WriteString(". ")
	}
	b.WriteString(capital(f.in.plural(2)) + ": ")
	for i, e := range f.entries[p.from:p.to] {
		if i > 0 {
			b.WriteString("; ")
		}
		b.WriteString(f.describeEntry(e))
	}
	return b.String() + "."
}

func (in *ForestInput) estimate(v, low, high float64) string {
	return in.Scale.notation().Estimate(in.Scale.shown(v), in.Scale.shown(low), in.Scale.shown(high))
}
