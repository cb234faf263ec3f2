package audit

import (
	"fmt"

	"steelyard/forest/words"
	"steelyard/meta"
	"steelyard/meta/effect"
)

// Columns of the table of studies on the sheet of pooling.
const (
	colNumber = iota + 1
	colStudy
	colEnters
	colY
	colSE
	colV
	colW0
	colW
	colShare
	colWY
	colWQ
	colReader
	colLow
	colHigh
	colLn
	colSteps
)

// firstStudy is the first row of that table, under the settings.
const firstStudy = 12

// pooling is the sheet of pooling with its table of studies.
type pooling struct {
	o    *outcome
	s    *sheet
	last int // row of the last study
}

// column is the table's column as a block.
func (p pooling) column(col int) block {
	return block{p.s.at(col, firstStudy), p.s.at(col, p.last)}
}

// startPooling writes the settings and the studies' effects, so that all else can
// refer to them by name.
func (o *outcome) startPooling() pooling {
	model := o.fit().Model
	s := o.open("pooling", "Pooling", words.Model(o.fit())+"; "+scaleName(o.o.Analysis.Measure))
	p := pooling{o: o, s: s, last: firstStudy + len(o.o.Studies) - 1}
	s.text(1, 4, look{role: section}, "Settings")
	label := func(row int, text string) { s.text(1, row, look{role: plain}, text) }
	label(5, "level of every interval")
	o.keep("level", s.number(colY, 5, look{input, general}, model.Level))
	label(6, "effect that counts as none, as a reader sees it")
	label(7, "the same on the analysis scale")
	if o.o.Analysis.NullMissing {
		s.text(colY, 6, look{role: soft}, "none given: no evidence is weighed")
	} else {
		m := o.o.Analysis.Measure
		reader := o.keep("null_reader", s.number(colY, 6, look{input, general}, effect.ToReader(m, model.Null)))
		null, _ := s.live(colY, 7, general, model.Null, toAnalysis(m, reader.local()))
		o.keep("null", null)
	}
	for i := range o.o.Studies {
		row, study := firstStudy+i, &o.o.Studies[i]
		s.number(colNumber, row, look{index, whole}, float64(i+1))
		s.text(colStudy, row, look{role: plain}, study.Source.Name)
		if step := o.entersAt(i); step > 0 {
			s.number(colEnters, row, look{index, whole}, float64(step))
		}
		y := s.formula(colY, row, look{computed, decimals6}, "%s", o.y[i])
		se := s.formula(colSE, row, look{computed, decimals6}, "%s", o.se[i])
		v := s.formula(colV, row, look{computed, decimals6}, "%s^2", se)
		s.formula(colW0, row, look{computed, decimals4}, "1/%s", v)
		o.studyAlone(s, row, i, y, se)
	}
	for _, name := range []struct {
		name string
		col  int
	}{{"n", colNumber}, {"enters", colEnters}, {"y", colY}, {"se_study", colSE}, {"v", colV}, {"w_common", colW0}} {
		o.book.name(o.named(name.name), p.column(name.col))
	}
	label(8, "studies")
	o.keep("k", s.formula(colY, 8, look{computed, whole}, "COUNT("+o.yName()+")"))
	return p
}

// entersAt is the step of the cumulative analysis at which a study enters; 0 where
// there is none.
func (o *outcome) entersAt(study int) int {
	if o.o.Accrual == nil {
		return 0
	}
	for i, step := range o.o.Accrual.Cumulative {
		for _, row := range step.Entered {
			if row == study {
				return i + 1
			}
		}
	}
	return 0
}

// studyAlone writes what one study says by itself.
func (o *outcome) studyAlone(s *sheet, row, i int, y, se cell) {
	study, m := &o.o.Studies[i], o.o.Analysis.Measure
	reader := func(col int, want float64, text string, arguments ...any) {
		s.live(col, row, decimals4, effect.ToReader(m, want), toReader(m, "("+text+")"), arguments...)
	}
	reader(colReader, study.Estimate.Y, "%s", y)
	reader(colLow, study.Interval.Low, "%s+NORMSINV((1-%s)/2)*%s", y, o.cells["level"], se)
	reader(colHigh, study.Interval.High, "%s-NORMSINV((1-%s)/2)*%s", y, o.cells["level"], se)
	if o.o.Analysis.NullMissing {
		return
	}
	ln, _ := s.live(colLn, row, decimals4, study.Evidence.Ln(), "(((%s-%s)/%s)^2-1-LN(2))/2", y, o.cells["null"], se)
	s.formula(colSteps, row, look{computed, decimals2}, stepsFormula, ln)
}

