package audit

import (
	"fmt"
	"math"

	"steelyard/forest/words"
	"steelyard/meta"
	"steelyard/meta/effect"
)

// listing is a sheet of results, one in a row: what it is, its number, the same as a
// reader sees it where it has a scale, and whence the formula.
type listing struct {
	o   *outcome
	s   *sheet
	row int
}

func (l *listing) section(title string) {
	l.row++
	l.s.text(1, l.row, look{role: section}, title)
	l.row++
}

// line is one row of a listing.
type line struct {
	label, source string
	form          format
	name          string // of the cell, without the outcome's number; blank for none
	key           bool   // it is an answer
	want          *float64
}

// put writes a line with a formula: checked against want where there is one.
func (l *listing) put(d line, text string, arguments ...any) cell {
	l.s.text(1, l.row, look{role: plain}, d.label)
	r := computed
	if d.key {
		r = result
	}
	var c cell
	if d.want != nil {
		c, _ = l.s.lively(2, l.row, look{r, d.form}, *d.want, text, arguments...)
	} else {
		c = l.s.formula(2, l.row, look{r, d.form}, text, arguments...)
	}
	l.end(d, c)
	return c
}

// fixed writes a line with a number that the program computed.
func (l *listing) fixed(d line, x float64) cell {
	l.s.text(1, l.row, look{role: plain}, d.label)
	c := l.s.entered(2, l.row, d.form, x)
	l.end(d, c)
	return c
}

func (l *listing) end(d line, c cell) {
	if d.source != "" {
		l.s.text(4, l.row, look{role: soft}, d.source)
		l.s.note(c, d.source)
	}
	if d.name != "" {
		l.o.keep(d.name, c)
	}
	l.row++
}

// reader writes the line just written as a reader sees it: entered where that is.
func (l *listing) reader(c cell, y float64) {
	m := l.o.o.Analysis.Measure
	if !c.live() {
		l.s.entered(3, c.row, decimals4, effect.ToReader(m, y))
		return
	}
	l.s.live(3, c.row, decimals4, effect.ToReader(m, y), toReader(m, c.local()))
}

// writeResult writes interval, prediction, heterogeneity and evidence.
func (o *outcome) writeResult() {
	s := o.open("result", "Result", words.Model(o.fit()))
	l := &listing{o: o, s: s, row: 4}
	for i, h := range []string{"", "analysis scale", "as read: " + words.Measure(o.o.Analysis.Measure), "formula and source"} {
		s.text(i+1, 4, look{role: []role{headText, head, head, headSoft}[i]}, h)
	}
	l.interval()
	l.prediction()
	l.heterogeneity()
	if !o.o.Analysis.NullMissing {
		l.evidence()
	}
	l.commonEffect()
	l.others()
	s.finish(page{widths: []float64{46, 15, 15, 78}, rest: 14, frozen: s.at(2, 5), repeated: 4, columns: 4, last: l.row})
}

const negligible = 1e-300 // smaller probabilities are beyond a spreadsheet's range

