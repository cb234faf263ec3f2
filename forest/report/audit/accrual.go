package audit

import (
	"fmt"
	"math"
	"strings"

	"steelyard/meta"
	"steelyard/meta/effect"
)

// Columns of the tables of refits.
const (
	refitNumber = iota + 1
	refitWho
	refitAt
	refitK
	refitTau2
	refitEstimate
	refitSE
	refitLow
	refitHigh
	refitLn
	refitSteps
	refitChange
	refitReader
	refitReaderLow
	refitReaderHigh
	refitSettled
	refitWorking = refitSettled + 2 // from here on the working
)

var refitHeads = map[int][2]string{
	refitK: {"studies", ""}, refitTau2: {"τ²", "By the model's estimator; its steps stand to the right."},
	refitEstimate: {"mean effect", "Σwy/Σw over the studies of the row, w = 1/(v + τ²)."}, refitSE: {"standard error", "The one that the interval uses."},
	refitLow: {"low", ""}, refitHigh: {"high", ""}, refitLn: {"ln evidence", "As on the sheet of the result; a single study in the normal form."},
	refitSteps: {"steps", "ln evidence / ln(2 + √3)."}, refitReader: {"as read", ""}, refitReaderLow: {"low", ""}, refitReaderHigh: {"high", ""},
	refitSettled: {"τ² came to rest", "Whether the last step of the iteration still moved τ²."},
}

// refit is one row of such a table.
type refit struct {
	p    part
	mean meta.Mean
	row  int
}

const refitHead, refitFirst = 4, 5

// writeCumulative writes the result as the studies entered.
func (o *outcome) writeCumulative() {
	if o.o.Accrual == nil || len(o.o.Accrual.Cumulative) == 0 {
		return
	}
	s := o.open("cumulative", "Cumulative", "the result as the studies entered, by "+o.o.Accrual.Order.By+"; the model is pooled anew at each step")
	o.refitHeads(s, "step", "entered", "at", "steps added")
	for i, step := range o.o.Accrual.Cumulative {
		row := refitFirst + i
		number := s.number(refitNumber, row, look{index, whole}, float64(i+1))
		var who []string
		for _, entered := range step.Entered {
			who = append(who, o.o.Studies[entered].Source.Name)
		}
		s.text(refitWho, row, look{role: plain}, strings.Join(who, ", "))
		s.text(refitAt, row, look{role: plain}, step.At)
		if step.Problem != nil {
			s.text(refitTau2, row, look{role: soft}, "no result: "+step.Problem.Error())
			continue
		}
		o.refit(s, refit{o.until(number, step.K), step.Mean, row})
		if step.Added != nil && !o.o.Analysis.NullMissing {
			s.live(refitChange, row, decimals2, *step.Added, "%s-%s", s.at(refitSteps, row), s.at(refitSteps, row-1))
		}
	}
	o.finishRefits(s, refitFirst+len(o.o.Accrual.Cumulative)-1)
}

// writeLeaveOneOut writes the result without each study.
func (o *outcome) writeLeaveOneOut() {
	if o.o.Accrual == nil || len(o.o.Accrual.LeaveOneOut) == 0 {
		return
	}
	s := o.open("leave-one-out", "Leave one out", "the result without each study, pooled anew; what each carries of the evidence")
	o.refitHeads(s, "n", "left out", "", "steps carried")
	for i, omission := range o.o.Accrual.LeaveOneOut {
		row := refitFirst + i
		number := s.number(refitNumber, row, look{index, whole}, float64(omission.Row+1))
		s.text(refitWho, row, look{role: plain}, o.o.Studies[omission.Row].Source.Name)
		if omission.Problem != nil {
			s.text(refitTau2, row, look{role: soft}, "no result: "+omission.Problem.Error())
			continue
		}
		o.refit(s, refit{o.without(number), omission.Mean, row})
		if !o.o.Analysis.NullMissing {
			s.live(refitChange, row, decimals2, omission.Carried, "%s-%s", o.cells["steps"], s.at(refitSteps, row))
		}
	}
	o.finishRefits(s, refitFirst+len(o.o.Accrual.LeaveOneOut)-1)
}

func (o *outcome) refitHeads(s *sheet, number, who, at, change string) {
	heads := map[int][2]string{refitNumber: {number, ""}, refitWho: {who, ""}, refitAt: {at, ""}, refitChange: {change, ""}}
	for col := refitNumber; col <= refitSettled; col++ {
		h, ok := heads[col]
		if !ok {
			h = refitHeads[col]
		}
		c := s.text(col, refitHead, look{role: map[bool]role{true: headText, false: head}[col <= refitAt]}, h[0])
		if h[1] != "" {
			s.note(c, h[1])
		}
	}
	if !o.moves() {
		o.still("the rows of " + s.name)
	}
}

func (o *outcome) finishRefits(s *sheet, last int) {
	s.text(refitWorking, 2, look{role: subtitle}, "the working: how τ² of each row is found, and the sums at it")
	s.finish(page{widths: []float64{6, 26, 10, 8, 11, 11, 11, 11, 11, 11, 8, 9, 10, 10, 10, 9, 3}, rest: 12,
		frozen: s.at(refitAt, refitFirst), repeated: refitHead, columns: refitSettled, last: last})
}

