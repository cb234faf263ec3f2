package audit

import (
	"steelyard/meta/synthesis"
)

// writeEffects writes the way from each study's numbers to its effect: a table for
// each kind of numbers, and step by step for what has no table.
func (o *outcome) writeEffects() {
	s := o.open("effects", "Effects from the numbers", "estimate and standard error of each pooled study, on the analysis scale: "+scaleName(o.o.Analysis.Measure))
	o.y, o.se = make([]cell, len(o.o.Studies)), make([]cell, len(o.o.Studies))
	done := make([]bool, len(o.o.Studies))
	row := 4
	for _, r := range o.recipes() {
		var rows []int
		for i := range o.o.Studies {
			if study := &o.o.Studies[i]; !done[i] && r.fits(study) && o.complete(r, study) {
				rows, done[i] = append(rows, i), true
			}
		}
		if len(rows) > 0 {
			row = o.writeRecipe(s, row, r, rows) + 1
		}
	}
	o.writeSteps(s, row, done)
	s.finish(page{widths: []float64{26}, rest: 12, frozen: s.at(2, 4), repeated: 2})
}

// complete reports whether the row has all numbers of a table.
func (o *outcome) complete(r recipe, study *synthesis.Study) bool {
	for _, f := range r.inputs {
		if _, ok := o.numbers[study.Source][f]; !ok {
			return false
		}
	}
	return true
}

// writeRecipe writes a table and returns the row under it.
func (o *outcome) writeRecipe(s *sheet, row int, r recipe, rows []int) int {
	s.text(1, row, look{role: section}, r.title)
	row++
	s.text(1, row, look{role: headText}, "study")
	for j, f := range r.inputs {
		s.text(2+j, row, look{role: head}, f.String())
	}
	for j, d := range r.steps {
		s.note(s.text(2+len(r.inputs)+j, row, look{role: head}, d.name), d.note)
	}
	for _, i := range rows {
		row++
		study := &o.o.Studies[i]
		s.text(1, row, look{role: plain}, study.Source.Name)
		have := map[string]cell{}
		for j, f := range r.inputs {
			c := s.formula(2+j, row, look{role: computed}, "%s", o.numbers[study.Source][f])
			have[f.String()] = c
			have[f.String()+" reported"] = c
		}
		first := 2 + len(r.inputs)
		for j, d := range r.steps[:len(r.steps)-2] {
			text, err := fill(s, d.formula, have)
			o.book.do(err)
			have[d.name] = s.formula(first+j, row, look{computed, d.form}, text)
		}
		last := first + len(r.steps) - 2
		o.y[i] = o.effectCell(s, last, row, r.steps[len(r.steps)-2], have, study.Estimate.Y)
		have["estimate"] = o.y[i]
		o.se[i] = o.effectCell(s, last+1, row, r.steps[len(r.steps)-1], have, study.Estimate.SE)
	}
	return row + 1
}

func (o *outcome) effectCell(s *sheet, col, row int, d derived, have map[string]cell, want float64) cell {
	text, err := fill(s, d.formula, have)
	o.book.do(err)
	c, _ := s.key(col, row, d.form, want, text)
	return c
}
