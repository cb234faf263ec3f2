package synthesis

import (
	"fmt"
	"math"

	"steelyard/meta"
	"steelyard/meta/bayes"
	"steelyard/meta/choice"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/numeric"
	"steelyard/meta/review"
)

// Statistic is a kind of test statistic that evidence can be weighed from.
type Statistic int

// The statistics. Estimated is an estimate with a standard error or limits.
const (
	StatisticZ Statistic = iota
	StatisticT
	StatisticChiSquare
	StatisticF
	StatisticP
	Estimated
)

var statisticNames = choice.Of[Statistic]("statistic", "z", "t", "chi2", "f", "p", "estimate")

// String returns the statistic's name.
func (s Statistic) String() string { return statisticNames.String(s) }

// Numbers are what a report gives, from which evidence is weighed without a
// sheet.
type Numbers struct {
	Statistic Statistic
	Value     float64         // of the statistic, or the estimate in the reader's unit
	DF, DF2   float64         // degrees of freedom; 0 where there are none
	SE        float64         // on the analysis scale; 0 if the limits are given
	Limits    *meta.Limits    // in the reader's unit
	Ratio     bool            // estimate, limits, null and thresholds are ratios
	OneSided  bool            // H1 is an effect above the null
	Null      *float64        // in the reader's unit; nil for 1 or 0
	Important []float64       // in the reader's unit
	Level     float64         // of the limits
	Weighing  review.Weighing // Prior and the other priors of its form
}

// Weighing is the evidence that numbers give.
type Weighing struct {
	Form      string // of the evidence: "normal", "matched", "student-t", "chi-square", "f", "p-value", "one-sided", "normal-prior", "cauchy-prior"
	Evidence  evidence.Ratio
	Prior     *bayes.EffectPrior // for the effect, on the analysis scale or in standard errors; nil where there is none
	Null      float64            // on the analysis scale
	Measure   effect.Measure     // RiskRatio's scale stands for any ratio; Unspecified is linear
	Mean      *meta.Mean         // of an estimate: on the analysis scale, with interval and p
	Posterior []Belief
	Doubter   Belief
	Regions   []Region
	Bound     *evidence.Ratio // what no prior could beat; nil where there is none
	Sellke    *evidence.Ratio // of a p-value alone: the other published calibration
	Uneven    bool            // the limits lie unevenly around the estimate on this scale
}

// Weigh returns the evidence in numbers alone, for the prior probabilities that they
// hold. The error says which number is missing or impossible.
func Weigh(n Numbers) (*Weighing, error) {
	w := &Weighing{}
	if n.Ratio {
		w.Measure = effect.RiskRatio
	}
	if err := n.check(); err != nil {
		return nil, err
	}
	var err error
	if n.Statistic == Estimated {
		err = w.fromEstimate(n)
	} else {
		err = w.fromStatistic(n)
	}
	if err != nil {
		return nil, err
	}
	for _, p := range n.Weighing.Prior {
		w.Posterior = append(w.Posterior, Belief{Prior: p, Posterior: evidence.Posterior(p, w.Evidence)})
	}
	w.Doubter = Belief{Prior: evidence.DoubtersPrior(w.Evidence, believed), Posterior: believed}
	return w, nil
}

// check refuses numbers that cannot be, or that do not go together.
func (n Numbers) check() error {
	for _, x := range []float64{n.Value, n.DF, n.DF2, n.SE} {
		if math.IsNaN(x) || math.IsInf(x, 0) {
			return fmt.Errorf("%s: every number must be finite", n.Statistic)
		}
	}
	needsDF := n.Statistic == StatisticT || n.Statistic == StatisticChiSquare || n.Statistic == StatisticF
	takesOneSide := n.Statistic == StatisticZ || n.Statistic == StatisticT || n.Statistic == Estimated
	switch {
	case needsDF && !(n.DF > 0):
		return fmt.Errorf("%s needs its degrees of freedom, greater than 0: add --df", n.Statistic)
	case n.DF < 0 || n.DF2 < 0:
		return fmt.Errorf("degrees of freedom must be greater than 0")
	case n.Statistic == StatisticF && !(n.DF2 > 0):
		return fmt.Errorf("f needs the degrees of freedom of its denominator, greater than 0: add --df2")
	case (n.Statistic == StatisticChiSquare || n.Statistic == StatisticF) && n.Value < 0:
		return fmt.Errorf("%s cannot be negative", n.Statistic)
	case n.Statistic == StatisticP && !(0 < n.Value && n.Value <= 1):
		return fmt.Errorf("a p-value is greater than 0 and at most 1; for \"p < 0.001\" take 0.001 as a bound")
	case n.OneSided && !takesOneSide:
		return fmt.Errorf("%s has no direction: --one-sided goes with --z, --t or --estimate", n.Statistic)
	case n.Statistic != Estimated && (n.Important != nil || n.Null != nil || n.Ratio || n.SE != 0 || n.Limits != nil):
		return fmt.Errorf("%s has no scale: --null, --important, --ratio, --se and limits go with --estimate", n.Statistic)
	}
	return n.checkForm(takesOneSide)
}