// interval writes the mean with its interval.
func (l *listing) interval() {
	o, mean := l.o, l.o.fit().Mean
	l.section("Mean effect and its interval")
	if !o.moves() {
		for _, d := range []struct {
			label, name string
			value       float64
			read        bool
		}{
			{"mean effect", "estimate", mean.Estimate, true}, {"standard error", "se", mean.SE, false}, {"lower limit", "ci_low", mean.Low, true},
			{"upper limit", "ci_high", mean.High, true}, {"test statistic", "statistic", mean.Statistic, false}, {"p, two-sided", "p", math.Exp(mean.LnP), false},
		} {
			if o.o.Analysis.NullMissing && (d.name == "statistic" || d.name == "p") {
				continue
			}
			c := l.fixed(line{label: d.label, name: d.name, form: decimals6, source: "Entered: the program's own number, by " + words.Model(o.fit()) + "."}, d.value)
			if d.read {
				l.reader(c, d.value)
			}
		}
		return
	}
	at := o.cells
	estimate := l.put(line{label: "mean effect", source: "Σwy/Σw.", form: decimals6, name: "estimate", key: true, want: &mean.Estimate}, "%s", at["mean"])
	l.reader(estimate, mean.Estimate)
	se := l.put(line{label: "standard error of the model", source: "1/√Σw.", form: decimals6, name: "se_model"}, "1/SQRT(%s)", at["sum_w"])
	critical := "-NORMSINV((1-%s)/2)"
	arguments := []any{at["level"]}
	if o.student(mean.K) {
		se = l.hartungKnapp(se)
		critical = "TINV(1-%s,%s)"
		arguments = append(arguments, at["df"])
	}
	o.keep("se", se)
	t := l.put(line{label: "quantile", source: "Of " + lawName(o.student(mean.K)) + " for the level.", form: decimals6}, critical, arguments...)
	low := l.put(line{label: "lower limit", source: "mean − quantile × standard error.", form: decimals6, name: "ci_low", key: true, want: &mean.Low}, "%s-%s*%s", estimate, t, se)
	l.reader(low, mean.Low)
	high := l.put(line{label: "upper limit", source: "mean + quantile × standard error.", form: decimals6, name: "ci_high", key: true, want: &mean.High}, "%s+%s*%s", estimate, t, se)
	l.reader(high, mean.High)
	if o.o.Analysis.NullMissing {
		return
	}
	statistic := l.put(line{label: "test statistic", source: "(mean − null)/standard error.", form: decimals4, name: "statistic", want: &mean.Statistic}, "(%s-%s)/%s", estimate, at["null"], se)
	p := math.Exp(mean.LnP)
	if p < negligible {
		l.fixed(line{label: "ln p, two-sided", source: "Entered: p is too small for a spreadsheet.", form: decimals4}, mean.LnP)
		o.still("p, which is too small for a spreadsheet, and the evidence that rests on it")
		return
	}
	if o.student(mean.K) {
		l.put(line{label: "p, two-sided", source: "Tails of Student's t.", form: small, name: "p", want: &p}, "TDIST(ABS(%s),%s,2)", statistic, at["df"])
		return
	}
	l.put(line{label: "p, two-sided", source: "Tails of the normal law.", form: small, name: "p", want: &p}, "2*NORMSDIST(-ABS(%s))", statistic)
}

func lawName(student bool) string {
	if student {
		return "Student's t on k − 1 degrees of freedom"
	}
	return "the normal law"
}

// hartungKnapp writes the standard error of the Hartung–Knapp interval.
func (l *listing) hartungKnapp(se cell) cell {
	o, at := l.o, l.o.cells
	df := l.put(line{label: "degrees of freedom", source: "k − 1.", form: whole, name: "df"}, "%s-1", at["k"])
	q := l.put(line{label: "q", source: "Q(τ²)/(k − 1). Hartung & Knapp 2001; Sidik & Jonkman 2002.", form: decimals6}, "%s/%s", at["q_tau"], df)
	text, source := "SQRT(%s)*%s", "Standard error of the model × √q."
	if o.fit().Model.Interval == meta.HartungKnappFloor {
		text, source = "SQRT(MAX(1,%s))*%s", "Standard error of the model × √max(1, q). Floor: Röver, Knapp & Friede 2015."
	}
	want := o.fit().Mean.SE
	return l.put(line{label: "standard error of the interval", source: source, form: decimals6, key: true, want: &want}, text, q, se)
}

// prediction writes the interval for the effect in a new setting.
func (l *listing) prediction() {
	o := l.o
	p := o.fit().Prediction
	if p == nil {
		return
	}
	l.section("Prediction interval: the true effect in a new setting")
	if !o.moves() || p.Method == meta.PredictionBootstrap {
		const source = "Entered: the program's own number, which no closed formula gives."
		l.reader(l.fixed(line{label: "lower limit", source: source, form: decimals6, name: "prediction_low"}, p.Low), p.Low)
		l.reader(l.fixed(line{label: "upper limit", source: source, form: decimals6, name: "prediction_high"}, p.High), p.High)
		o.still("the prediction interval")
		return
	}
	at := o.cells
	less := map[meta.PredictionMethod]float64{meta.PredictionTwoLess: 2, meta.PredictionOneLess: 1}[p.Method]
	t := l.put(line{label: "quantile", source: "Of Student's t. Higgins, Thompson & Spiegelhalter 2009.", form: decimals6}, "TINV(1-%s,%s-%s)", at["level"], at["k"], less)
	half := l.put(line{label: "half width", source: "quantile × √(τ² + 1/Σw).", form: decimals6}, "%s*SQRT(%s+%s^2)", t, at["tau2"], at["se_model"])
	wide := l.put(line{label: "half width with the interval's standard error", source: "quantile × √(τ² + se²): used where a limit would else lie inside the interval for the mean.", form: decimals6}, "%s*SQRT(%s+%s^2)", t, at["tau2"], at["se"])
	inside := l.put(line{label: "inside the interval for the mean (1: yes)", source: "The effect in a new setting is no better known than the mean.", form: whole},
		"IF(OR(%[1]s-%[2]s>%[3]s+0.000000001*(%[4]s-%[3]s),%[1]s+%[2]s<%[4]s-0.000000001*(%[4]s-%[3]s)),1,0)", at["estimate"], half, at["ci_low"], at["ci_high"])
	low := l.put(line{label: "lower limit", source: "mean − half width.", form: decimals6, name: "prediction_low", key: true, want: &p.Low},
		"IF(%s=1,MIN(%s,%s-%s),%s-%s)", inside, at["ci_low"], at["estimate"], wide, at["estimate"], half)
	l.reader(low, p.Low)
	high := l.put(line{label: "upper limit", source: "mean + half width.", form: decimals6, name: "prediction_high", key: true, want: &p.High},
		"IF(%s=1,MAX(%s,%s+%s),%s+%s)", inside, at["ci_high"], at["estimate"], wide, at["estimate"], half)
	l.reader(high, p.High)
}

