package audit

import (
	"fmt"
	"math"

	"steelyard/meta/evidence"
)

// wordFormula names the strength of steps in a cell.
const wordFormula = `IF(ABS(%[1]s)<1,"faint",IF(ABS(%[1]s)<2,"fair",IF(ABS(%[1]s)<3,"firm",IF(ABS(%[1]s)<4,"heavy","massive"))))`

// evidence writes the evidence for an effect over none, and what it makes of priors.
func (l *listing) evidence() {
	o, r := l.o, l.o.fit().Mean.Evidence
	l.section("Evidence for an effect over none")
	ln := l.lnEvidence()
	steps := l.put(line{label: "steps", source: "ln evidence / ln(2 + √3).", form: decimals4, name: "steps", key: true}, stepsFormula, ln)
	l.put(line{label: "in a word", source: "Below 1 step faint, from 1 fair, from 2 firm, from 3 heavy, from 4 massive.", name: "word"}, wordFormula, steps)
	l.put(line{label: "favours", name: "favours"}, `IF(%s>0,"effect","no effect")`, ln)
	if r.Ln() < 600 {
		l.put(line{label: "odds, effect : none", source: "exp(ln evidence).", form: decimals4, name: "odds"}, "EXP(%s)", ln)
	}
	l.s.text(1, l.row, look{role: soft}, "It is no probability that a treatment works, and bias is not in this number.")
	l.row++
	for _, b := range o.o.Result.Posterior {
		row := l.row
		after := b.Posterior
		prior := l.s.number(3, row, look{input, percent}, b.Prior)
		l.put(line{label: "probability of an effect, from the prior in the shaded cell", source: "prior odds × exp(ln evidence), as a probability.", form: percent, want: &after}, "1/(1+EXP(-(LN(%s/(1-%s))+%s)))", prior, prior, ln)
	}
	doubt := o.o.Result.DoubtersPrior
	if doubt.Posterior > 0 {
		level := l.s.number(3, l.row, look{input, percent}, doubt.Posterior)
		l.put(line{label: "doubter's prior: below it the shaded probability is not reached", source: "1/(1 + exp(ln evidence)(1 − level)/level).", form: small, want: &doubt.Prior}, "1/(1+EXP(%s+LN((1-%s)/%s)))", ln, level, level)
	}
}

// lnEvidence writes the natural logarithm of the evidence.
func (l *listing) lnEvidence() cell {
	o, mean := l.o, l.o.fit().Mean
	want := mean.Evidence.Ln()
	d := line{label: "ln evidence", form: decimals6, name: "ln_evidence", key: true, want: &want}
	statistic, have := o.cells["statistic"]
	if !o.moves() || !have {
		d.source = "Entered: the program's own number."
		return l.fixed(d, want)
	}
	if form := o.o.Analysis.Weighing.Form; !o.o.Analysis.Weighing.Own() {
		d.source = fmt.Sprintf("Entered: evidence %s rests on priors and needs an integral of its own.", form)
		o.still(fmt.Sprintf("the evidence, in its form %s", form))
		return l.fixed(d, want)
	}
	switch {
	case !o.student(mean.K):
		d.source = "Dudbridge 2024, normal form: (z² − 1 − ln 2)/2."
		return l.put(d, "(%s^2-1-LN(2))/2", statistic)
	case o.studentForm():
		d.source = "Student-t form: a constant by degrees of freedom, from the sheet of tables, + ½(df+1) ln(1 + t²/df)."
		return l.put(d, "INDEX(student_constant,%[1]s)+(%[1]s+1)/2*LN(1+%[2]s^2/%[1]s)", o.cells["df"], statistic)
	}
	if math.Exp(mean.LnP) < negligible {
		d.source = "Entered: p is too small for a spreadsheet."
		return l.fixed(d, want)
	}
	z := l.put(line{label: "z matched to t", source: "The z that has the sign and the p-value of t.", form: decimals6}, "-SIGN(%[1]s)*NORMSINV(TDIST(ABS(%[1]s),%[2]s,2)/2)", statistic, o.cells["df"])
	d.source = "Dudbridge 2024, normal form at the matched z: (z² − 1 − ln 2)/2."
	return l.put(d, "(%s^2-1-LN(2))/2", z)
}

// writeTables writes what spreadsheets have no function for, by degrees of freedom.
func (b *book) writeTables(most int) {
	s := b.sheet("tables")
	s.text(1, 1, look{role: heading}, "Tables")
	s.text(1, 2, look{role: subtitle}, "Entered by the program: spreadsheets have no digamma function. The Student-t form of evidence takes its constant from here.")
	s.text(1, 4, look{role: head}, "degrees of freedom")
	c := s.text(2, 4, look{role: head}, "constant of the Student-t form")
	s.note(c, "ln evidence at t = 0: −(lnΓ(n) + lnΓ((n−1)/2) − lnΓ(n/2) − lnΓ(n−½) + b₁ − b₀), n = df + 1; b₁ = (n−½)(ψ(n−½) − ψ((n−1)/2) − ln 2), b₀ = n(ψ(n) − ψ(n/2) − ln 2).")
	for df := 1; df <= most; df++ {
		s.number(1, 4+df, look{computed, whole}, float64(df))
		s.entered(2, 4+df, decimals6, evidence.Student(0, float64(df)).Ln())
	}
	b.name("student_constant", block{s.at(2, 5), s.at(2, 4+most)})
	s.finish(page{widths: []float64{14, 18}, frozen: s.at(1, 5), repeated: 4, upright: true})
}