// checkForm refuses a form of evidence that numbers alone cannot have.
func (n Numbers) checkForm(located bool) error {
	switch form := n.Weighing.Form; {
	case form.OverTau():
		return fmt.Errorf("evidence: %s integrates over the spread between studies, and numbers alone have no studies: pool a sheet with it, or choose empirical, student-t, normal-prior or cauchy-prior", form)
	case form.UnderPrior() && !located:
		return fmt.Errorf("evidence: %s is for --z, --t or --estimate: %s alone does not say how far from none the effect is, or to which side", form, n.Statistic)
	case form.UnderPrior() && n.OneSided:
		return fmt.Errorf("evidence: beside %s an effect above none is asked for with --%s above, not with --one-sided", form, review.SettingEffectSide)
	case form.UnderPrior() && n.Statistic != Estimated && n.Weighing.EffectMean != nil:
		return fmt.Errorf("%s: %s has no scale on which an effect could be stated: give --estimate", review.SettingEffectMean, n.Statistic)
	}
	return nil
}

// underPrior weighs an estimate under the prior for the effect that is asked for.
func (w *Weighing) underPrior(n Numbers, l evidence.Location, null float64) error {
	centre := 0.0
	if mean := n.Weighing.EffectMean; mean != nil {
		y, err := effect.FromReader(w.Measure, *mean)
		if err != nil {
			return fmt.Errorf("%s: %w", review.SettingEffectMean, err)
		}
		centre = y - null
	}
	prior, err := n.Weighing.Effect(centre)
	if err != nil {
		return err
	}
	at, err := bayes.Matched(l, null)
	if err != nil {
		return err
	}
	w.Form, w.Prior = n.Weighing.Form.String(), &prior
	w.Evidence, err = at.Weigh(prior)
	return err
}

func (w *Weighing) fromStatistic(n Numbers) error {
	switch n.Statistic {
	case StatisticZ, StatisticT:
		df := math.Inf(1)
		if n.Statistic == StatisticT {
			df = n.DF
		}
		w.fromZ(n.Value, df, n)
		if n.Weighing.Form.UnderPrior() {
			return w.underPrior(n, evidence.Location{Estimate: n.Value, SE: 1, DF: df}, 0)
		}
	case StatisticChiSquare:
		w.Form, w.Evidence = "chi-square", evidence.ChiSquare(n.Value, n.DF)
	case StatisticF:
		w.Form, w.Evidence = "matched", evidence.MatchedF(n.Value, n.DF, n.DF2)
		if n.Weighing.Form == evidence.StudentForm {
			w.Form, w.Evidence = "f", evidence.F(n.Value, n.DF, n.DF2)
		}
	case StatisticP:
		w.Form, w.Evidence = "p-value", evidence.PValue(n.Value)
		other := evidence.PValueBound(n.Value)
		w.Sellke = &other
	}
	return nil
}

// fromZ weighs a normal (infinite df) or Student statistic.
func (w *Weighing) fromZ(z, df float64, n Numbers) {
	normal, student := math.IsInf(df, 1), n.Weighing.Form == evidence.StudentForm
	var bound evidence.Ratio
	switch {
	case normal:
		w.Form, w.Evidence, bound = "normal", evidence.Normal(z), evidence.Bound(z)
	case student:
		w.Form, w.Evidence, bound = "student-t", evidence.Student(z, df), evidence.BoundStudent(z, df)
	default:
		w.Form, w.Evidence = "matched", evidence.Matched(z, df)
		bound = evidence.Bound(evidence.MatchedZ(z, df))
	}
	w.Bound = &bound
	if !n.OneSided {
		return
	}
	w.Bound = nil
	w.Form = "one-sided, " + w.Form
	switch {
	case normal:
		w.Evidence = evidence.OneSided(z)
	case student:
		w.Evidence = evidence.OneSidedStudent(z, df)
	default:
		w.Evidence = evidence.OneSidedMatched(z, df)
	}
}

