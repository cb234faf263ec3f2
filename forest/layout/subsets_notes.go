package layout

import (
	"fmt"
	"strings"

	"steelyard/forest/words"
)

// notes explain the chart in plain words, then come the caller's.
func (c *subsets) notes() []Note {
	notes := []Note{{Head: "Subsets", Text: c.drawnText() + " They share " + c.in.plural(2) + ", so that their shares are no probabilities."}}
	if len(c.density.dots) > 0 {
		text := "each disc, one subset or several alike"
		if c.in.Chosen != nil {
			text += "; solid, with " + c.in.Chosen.Name + "; open, without it"
		}
		notes = append(notes, Note{Head: "Discs", Text: text + "."})
	} else {
		notes = append(notes, Note{Head: "Greys", Text: "from light to dark the densest places that hold 99, 95, 90, 75, 50 and 25% of the subsets."})
		if len(c.density.with) > 0 {
			notes = append(notes, Note{Head: "Outlines", Text: "around 95% of the subsets with " + c.in.Chosen.Name + " (solid) and of those without it (dashed)."})
		}
	}
	lines := "“reach” counts the subsets on or above a line; a step is 3.73-fold."
	if c.in.Important != nil {
		lines += " Dashed upright: the important difference."
	}
	if !c.axis.holds(c.in.Scale.Null) {
		lines += " No effect, " + nullText(c.in.Scale) + ", lies beyond the axis."
	}
	if hidden := 1 - c.density.shown; hidden > 1e-9 {
		lines += " " + shareText(hidden) + " of the subsets lie beyond the axes."
	}
	notes = append(notes, Note{Head: "Lines", Text: lines})
	return append(notes, c.in.Notes...)
}

// drawnText says which subsets were pooled.
func (c *subsets) drawnText() string {
	d, k := c.in.Drawn, c.in.Full.K
	count := words.Count(c.in.pooled())
	text := fmt.Sprintf("every one of the %s that %d %s have, each pooled by the same model.", count, k, c.in.plural(k))
	if k == 1 {
		text = fmt.Sprintf("the one that 1 %s has.", c.in.plural(1))
	}
	if !d.Every {
		text = fmt.Sprintf("a random sample of %s of those that %d %s have (seed %d), each pooled by the same model.", count, k, c.in.plural(k), d.Seed)
	}
	if d.Failed > 0 {
		text += fmt.Sprintf(" A further %s could not be pooled.", words.Count(d.Failed))
	}
	return text
}

// description tells the numbers of the chart in words.
func (c *subsets) description() string {
	var b strings.Builder
	if c.in.Title != "" {
		b.WriteString(c.in.Title + ". ")
	}
	f, s := c.in.Full, c.in.Shares
	fmt.Fprintf(&b, "All %d %s: pooled %s %s; evidence, effect against none, %s, %s. ", f.K, c.in.plural(f.K), c.in.Scale.Measure,
		effectText(c.in.Scale, f.Estimate), words.Odds(f.LnEvidence), strengthText(f.LnEvidence))
	fmt.Fprintf(&b, "Subsets: %s Of these %s favour an effect", c.drawnText(), shareText(s.Reach[0]))
	for i, word := range []string{"", "fair", "firm", "heavy", "massive"} {
		if i > 0 {
			fmt.Fprintf(&b, ", %s reach %s", shareText(s.Reach[i]), word)
		}
	}
	null := nullText(c.in.Scale)
	fmt.Fprintf(&b, "; %s favour none. Estimates: %s below %s, %s above", shareText(1-s.Reach[0]), shareText(s.BelowNull), null, shareText(s.AboveNull))
	if z := c.in.Important; z != nil {
		fmt.Fprintf(&b, "; %s below %s and %s above %s, beyond the important difference", shareText(s.BelowZone), effectText(c.in.Scale, z.Low),
			shareText(s.AboveZone), effectText(c.in.Scale, z.High))
	}
	b.WriteString(".")
	if c.in.Chosen != nil {
		with := 0
		for _, n := range c.in.Chosen.With {
			with += n
		}
		fmt.Fprintf(&b, " %s of the subsets hold %s.", words.Count(with), c.in.Chosen.Name)
	}
	return b.String()
}
