package audit

import (
	"fmt"
	"math"
	"strings"

	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// chain is the way of one study through its conversions: what is called what by now.
type chain struct {
	o    *outcome
	s    *sheet
	name string // of the study
	row  int
	have map[string]cell
}

// writeSteps writes the effects of the studies that no table took, one row for each
// number that goes into a conversion or comes out of it.
func (o *outcome) writeSteps(s *sheet, row int, done []bool) {
	started := false
	for i := range o.o.Studies {
		if done[i] {
			continue
		}
		if !started {
			s.text(1, row, look{role: section}, "From other numbers, step by step")
			for j, h := range []string{"study", "number", "value", "", "what is done", "", "", "", "", "source"} {
				s.text(j+1, row+1, look{role: map[bool]role{true: head, false: headText}[h == "value"]}, h)
			}
			row, started = row+2, true
		}
		row = o.writeChain(s, row, i) + 1
	}
}

// writeChain writes one study's steps and returns the row under them.
func (o *outcome) writeChain(s *sheet, row, i int) int {
	study := &o.o.Studies[i]
	c := &chain{o: o, s: s, name: study.Source.Name, row: row, have: map[string]cell{}}
	s.text(1, row, look{role: plain}, study.Source.Name)
	for _, n := range study.Source.Numbers {
		if at, ok := o.numbers[study.Source][n.Field]; ok {
			c.have[n.Field.String()] = at
		}
	}
	for _, step := range study.Conversions {
		c.step(step)
	}
	o.y[i] = c.last("estimate y", []string{"estimate", review.AnalysisEstimate.String()}, study.Estimate.Y)
	o.se[i] = c.last("its se", []string{"se"}, study.Estimate.SE)
	return c.row
}

// step writes one conversion.
func (c *chain) step(step effect.Conversion) {
	c.s.text(5, c.row, look{role: plain}, step.What)
	c.s.text(10, c.row, look{role: soft}, step.Source)
	refs := map[string]cell{}
	for i, v := range step.From {
		refs[fmt.Sprint(i+1)] = c.takes(v)
	}
	formulas := formulasOf(c.o.o.Analysis.Measure, step)
	arm := ""
	if len(step.From) > 0 {
		arm = armOf(step.From[0].Name)
	}
	for i, v := range step.To {
		c.s.text(2, c.row, look{role: plain}, v.Name)
		at, stands := cell{}, false
		if i < len(formulas) {
			if text, err := fill(c.s, formulas[i], refs); err == nil {
				at, stands = c.s.live(3, c.row, general, v.Value, text)
			}
		}
		if at.sheet == nil {
			at = c.s.entered(3, c.row, general, v.Value)
		}
		if !stands {
			c.o.still(c.name + ": " + step.What)
		}
		refs[fmt.Sprintf("=%d", i+1)] = at
		c.call(v.Name, arm, at)
		c.row++
	}
}

// call gives a number its name; that of a change takes the place of its arm's.
func (c *chain) call(name, arm string, at cell) {
	if ofChange, ok := strings.CutSuffix(name, " of change"); ok {
		name = ofChange + arm
	}
	c.have[name] = at
}

// takes writes a number that goes into a step: a reference to where it stands, or
// itself where it stands nowhere.
func (c *chain) takes(v effect.Value) cell {
	c.s.text(2, c.row, look{role: soft}, "  "+v.Name)
	defer func() { c.row++ }()
	if at, ok := c.have[v.Name]; ok && same(at.number(), v.Value) {
		return c.s.formula(3, c.row, look{role: computed}, "%s", at)
	}
	if added, ok := c.have["added"+armOf(v.Name)]; ok {
		if at, ok := c.have[v.Name]; ok {
			for times := 1.; times <= 2; times++ {
				if same(at.number()+times*added.number(), v.Value) {
					return c.s.formula(3, c.row, look{role: computed}, "%s+%s*%s", at, times, added)
				}
			}
		}
	}
	if math.IsInf(v.Value, 0) {
		return c.s.text(3, c.row, look{role: plain}, "infinite: the normal law")
	}
	if at, ok := c.follows(v); ok {
		return at
	}
	if v.Name != "ci level" {
		c.o.still(c.name + ": " + v.Name + " as the program took it")
	}
	return c.s.entered(3, c.row, general, v.Value)
}

// otherwise are the formulas of numbers that a step takes under a name which the sheet
// does not have.
var otherwise = map[string][]string{
	"degrees of freedom": {"{total treated}+{total control}-2", "{total}-2", "{total}-1", "{total treated}-1", "{total control}-1"},
	"mean difference":    {"{mean treated}-{mean control}", "{estimate}"},
	"z":                  {"{t}", "-{t}"},
	"t":                  {"-{t}"},
	"total":              {"{total treated}", "{total control}"},
}

// follows writes a number as what it follows from, if that is known.
func (c *chain) follows(v effect.Value) (cell, bool) {
	for _, text := range otherwise[v.Name] {
		filled, err := fill(c.s, text, c.have)
		if err != nil {
			continue
		}
		if _, value, err := c.s.evaluate(filled, nil); err == nil && same(value.Number, v.Value) {
			return c.s.formula(3, c.row, look{role: computed}, filled), true
		}
	}
	return cell{}, false
}

// armOf is the ending by which a number's name says its arm, with a blank before it.
func armOf(name string) string {
	for _, arm := range []string{" treated", " control"} {
		if len(name) > len(arm) && name[len(name)-len(arm):] == arm {
			return arm
		}
	}
	return ""
}

// last writes what the steps end in: the number called by the first of some names that
// there is.
func (c *chain) last(label string, names []string, want float64) cell {
	c.s.text(2, c.row, look{role: plain}, label)
	defer func() { c.row++ }()
	for _, name := range names {
		if at, ok := c.have[name]; ok {
			written, _ := c.s.key(3, c.row, decimals6, want, "%s", at)
			return written
		}
	}
	return c.s.entered(3, c.row, decimals6, want)
}