// fromEstimate weighs an estimate with a standard error or limits.
func (w *Weighing) fromEstimate(n Numbers) error {
	e, err := n.estimate(w.Measure)
	if err != nil {
		return err
	}
	w.Uneven = n.uneven(w.Measure, e)
	null := w.Measure.Null()
	if n.Null != nil {
		null = *n.Null
	}
	mean := meta.Mean{K: 1, Estimate: e.Y, SE: e.SE, DF: math.Inf(1)}
	if n.DF > 0 {
		mean.DF = n.DF
	}
	scaledNull, err := effect.FromReader(w.Measure, null)
	if err != nil {
		return fmt.Errorf("null: %w", err)
	}
	w.Null = scaledNull
	mean.Statistic = (e.Y - scaledNull) / e.SE
	mean.LnP = min(0, math.Ln2+numeric.LogStudentTail(math.Abs(mean.Statistic), mean.DF))
	half := numeric.StudentCritical(1-n.Level, mean.DF) * e.SE
	mean.Low, mean.High = e.Y-half, e.Y+half
	w.fromZ(mean.Statistic, mean.DF, n)
	location := evidence.Location{Estimate: e.Y, SE: e.SE, DF: mean.DF}
	if n.Weighing.Form.UnderPrior() {
		if err := w.underPrior(n, location, scaledNull); err != nil {
			return err
		}
	}
	mean.Evidence = w.Evidence
	w.Mean = &mean
	zone, err := important(w.Measure, n.Important, scaledNull)
	if err != nil || zone == nil {
		return err
	}
	if n.Weighing.Form == evidence.StudentForm {
		location.Form = evidence.StudentForm
	}
	w.Regions, err = regionsOf(location, *zone, "lower", "higher", func(_, _ float64) float64 { return -1 })
	return err
}

// estimate brings the estimate to the analysis scale. Limits of a Student
// estimate are divided by Student's quantile.
func (n Numbers) estimate(m effect.Measure) (effect.Estimate, error) {
	switch {
	case n.SE < 0:
		return effect.Estimate{}, fmt.Errorf("se must be greater than 0")
	case n.SE > 0 && n.Limits != nil:
		return effect.Estimate{}, fmt.Errorf("give either --se or both limits, not both")
	case n.SE > 0:
		e, _, err := effect.FromSE(m, n.Value, n.SE)
		return e, err
	case n.Limits == nil:
		return effect.Estimate{}, fmt.Errorf("an estimate needs --se, or --ci-low and --ci-high")
	}
	e, _, err := effect.FromLimits(m, n.Value, n.Limits.Low, n.Limits.High, n.Level)
	if err == nil && n.DF > 0 {
		e.SE *= numeric.NormalCritical(1-n.Level) / numeric.StudentCritical(1-n.Level, n.DF)
	}
	return e, err
}

// mostUneven is how far, in standard errors, the middle of an interval may lie
// from its estimate before that is said (a tenth: rule I2 of the catalogue).
const mostUneven = 0.1

// uneven reports whether the middle of the limits is not the estimate.
func (n Numbers) uneven(m effect.Measure, e effect.Estimate) bool {
	if n.Limits == nil {
		return false
	}
	low, errLow := effect.FromReader(m, n.Limits.Low)
	high, errHigh := effect.FromReader(m, n.Limits.High)
	return errLow == nil && errHigh == nil && math.Abs((low+high)/2-e.Y) > mostUneven*e.SE
}

// WeighingDocument is the JSON of a weighing.
type WeighingDocument struct {
	Form       string               `json:"form"`
	LnEvidence float64              `json:"ln_evidence"`
	Ratio      *float64             `json:"ratio,omitempty"` // absent where it is too large for a float64
	Steps      float64              `json:"steps"`
	Word       string               `json:"word"`
	Favours    string               `json:"favours"`
	Prior      *EffectPriorDocument `json:"effect_prior,omitempty"`
	Estimate   *MeanDocument        `json:"estimate,omitempty"`
	LnBound    *float64             `json:"ln_bound,omitempty"`
	LnSellke   *float64             `json:"ln_sellke_bayarri_berger,omitempty"`
	Posterior  []PosteriorDocument  `json:"posterior"`
	Doubter    DoubterDocument      `json:"doubters_prior"`
	Regions    []RegionDocument     `json:"regions,omitempty"`
}

// Document returns the weighing as its JSON structure.
func (w *Weighing) Document() WeighingDocument {
	d := WeighingDocument{
		Form: w.Form, LnEvidence: w.Evidence.Ln(), Ratio: finite(w.Evidence.Odds()), Steps: w.Evidence.Steps(),
		Word: w.Evidence.Word().String(), Favours: w.Evidence.Favours().String(),
		Posterior: []PosteriorDocument{},
		Doubter:   DoubterDocument{Level: w.Doubter.Posterior, Prior: w.Doubter.Prior},
	}
	if w.Prior != nil {
		d.Prior = effectPriorDocument(*w.Prior)
	}
	if w.Mean != nil {
		mean := meanDocument(*w.Mean)
		d.Estimate = &mean
	}
	if w.Bound != nil {
		ln := w.Bound.Ln()
		d.LnBound = &ln
	}
	if w.Sellke != nil {
		ln := w.Sellke.Ln()
		d.LnSellke = &ln
	}
	for _, b := range w.Posterior {
		d.Posterior = append(d.Posterior, PosteriorDocument(b))
	}
	for _, r := range w.Regions {
		d.Regions = append(d.Regions, r.document())
	}
	return d
}
