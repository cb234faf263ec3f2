package synthesis

import (
	"fmt"
	"math"
	"slices"

	"steelyard/meta"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/missing"
	"steelyard/meta/review"
)

// SmallStudyCaution says what asymmetry is not.
const SmallStudyCaution = "Asymmetry is not publication bias: small studies may differ in their people, their treatment or their care, be of lower quality, report selectively, or differ by the measure's own arithmetic or by chance (Sterne et al. 2011, BMJ 343:d4002)."

// NoProofCaution says what symmetry is not, and what adjusted results are for.
const NoProofCaution = "The tests have little power, and no asymmetry is no proof that nothing is missing. Adjusted results are sensitivity analyses: choose the method before results are seen, and report all that were run."

// Thresholds of rule A5.
const (
	leastForAsymmetry = 10  // studies
	leastSpread       = 1.5 // largest over smallest standard error
	largeOddsRatio    = 2   // beyond it, or one over it, a score-based test
	asymmetryLevel    = 0.1 // p below which asymmetry is reported
)

// SmallStudyWanted asks whether small studies show other effects.
type SmallStudyWanted struct {
	AllowFew bool    // below 10 studies too
	Step     float64 // one-sided p of the selection model's step; 0 for 0.025
}

// SmallStudy says whether small studies show other effects than large ones, and
// what the result would be under several ideas of why.
type SmallStudy struct {
	Refused  string // why nothing was run; blank where it was
	Few      bool   // refused for fewer than 10 studies, or run with so few on request
	Spread   float64
	Tables   int     // pooled studies with counts as they stand
	Step     float64 // one-sided p of the selection model's step
	Above    int     // studies above it; 0 where the model was not fitted
	Model    meta.Model
	Pooled   meta.Mean // without adjustment, by inverse variances
	FarOdds  bool      // an odds ratio so far from 1 that Egger's tests find asymmetry too often
	Tests    []AsymmetryTest
	Adjusted []AdjustedResult
}

// AsymmetryTest is one test. Where it could not be run Problem says why.
type AsymmetryTest struct {
	Method   missing.Method
	K        int
	Slope    *meta.Mean // asymmetry by a regression; nil for other tests
	Tau      *float64   // Kendall's rank correlation
	Chi2     *float64   // of the selection model's rate, on 1 degree of freedom
	LnP      float64
	Evidence evidence.Ratio // for asymmetry over none
	Problem  string
}

// AdjustedResult is the result under one method's assumption. Where there is none
// Problem says why. Without a null Mean has no meaning as evidence.
type AdjustedResult struct {
	Method  missing.Method
	Mean    meta.Mean
	Missing *int          // studies added by trim and fill
	Side    *missing.Side // on which they were, or the side of the results that are sought
	Rate    *float64      // at which results above the step are seen
	Square  *bool         // PEESE was taken
	Problem string
}

// seekAsymmetry fills in the part on small studies.
func (o *Outcome) seekAsymmetry(want SmallStudyWanted) {
	if o.Result == nil {
		return
	}
	y, s := estimates(o.Studies)
	part := &SmallStudy{Spread: slices.Max(s) / slices.Min(s)}
	o.SmallStudy = part
	var tables []effect.Table
	for i := range o.Studies {
		if t := o.Studies[i].Table; t != nil {
			tables = append(tables, *t)
		}
	}
	part.Tables = len(tables)
	switch k := len(y); {
	case o.dependent():
		part.Refused = o.onlyIndependent("the test")
	case k < 3:
		part.Refused = fmt.Sprintf("there %s, and no line can be laid through fewer than 3 so that scatter is left", map[bool]string{true: "is 1 study", false: "are 2 studies"}[k == 1])
	case k < leastForAsymmetry && !want.AllowFew:
		part.Few = true
		part.Refused = fmt.Sprintf("there are %d studies; below %d such tests find little and mislead easily (Sterne et al. 2011)", k, leastForAsymmetry)
	case part.Spread < leastSpread:
		part.Refused = fmt.Sprintf("the studies are nearly alike in precision (the largest standard error is %.3g times the smallest; %.1f is wanted), so that small and large ones cannot be told apart", part.Spread, leastSpread)
	}
	if part.Refused != "" {
		return
	}
	part.Few = len(y) < leastForAsymmetry
	part.FarOdds = o.farOdds()
	a := &asymmetry{SmallStudy: part, o: o, y: y, s: s, model: o.pairModel()}
	if part.Step = want.Step; part.Step == 0 {
		part.Step = 0.025
	}
	part.Model = a.model
	if fit, err := a.model.Fit(y, s); err == nil {
		part.Pooled, part.Model = fit.Mean, fit.Model
	} else {
		part.Refused = err.Error()
		return
	}
	a.regressions(tables)
	a.ranks()
	a.trimAndFill()
	a.precision()
	a.selection()
}

