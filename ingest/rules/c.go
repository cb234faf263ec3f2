package rules

import (
	"fmt"
	"math"
	"strings"

	"steelyard/meta/review"
)

// counts looks at numbers of people and events: rules C3 to C7 and C10. The reader
// itself reports impossible and broken counts (C1, C2), the analysis sparse ones
// (C8, C9), and C11 stands beside F8.
func (c *checker) counts() {
	for _, rows := range c.outcomes {
		c.percentages(rows)
		c.reversedOutcome(rows)
		for _, r := range rows {
			c.denominators(r)
			c.allocation(r)
			c.ownColumn(r)
		}
		c.strangeTotals(rows)
		c.compare(rows)
	}
	c.changingTotals()
}

// percentages reports events that are percentages (C3): some are no whole numbers or
// exceed their total, none exceeds 100, and nine in ten are, as a share of their
// total, whole numbers of people within rounding.
func (c *checker) percentages(rows []*row) {
	const share, leastCells = 0.9, 2
	cells, whole, odd := 0, 0, 0
	as := review.Reading{Label: "as percentages"}
	example := ""
	for _, r := range rows {
		if r.AcceptedReason("C2") != "" {
			return
		}
		for _, a := range arms {
			events, okE := r.Study.Number(a.events)
			total, okN := r.Study.Number(a.total)
			if !okE || !okN || !(total.Value > 0) {
				continue
			}
			if events.Value < 0 || events.Value > 100 {
				return
			}
			cells++
			people := events.Value * total.Value / 100
			if math.Abs(people-math.Round(people)) <= halfUnit(events)*total.Value/100+1e-9 {
				whole++
			}
			if events.Value != math.Trunc(events.Value) || events.Value > total.Value {
				odd++
				if example == "" {
					example = fmt.Sprintf("%s of %s people would be %.0f", typed(events), typed(total), math.Round(people))
				}
			}
			n := events
			n.Value = math.Round(people)
			as.Numbers = append(as.Numbers, n)
		}
	}
	if odd < leastCells || float64(whole) < share*float64(cells) {
		return
	}
	c.addOutcome(rows, review.Error, "C3", review.EventsTreated,
		"the events look like percentages: "+example+", and as a share of their totals they are whole numbers of people; write the numbers of people", as)
}

// rates returns the risks of both arms.
func (r *row) rates() (treated, control float64, ok bool) {
	t, ok := r.table()
	return t.Events1 / t.Total1, t.Events2 / t.Total2, ok
}

// reversedOutcome reports a study in which most have the event while few do in all
// others, or the reverse (C4).
func (c *checker) reversedOutcome(rows []*row) {
	odd := alone(rows, func(risk float64) float64 { return risk })
	if odd == nil {
		odd = alone(rows, func(risk float64) float64 { return 1 - risk })
	}
	if odd == nil {
		return
	}
	t, _ := odd.table()
	c.add(odd, review.Warning, "C4", review.EventsTreated, fmt.Sprintf("%s of %s and %s of %s had the event, far from all other studies of this outcome; were people without the event entered?", shown(t.Events1), shown(t.Total1), shown(t.Events2), shown(t.Total2)),
		odd.asEntered(review.EventsTreated, review.EventsControl),
		odd.with("people without the event", fieldValue{review.EventsTreated, t.Total1 - t.Events1}, fieldValue{review.EventsControl, t.Total2 - t.Events2}))
}

// alone returns the one study of four or more whose risks exceed 0.5 in both arms while
// those of all others are below 0.2, of is what of a risk is looked at; nil if there is
// none.
func alone(rows []*row, of func(risk float64) float64) *row {
	const many, few, least = 0.5, 0.2, 4
	var odd *row
	known := 0
	for _, r := range rows {
		p, q, ok := r.rates()
		if !ok {
			continue
		}
		known++
		switch p, q = of(p), of(q); {
		case p < few && q < few:
		case p > many && q > many && odd == nil:
			odd = r
		default:
			return nil
		}
	}
	if known < least {
		return nil
	}
	return odd
}

// denominators compares people analysed with people randomised (C5).
func (c *checker) denominators(r *row) {
	const many, apart = 0.2, 0.1
	var lost [2]float64
	known := 0
	for i, a := range arms {
		if !r.has(a.total, a.randomised) {
			continue
		}
		n, all := r.value(a.total), r.value(a.randomised)
		if n > all {
			c.add(r, review.Error, "C5", a.total, fmt.Sprintf("%s people analysed in the %s arm exceed the %s randomised; which is the denominator? Check both numbers, and that the columns are not swapped", shown(n), a.name, shown(all)))
			return
		}
		if all > 0 {
			lost[i] = 1 - n/all
			known++
		}
	}
	switch {
	case known > 0 && math.Max(lost[0], lost[1]) > many:
		c.add(r, review.Note, "C5", review.TotalTreated, fmt.Sprintf("%.0f%% of the people randomised to an arm are not analysed; say which denominator the report uses", 100*math.Max(lost[0], lost[1])))
	case known == 2 && math.Abs(lost[0]-lost[1]) > apart:
		c.add(r, review.Note, "C5", review.TotalTreated, fmt.Sprintf("%.0f%% of the treated and %.0f%% of the control arm are not analysed; such a difference may bias the result", 100*lost[0], 100*lost[1]))
	}
}