// stepsFormula turns a natural logarithm of evidence into steps.
const stepsFormula = "%s/LN(2+SQRT(3))"

// finishPooling writes the weights at the τ² used, and the sums.
func (p pooling) finishPooling(tau2 cell) {
	o, s := p.o, p.s
	notes := map[int][2]string{
		colNumber: {"n", ""}, colStudy: {"study", ""}, colEnters: {"enters at step", "Step of the cumulative analysis at which the study enters."},
		colY: {"estimate y", "On the analysis scale, from the sheet of effects."}, colSE: {"standard error", ""}, colV: {"variance v", "Square of the standard error."},
		colW0:    {"1/v", "Weight under a common effect."},
		colW:     {"weight w", "w = 1/(v + τ²), τ² from the sheet of the spread."},
		colShare: {"share of weight", "w/Σw."}, colWY: {"w·y", ""},
		colWQ:     {"w·(y − mean)²", "Summed: Q at the τ² used."},
		colReader: {"estimate as read", "As a reader sees it."}, colLow: {"low", "Wald limits of the study alone."}, colHigh: {"high", "Wald limits of the study alone."},
		colLn:    {"ln evidence", "Dudbridge 2024, normal form: (z² − 1 − ln 2)/2, for an effect over none, of the study alone."},
		colSteps: {"steps", "ln evidence over ln(2 + √3)."},
	}
	for col := colNumber; col <= colSteps; col++ {
		c := s.text(col, firstStudy-1, look{role: map[bool]role{true: headText, false: head}[col <= colStudy]}, notes[col][0])
		if text := notes[col][1]; text != "" {
			s.note(c, text)
		}
	}
	total := p.last + 1
	s.text(colStudy, total, look{role: result}, "sums, and the weighted mean")
	if !o.moves() {
		for i := range o.o.Studies {
			s.entered(colShare, firstStudy+i, percent, o.o.Studies[i].Weight)
		}
		o.still("the weights, the pooled result and all that follows from it: " + words.Model(o.fit()) + " is not written out in formulas here; the numbers are the program's own")
		p.finishSheet()
		return
	}
	for row := firstStudy; row <= p.last; row++ {
		w := s.formula(colW, row, look{computed, decimals4}, "1/(%s+%s)", s.at(colV, row), tau2)
		s.formula(colWY, row, look{computed, decimals4}, "%s*%s", w, s.at(colY, row))
	}
	w := o.keep("sum_w", s.formula(colW, total, look{result, decimals4}, "SUM(%s)", p.column(colW)))
	wy := s.formula(colWY, total, look{result, decimals4}, "SUM(%s)", p.column(colWY))
	mean := o.keep("mean", s.formula(colY, total, look{result, decimals6}, "%s/%s", wy, w))
	for i := range o.o.Studies {
		row := firstStudy + i
		s.live(colShare, row, percent, o.o.Studies[i].Weight, "%s/%s", s.at(colW, row), w)
		s.formula(colWQ, row, look{computed, decimals4}, "%s*(%s-%s)^2", s.at(colW, row), s.at(colY, row), mean)
	}
	s.formula(colShare, total, look{result, percent}, "SUM(%s)", p.column(colShare))
	o.keep("q_tau", s.formula(colWQ, total, look{result, decimals4}, "SUM(%s)", p.column(colWQ)))
	s.formula(colW0, total, look{result, decimals4}, "SUM(%s)", p.column(colW0))
	p.finishSheet()
}

func (p pooling) finishSheet() {
	p.s.finish(page{widths: []float64{5, 26, 9, 12, 12, 12, 11, 11, 9, 11, 12, 11, 11, 11, 11, 9}, frozen: p.s.at(colEnters, firstStudy), repeated: 2})
}

// common reports whether τ² is 0 by the model: for a common effect, and one study.
func (o *outcome) common() bool {
	return o.fit().Model.Effects == meta.CommonEffect || len(o.o.Studies) == 1
}

func (o *outcome) all() part { return part{k: len(o.o.Studies), o: o} }

// without is all studies but the one whose number stands in a cell.
func (o *outcome) without(number cell) part {
	return part{mask: fmt.Sprintf("(%s<>$%s)*", o.named("n"), number.local()), k: len(o.o.Studies) - 1, o: o}
}

// until is all studies that have entered by the step whose number stands in a cell.
func (o *outcome) until(step cell, k int) part {
	return part{mask: fmt.Sprintf("(%s<=$%s)*", o.named("enters"), step.local()), k: k, o: o}
}