// pairModel returns the model by which estimates with standard errors are pooled:
// the outcome's own, or beside a method for counts the default one with its effects.
func (o *Outcome) pairModel() meta.Model {
	m := o.Analysis.Model
	if _, isTables := o.Analysis.Method.Tables(); isTables {
		m.Tau, m.Interval = meta.DefaultTau, meta.DefaultInterval
	}
	return m
}

// asymmetry runs the methods on the studies of an outcome.
type asymmetry struct {
	*SmallStudy
	o     *Outcome
	y, s  []float64
	model meta.Model
	side  missing.Side // on which studies would be missing
	sided bool
}

// regressions runs the four lines. Those on counts want all tables to be of a test's
// own measure, the odds ratio.
func (a *asymmetry) regressions(tables []effect.Table) {
	classical, err := missing.Egger(a.model, a.y, a.s)
	a.regression(missing.EggerClassical, classical, err, true)
	if err == nil {
		a.sided, a.side = true, missing.Lower
		if classical.Slope.Estimate < 0 {
			a.side = missing.Higher
		}
	}
	mixed, err := missing.EggerMixed(a.model, a.y, a.s)
	a.regression(missing.EggerMixedEffects, mixed, err, true)
	if len(tables) == 0 {
		return
	}
	odds := a.model
	ownMeasure := a.o.Analysis.Measure == effect.OddsRatio && len(tables) == len(a.o.Studies)
	if !ownMeasure {
		odds.Null = 0
	}
	for _, test := range []struct {
		method missing.Method
		run    func(meta.Model, []effect.Table) (*missing.Regression, error)
	}{{missing.PetersTest, missing.Peters}, {missing.HarbordTest, missing.Harbord}} {
		if len(tables) < leastForAsymmetry && !a.Few {
			a.Tests = append(a.Tests, AsymmetryTest{Method: test.method, K: len(tables), Problem: fmt.Sprintf("%d studies give counts, and %d are wanted", len(tables), leastForAsymmetry)})
			continue
		}
		r, err := test.run(odds, tables)
		a.regression(test.method, r, err, ownMeasure && test.method == missing.PetersTest)
	}
}

// regression records a line, and its effect at no error where that is an adjusted
// result in the outcome's measure.
func (a *asymmetry) regression(method missing.Method, r *missing.Regression, err error, adjusts bool) {
	if err != nil {
		a.Tests = append(a.Tests, AsymmetryTest{Method: method, Problem: err.Error()})
		return
	}
	a.Tests = append(a.Tests, AsymmetryTest{Method: method, K: r.Slope.K, Slope: &r.Slope, LnP: r.Slope.LnP, Evidence: r.Slope.Evidence})
	if adjusts {
		a.Adjusted = append(a.Adjusted, AdjustedResult{Method: method, Mean: r.Limit})
	}
}

func (a *asymmetry) ranks() {
	r, err := missing.BeggMazumdar(a.y, a.s)
	if err != nil {
		a.Tests = append(a.Tests, AsymmetryTest{Method: missing.BeggMazumdarTest, Problem: err.Error()})
		return
	}
	a.Tests = append(a.Tests, AsymmetryTest{Method: missing.BeggMazumdarTest, K: r.K, Tau: &r.Tau, LnP: r.LnP, Evidence: r.Evidence})
}