// refit writes the result of a part of the studies.
func (o *outcome) refit(s *sheet, r refit) {
	m, row := o.o.Analysis.Measure, r.row
	s.number(refitK, row, look{computed, whole}, float64(r.p.k))
	if !o.moves() {
		o.refitEntered(s, r)
		return
	}
	t := &strip{s: s, col: refitWorking, row: row, role: computed}
	if r.p.k > 1 || len(o.o.Studies) == 1 {
		t.heads = refitHead
	}
	found := o.partTau(t, r.p)
	tau2, _ := s.live(refitTau2, row, decimals6, r.mean.Tau2, "%s", found.tau2)
	u := r.p.withQ(t, r.p.at(t, tau2))
	estimate, _ := s.key(refitEstimate, row, decimals6, r.mean.Estimate, "%s", u.mean)
	se, _ := s.live(refitSE, row, decimals6, r.mean.SE, o.seFormula(r.p), u.w, u.q)
	quantile := "NORMSINV((1-%s)/2)"
	if o.student(r.p.k) {
		quantile = "TINV(1-%s," + r.p.df() + ")"
	}
	signs := []string{"+", "-"}
	if o.student(r.p.k) {
		signs = []string{"-", "+"}
	}
	low, _ := s.live(refitLow, row, decimals6, r.mean.Low, "%s"+signs[0]+quantile+"*%s", estimate, o.cells["level"], se)
	high, _ := s.live(refitHigh, row, decimals6, r.mean.High, "%s"+signs[1]+quantile+"*%s", estimate, o.cells["level"], se)
	for i, want := range []float64{r.mean.Estimate, r.mean.Low, r.mean.High} {
		of := []cell{estimate, low, high}[i]
		s.live(refitReader+i, row, decimals4, effect.ToReader(m, want), toReader(m, of.local()))
	}
	if found.settled.sheet != nil {
		s.formula(refitSettled, row, look{role: index}, "%s", found.settled)
	}
	if !o.o.Analysis.NullMissing {
		o.refitEvidence(s, t, r, estimate, se)
	}
}

// partTau writes a part's τ² by the model's estimator.
func (o *outcome) partTau(t *strip, p part) spread {
	if o.fit().Model.Effects == meta.CommonEffect || p.k < 2 {
		return spread{tau2: t.zero()}
	}
	return tauFormulas(o.fit().Model.Tau)(p, t)
}

// seFormula is the standard error of the interval, of Σw and Q.
func (o *outcome) seFormula(p part) string {
	if !o.student(p.k) {
		return "1/SQRT(%s)+0*%s"
	}
	if o.fit().Model.Interval == meta.HartungKnapp {
		return "SQRT(1/%s*%s/" + p.df() + ")"
	}
	return "SQRT(1/%s*MAX(1,%s/" + p.df() + "))"
}

// refitEvidence writes the evidence of a row.
func (o *outcome) refitEvidence(s *sheet, t *strip, r refit, estimate, se cell) {
	want := r.mean.Evidence.Ln()
	z := t.put("statistic", general, "(%s-%s)/%s", estimate, o.cells["null"], se)
	text := "(%s^2-1-LN(2))/2"
	switch {
	case !o.o.Analysis.Weighing.Own(), o.student(r.p.k) && math.Exp(r.mean.LnP) < negligible:
		s.entered(refitLn, r.row, decimals4, want)
		s.formula(refitSteps, r.row, look{result, decimals2}, stepsFormula, s.at(refitLn, r.row))
		return
	case o.student(r.p.k) && o.studentForm():
		text = fmt.Sprintf("INDEX(student_constant,%s)+(%s+1)/2*LN(1+%%s^2/%s)", r.p.df(), r.p.df(), r.p.df())
	case o.student(r.p.k):
		z = t.put("matched z", general, "-SIGN(%[1]s)*NORMSINV(TDIST(ABS(%[1]s),"+r.p.df()+",2)/2)", z)
	}
	ln, _ := s.live(refitLn, r.row, decimals4, want, text, z)
	s.formula(refitSteps, r.row, look{result, decimals2}, stepsFormula, ln)
}

// refitEntered writes the program's own numbers of a row.
func (o *outcome) refitEntered(s *sheet, r refit) {
	m := o.o.Analysis.Measure
	for i, x := range []float64{r.mean.Tau2, r.mean.Estimate, r.mean.SE, r.mean.Low, r.mean.High} {
		s.entered(refitTau2+i, r.row, decimals6, x)
	}
	for i, y := range []float64{r.mean.Estimate, r.mean.Low, r.mean.High} {
		s.entered(refitReader+i, r.row, decimals4, effect.ToReader(m, y))
	}
	if !o.o.Analysis.NullMissing {
		ln := s.entered(refitLn, r.row, decimals4, r.mean.Evidence.Ln())
		s.formula(refitSteps, r.row, look{result, decimals2}, stepsFormula, ln)
	}
}
