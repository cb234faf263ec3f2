package layout

import (
	"fmt"
	"strings"

	"steelyard/forest/words"
)

// notes explain the columns in plain words, then come the caller's.
func (c *influence) notes() []Note {
	one, k := c.in.plural(1), len(c.in.Rows)
	pull := fmt.Sprintf("how far the pooled %s moves when this %s joins the others, in standard errors of the result without it", c.in.Scale.Measure, one)
	if c.directionItems(c.columns[0], 0) == nil {
		pull += "; to the left: " + c.in.Sides.Lower
	}
	notes := []Note{{Head: "Pull", Text: pull + "."}}
	if c.in.weighted() {
		notes = append(notes,
			Note{Head: "Distance", Text: fmt.Sprintf("from this %s to what the others predict for it, in standard deviations; by chance about 1 in 20 lies beyond ±2 (dashed, number bold).", one)},
			Note{Head: "Leverage", Text: fmt.Sprintf("the share of the pooled estimate that rests on this %s’s own result%s.", one, c.evenText(k))})
	} else {
		notes = append(notes, Note{Head: "Distance and leverage", Text: "need weights, and this method gives " + c.in.plural(2) + " none."})
	}
	notes = append(notes, Note{Head: "Carries", Text: fmt.Sprintf("steps of evidence that go when this %s is left out and the rest is pooled again%s.", one, c.hollowText())})
	if text := c.problems(); text != "" {
		notes = append(notes, Note{Head: "No number", Text: text})
	}
	return append(notes, c.in.Notes...)
}

func (c *influence) evenText(k int) string {
	if c.metrics.twoLine {
		return fmt.Sprintf("; an even share is 1/%d, %s", k, words.PercentFine(1/float64(k)))
	}
	return fmt.Sprintf(" (dashed: an even share, 1/%d)", k)
}

// hollowText explains hollow bars if there are any.
func (c *influence) hollowText() string {
	for _, r := range c.in.Rows {
		if r.Problem == "" && r.Carried < 0 {
			return "; hollow, to the left: it held evidence back"
		}
	}
	return ""
}

// problems names the rows without a result, up to three of them.
func (c *influence) problems() string {
	var names []string
	reason := ""
	n := 0
	for _, r := range c.in.Rows {
		if r.Problem == "" {
			continue
		}
		if n++; n <= 3 {
			names = append(names, joinName(r.Name, r.tail()))
			reason = r.Problem
		}
	}
	switch {
	case n == 0:
		return ""
	case n > 3:
		return fmt.Sprintf("for %s %s: the rest could not be pooled, such as without %s (%s).", words.Count(n), c.in.plural(n), names[0], reason)
	}
	return fmt.Sprintf("without %s the rest could not be pooled (%s).", strings.Join(names, ", without "), reason)
}

// description tells a page's numbers in words.
func (c *influence) description(p pageRange) string {
	var b strings.Builder
	if c.in.Title != "" {
		b.WriteString(c.in.Title + ". ")
	}
	if c.pages > 1 {
		fmt.Fprintf(&b, "Page %d of %d. ", p.number, c.pages)
	}
	ln := c.in.Pooled.LnEvidence
	fmt.Fprintf(&b, "%s: pooled %s %s; evidence, effect against none, %s, %s. ", c.pooledName(), c.in.Scale.Measure, c.pooledText(), words.Odds(ln), strengthText(ln))
	if c.in.weighted() {
		fmt.Fprintf(&b, "Residuals: %s. An even leverage is %s. ", c.beyondText(), words.PercentFine(1/float64(len(c.in.Rows))))
	}
	for i := p.from; i < p.to; i++ {
		r := c.in.Rows[i]
		if i > p.from {
			b.WriteString("; ")
		}
		b.WriteString(joinName(r.Name, r.tail()))
		if r.Problem != "" {
			b.WriteString(", no result without it: " + r.Problem)
			continue
		}
		fmt.Fprintf(&b, ", pull %s standard errors", pullGauge.text(r))
		if r.Weights != nil {
			fmt.Fprintf(&b, ", residual %s, %s", residualGauge.text(r), leverageText(r.Weights.Leverage))
		}
		fmt.Fprintf(&b, ", carries %s steps", carriedGauge.text(r))
	}
	return b.String() + "."
}