func (a *asymmetry) trimAndFill() {
	for _, method := range []missing.Method{missing.TrimAndFillL, missing.TrimAndFillR} {
		row := AdjustedResult{Method: method}
		if !a.sided {
			row.Problem = "no line shows on which side studies would be missing"
			a.Adjusted = append(a.Adjusted, row)
			continue
		}
		filled, err := missing.TrimAndFill(a.model, a.y, a.s, method, a.side)
		if err != nil {
			row.Problem = err.Error()
		} else {
			row.Mean, row.Missing, row.Side = filled.Mean, &filled.Missing, &filled.Side
		}
		a.Adjusted = append(a.Adjusted, row)
	}
}

// noNull is why a method that tests against no effect is not run.
const noNull = "the measure has no value of no effect and none is given: state one with --null"

func (a *asymmetry) precision() {
	row := AdjustedResult{Method: missing.PrecisionEffect}
	p, err := missing.PETPEESE(a.model, a.y, a.s)
	switch {
	case a.o.Analysis.NullMissing:
		row.Problem = noNull
	case err != nil:
		row.Problem = err.Error()
	default:
		row.Mean, row.Square = p.Adjusted(), &p.Square
	}
	a.Adjusted = append(a.Adjusted, row)
}

// selection fits the selection model towards the wanted direction, or where none is
// stated towards the side of the pooled effect.
func (a *asymmetry) selection() {
	sought := missing.Higher
	if better := a.o.Analysis.Better; better == review.BetterLower || (better == review.BetterUnknown && a.Pooled.Estimate < a.model.Null) {
		sought = missing.Lower
	}
	row := AdjustedResult{Method: missing.OneStepSelection, Side: &sought}
	test := AsymmetryTest{Method: missing.OneStepSelection, K: len(a.y)}
	if a.o.Analysis.NullMissing {
		row.Problem, test.Problem = noNull, noNull
	} else if r, err := missing.OneStep(a.model, a.y, a.s, a.Step, sought); err != nil {
		row.Problem, test.Problem = err.Error(), err.Error()
	} else {
		row.Mean, row.Rate, a.Above = r.Mean, &r.Rate, r.Unlikely
		test.Chi2, test.LnP, test.Evidence = &r.Chi2, r.LnP, r.Evidence
	}
	a.Tests, a.Adjusted = append(a.Tests, test), append(a.Adjusted, row)
}

// farOdds reports an odds ratio so far from 1 that its standard error goes with it.
func (o *Outcome) farOdds() bool {
	return o.Analysis.Measure == effect.OddsRatio && math.Abs(o.Result.Fit.Mean.Estimate) > math.Log(largeOddsRatio)
}

// asymmetry reports small studies with other effects than large ones (A5), where
// there are enough of both to tell.
func (e *examination) asymmetry() {
	y, s := estimates(e.o.Studies)
	if e.o.dependent() || len(y) < leastForAsymmetry || slices.Max(s)/slices.Min(s) < leastSpread {
		return
	}
	model := e.o.pairModel()
	model.Evidence = evidence.Empirical
	test, err := missing.Egger(model, y, s)
	about := ""
	if e.o.farOdds() {
		var tables []effect.Table
		for i := range e.o.Studies {
			if t := e.o.Studies[i].Table; t != nil {
				tables = append(tables, *t)
			}
		}
		about = "; with an odds ratio so far from 1 this test finds asymmetry too often, and counts would allow a better one"
		if len(tables) >= leastForAsymmetry {
			test, err = missing.Harbord(model, tables)
			about = ""
		}
	}
	if err != nil || !(test.Slope.LnP < math.Log(asymmetryLevel)) {
		return
	}
	side := "higher"
	if test.Slope.Estimate < 0 {
		side = "lower"
	}
	e.find(review.Warning, "A5", fmt.Sprintf("small studies show %s effects than large ones (%s, t = %.2f on %g df, p = %.2g%s); it need not be that studies are missing, see: steelyard small-study",
		side, test.Method.Title(), test.Slope.Statistic, test.Slope.DF, math.Exp(test.Slope.LnP), about))
}
