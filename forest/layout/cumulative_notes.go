package layout

import (
	"fmt"
	"strings"

	"steelyard/forest/words"
	"steelyard/meta/evidence"
)

// notes are those that say how to read the chart, and the caller's.
func (c *cumulative) notes() []Note {
	notes := []Note{{Head: "Each point", Text: c.pointNote()}}
	if c.in.Prior > 0 {
		notes = append(notes, Note{Head: "Right scale", Text: "the same line read as probability. Every point starts from the stated prior, " +
			words.Probability(c.in.Prior) + "; steps are not multiplied together." + c.arrowNote()})
	}
	if text := c.numberNote(); text != "" {
		notes = append(notes, Note{Head: capital(c.in.plural(2)), Text: text})
	}
	return append(notes, c.in.Notes...)
}

func (c *cumulative) pointNote() string {
	text := "all " + c.in.plural(2) + " so far, model refitted"
	if c.in.Method != "" {
		text += " (" + c.in.Method + ")"
	}
	text += "."
	if c.in.Points[0].K == 1 {
		text += " Open point: the first " + c.in.plural(1) + "’s own effect."
	}
	switch {
	case len(c.in.Points) > namesBeyond:
		text += " Labelled: those that move the evidence most, by half a step or more."
	case len(c.names) < len(c.in.Points):
		text += " Labelled: those that move the evidence most."
	}
	switch {
	case c.tied() && c.in.dated() > 0:
		text += " What arrives together enters together."
	case c.tied():
		text += " Those of one value enter together."
	}
	if c.in.Prior == 0 {
		text += c.arrowNote()
	}
	return text
}

func (c *cumulative) tied() bool {
	for _, p := range c.in.Points {
		if len(p.Entered) > 1 {
			return true
		}
	}
	return false
}

// arrowNote explains arrows, if there are any.
func (c *cumulative) arrowNote() string {
	if c.clips() {
		return " Arrow: past the axis."
	}
	return ""
}

// clips reports whether something ends in an arrow.
func (c *cumulative) clips() bool {
	for _, p := range c.in.Points {
		if p.Low < c.axis.low || p.High > c.axis.high || !c.ladder.holds(p.LnEvidence/lnStep) {
			return true
		}
	}
	return false
}

// numberNote says which studies the numbers of a narrow chart stand for.
func (c *cumulative) numberNote() string {
	if !c.metrics.twoLine {
		return ""
	}
	var all []string
	for _, n := range c.names {
		all = append(all, c.numbers(n.point)+" "+c.fullNames(n.point))
	}
	if len(all) == 0 {
		return ""
	}
	return strings.Join(all, "; ") + "."
}

// description tells the chart's numbers in words.
func (c *cumulative) description() string {
	var b strings.Builder
	if c.in.Title != "" {
		b.WriteString(c.in.Title + ". ")
	}
	order := "in order of date"
	if c.in.dated() == 0 {
		order = c.orderCaption()
	}
	fmt.Fprintf(&b, "Evidence after each %s, %s: ", c.in.plural(1), order)
	for i, p := range c.in.Points {
		if i > 0 {
			b.WriteString("; ")
		}
		b.WriteString(c.fullNames(i))
		if p.Date.Year > 0 && p.Date.Month > 0 {
			b.WriteString(", " + words.Date(p.Date.Year, p.Date.Month, p.Date.Day))
		}
		if p.Label != "" {
			b.WriteString(", " + p.Label)
		}
		fmt.Fprintf(&b, ": %s, %s steps", words.Odds(p.LnEvidence), words.Steps(evidence.FromLn(p.LnEvidence).Steps()))
		if i > 0 {
			fmt.Fprintf(&b, " (%s)", words.StepsChange(c.change(i)))
		}
		fmt.Fprintf(&b, ", %s %s", c.in.Scale.Measure,
			c.in.Scale.notation().Estimate(c.in.Scale.shown(p.Estimate), c.in.Scale.shown(p.Low), c.in.Scale.shown(p.High)))
	}
	b.WriteString(".")
	if c.in.Prior > 0 {
		fmt.Fprintf(&b, " With a prior probability of %s the probability of an effect is now %s.", words.Probability(c.in.Prior), words.Probability(c.posterior()))
	}
	return b.String()
}