// commonEffect writes the common-effect result beside random effects.
func (l *listing) commonEffect() {
	o := l.o
	other := o.o.Result.Other
	if other == nil || other.Method != "" || other.Model.Effects != meta.CommonEffect || other.Model.Interval != meta.Wald {
		return
	}
	l.section("Beside it: one common effect (τ² = 0, Wald interval)")
	w, y := o.named("w_common"), o.yName()
	mean := other.Mean
	estimate := l.put(line{label: "common effect", source: "Σy/v / Σ1/v.", form: decimals6, name: "common_estimate", want: &mean.Estimate}, "SUMPRODUCT("+w+","+y+")/SUM("+w+")")
	l.reader(estimate, mean.Estimate)
	se := l.put(line{label: "standard error", source: "1/√Σ1/v.", form: decimals6, name: "common_se", want: &mean.SE}, "1/SQRT(SUM("+w+"))")
	low := l.put(line{label: "lower limit", form: decimals6, want: &mean.Low}, "%s+NORMSINV((1-%s)/2)*%s", estimate, o.cells["level"], se)
	l.reader(low, mean.Low)
	high := l.put(line{label: "upper limit", form: decimals6, want: &mean.High}, "%s-NORMSINV((1-%s)/2)*%s", estimate, o.cells["level"], se)
	l.reader(high, mean.High)
	if form := o.o.Analysis.Weighing.Form; !o.o.Analysis.NullMissing && form.UnderPrior() {
		l.fixed(line{label: fmt.Sprintf("ln evidence, %s", form), source: "Entered: it rests on the prior for the effect.", form: decimals4}, mean.Evidence.Ln())
	} else if !o.o.Analysis.NullMissing {
		ln := mean.Evidence.Ln()
		l.put(line{label: "ln evidence, normal form", source: "Dudbridge 2024: (z² − 1 − ln 2)/2.", form: decimals4, want: &ln}, "(((%s-%s)/%s)^2-1-LN(2))/2", estimate, o.cells["null"], se)
	}
}

// others writes what no formula gives: regions, evidence integrated over τ, and the
// result without converted numbers.
func (l *listing) others() {
	o, r := l.o, l.o.o.Result
	if r.Regions == nil && r.Integrated == nil && r.Without == nil && o.o.PValues == nil {
		return
	}
	l.section("By the program alone (entered; these do not move)")
	const source = "Entered: it needs numerical integration or a pooling of its own."
	for _, region := range r.Regions {
		l.fixed(line{label: region.Name + ": ln evidence against all other values", source: source, form: decimals4}, region.Evidence.Ln())
		l.fixed(line{label: region.Name + ": share of the posterior", source: source, form: decimals4}, region.Posterior)
	}
	if r.Integrated != nil {
		l.fixed(line{label: "ln evidence for an effect, τ integrated over its prior", source: source, form: decimals4}, r.Integrated.Effect().Ln())
	}
	if r.Without != nil {
		l.reader(l.fixed(line{label: "mean effect without converted numbers", source: source, form: decimals6}, r.Without.Mean.Estimate), r.Without.Mean.Estimate)
		l.fixed(line{label: "ln evidence without converted numbers", source: source, form: decimals4}, r.Without.Mean.Evidence.Ln())
	}
	if p := o.o.PValues; p != nil {
		l.fixed(line{label: "ln evidence of the studies known by p alone (Stouffer)", source: "Entered: they are no part of the pooled result.", form: decimals4}, p.Stouffer.Evidence.Ln())
		l.fixed(line{label: "ln evidence of the same (Fisher)", source: "Entered: they are no part of the pooled result.", form: decimals4}, p.Fisher.Evidence.Ln())
	}
	o.still("regions of the effect, evidence integrated over τ, studies known by p alone, and the result without converted numbers")
}