// allocation compares the arms with the whole, and with an allocation of 1:1 that
// the design states (C6).
func (c *checker) allocation(r *row) {
	const most = 3
	if !r.has(review.TotalTreated, review.TotalControl) {
		return
	}
	n1, n2 := r.value(review.TotalTreated), r.value(review.TotalControl)
	switch all, ok := r.number(review.Total); {
	case ok && all.Value != n1+n2 && !r.crossover():
		c.add(r, review.Warning, "C6", review.Total, fmt.Sprintf("the arms have %s and %s people, together %s, but the total is %s; check the three numbers", shown(n1), shown(n2), shown(n1+n2), shown(all.Value)))
	case strings.Contains(r.remark(review.Design), "1:1") && n1 > 0 && n2 > 0 && math.Max(n1/n2, n2/n1) > most:
		c.add(r, review.Warning, "C6", review.TotalTreated, fmt.Sprintf("the design says 1:1, but the arms have %s and %s people; check for a slip of a digit", shown(n1), shown(n2)))
	}
}

// changingTotals reports a study whose arms differ by more than a tenth from one
// outcome to another without a note (C6).
func (c *checker) changingTotals() {
	const most = 0.1
	if len(c.outcomes) < 2 {
		return
	}
	first := map[string]*row{}
	for i := range c.rows {
		r := &c.rows[i]
		if !r.has(review.TotalTreated, review.TotalControl) {
			continue
		}
		key := textKey(r.identity(), r.remark(review.Comparison), r.remark(review.Subgroup), r.remark(review.TimePoint))
		b := first[key]
		if b == nil {
			first[key] = r
			continue
		}
		if b.Outcome == r.Outcome || r.remark(review.NoteField) != "" || b.remark(review.NoteField) != "" {
			continue
		}
		for _, a := range arms {
			if n, m := r.value(a.total), b.value(a.total); math.Abs(n-m) > most*math.Max(n, m) {
				c.add(r, review.Warning, "C6", a.total, fmt.Sprintf("the %s arm has %s people here and %s in row %d (%s); if fewer were measured, say so in a note", a.name, shown(n), shown(m), b.Row.Row, b.Outcome))
				break
			}
		}
	}
}

func textKey(texts ...string) string { return strings.Join(texts, "\x00") }

// ownColumn reports a total that is another number of its row (C7): the year, the
// mean, or the events where far fewer have them in the other arm.
func (c *checker) ownColumn(r *row) {
	const least, rare = 10, 0.5
	for i, a := range arms {
		n, ok := r.number(a.total)
		if !ok || n.Value < least {
			continue
		}
		other := arms[1-i]
		mean, hasMean := r.number(a.mean)
		switch {
		case int(n.Value) == r.year() && n.Value == math.Trunc(n.Value) && r.value(other.total) != n.Value:
			c.add(r, review.Warning, "C7", a.total, fmt.Sprintf("the total of the %s arm, %s, is the study's year; is it in the right column?", a.name, shown(n.Value)))
		case r.has(a.events) && r.value(a.events) == n.Value && r.has(other.events, other.total) && r.value(other.events) <= rare*r.value(other.total):
			c.add(r, review.Warning, "C7", a.total, fmt.Sprintf("the total of the %s arm, %s, is its number of events; is it in the right column?", a.name, shown(n.Value)))
		case hasMean && mean.Value == n.Value && c.broken(r.Outcome, a.mean):
			c.add(r, review.Warning, "C7", a.total, fmt.Sprintf("the total of the %s arm, %s, is its mean; is it in the right column?", a.name, shown(n.Value)))
		default:
			continue
		}
		return
	}
}

// broken reports whether most values of an outcome's column have decimals.
func (c *checker) broken(outcome string, f review.Field) bool {
	all, with := 0, 0
	for i := range c.rows {
		if r := &c.rows[i]; r.Outcome == outcome && r.has(f) {
			all++
			if x := r.value(f); x != math.Trunc(x) {
				with++
			}
		}
	}
	return 2*with > all
}

// strangeTotals reports the one total of a column that is more than 50 times its
// median, or less than a fiftieth (C7).
func (c *checker) strangeTotals(rows []*row) {
	const times, least = 50, 5
	for _, a := range arms {
		var totals []float64
		for _, r := range rows {
			if r.has(a.total) {
				totals = append(totals, r.value(a.total))
			}
		}
		if len(totals) < least {
			continue
		}
		center := median(totals)
		var odd []*row
		for _, r := range rows {
			if n := r.value(a.total); r.has(a.total) && n > 0 && (n > times*center || n < center/times) {
				odd = append(odd, r)
			}
		}
		if len(odd) == 1 {
			c.add(odd[0], review.Warning, "C7", a.total, fmt.Sprintf("the total of the %s arm, %s, is far from those of the other studies (median %s); is it a number of people, and in the right column?", a.name, shown(odd[0].value(a.total)), shown(center)))
		}
	}
}
