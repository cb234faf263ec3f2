package synthesis

import (
	"fmt"
	"math"

	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// armFields are the columns of one arm with a mean.
type armFields struct {
	name                                   string
	mean, sd, se, low, high, total         review.Field
	baselineMean, baselineSD               review.Field
	median, quartile1, quartile3, min, max review.Field
}

var (
	treatedArm = armFields{"treated", review.MeanTreated, review.SDTreated, review.SETreated, review.MeanLowTreated, review.MeanHighTreated, review.TotalTreated,
		review.BaselineMeanTreated, review.BaselineSDTreated,
		review.MedianTreated, review.Q1Treated, review.Q3Treated, review.MinTreated, review.MaxTreated}
	controlArm = armFields{"control", review.MeanControl, review.SDControl, review.SEControl, review.MeanLowControl, review.MeanHighControl, review.TotalControl,
		review.BaselineMeanControl, review.BaselineSDControl,
		review.MedianControl, review.Q1Control, review.Q3Control, review.MinControl, review.MaxControl}
)

// hasMean reports whether an arm's mean and spread are given; hasMedian whether
// they follow from a median.
func (d *derivation) hasMean(a armFields) bool {
	return d.has(a.mean) && (d.has(a.sd) || d.has(a.se) || d.has(a.low, a.high))
}

func (d *derivation) hasMedian(a armFields) bool {
	return d.has(a.median) && (d.has(a.quartile1, a.quartile3) || d.has(a.min, a.max))
}

func (d *derivation) hasBothMeans() bool {
	return (d.hasMean(treatedArm) || d.hasMedian(treatedArm)) && (d.hasMean(controlArm) || d.hasMedian(controlArm))
}

// hasArms reports whether both arms of separate people are complete.
func (d *derivation) hasArms() bool {
	return !d.crossover() && d.hasBothMeans() && d.has(treatedArm.total, controlArm.total)
}

func (d *derivation) fromArms() (effect.Estimate, error) { return d.compareArms(d.measure) }

// compareArms returns an effect of both arms' means, with the people divided by
// the design effect where clusters were randomised.
func (d *derivation) compareArms(m effect.Measure) (effect.Estimate, error) {
	treated, control, err := d.arms(d.value(treatedArm.total), d.value(controlArm.total))
	if err != nil {
		return effect.Estimate{}, err
	}
	if treated, control, err = d.changes(treated, control); err != nil {
		return effect.Estimate{}, err
	}
	factor, adjust, err := d.designEffect()
	if err != nil {
		return effect.Estimate{}, err
	}
	if adjust {
		for i, arm := range []*effect.Arm{&treated, &control} {
			smaller, step, err := effect.ClusterArm(*arm, factor)
			if err != nil {
				return effect.Estimate{}, err
			}
			d.log(armed(step, []string{"treated", "control"}[i]))
			*arm = smaller
		}
	}
	return d.made(effect.FromArms(m, treated, control))
}

// arms returns both arms, of n1 and n2 people.
func (d *derivation) arms(n1, n2 float64) (treated, control effect.Arm, err error) {
	if treated, err = d.arm(treatedArm, n1); err != nil {
		return treated, control, err
	}
	control, err = d.arm(controlArm, n2)
	return treated, control, err
}

// arm returns one arm of n people from its mean and SD, its mean and standard
// error or limits (of Student's t), or its median.
func (d *derivation) arm(a armFields, n float64) (effect.Arm, error) {
	out := effect.Arm{Mean: d.value(a.mean), SD: d.value(a.sd), N: n}
	switch {
	case d.has(a.mean, a.sd):
		return out, nil
	case d.has(a.mean, a.se):
		sd, step, err := effect.SDFromSE(d.value(a.se), n)
		if err != nil {
			return out, fmt.Errorf("%s arm: %w", a.name, err)
		}
		d.log(armed(step, a.name))
		out.SD = sd
		return out, nil
	case d.has(a.mean, a.low, a.high):
		sd, step, err := effect.SDFromLimits(d.value(a.low), d.value(a.high), d.level(), n, n-1)
		if err != nil {
			return out, fmt.Errorf("%s arm: %w", a.name, err)
		}
		d.log(armed(step, a.name))
		out.SD = sd
		return out, nil
	}
	from, step, err := d.fromMedian(a, n)
	if err != nil {
		return out, fmt.Errorf("%s arm: %w", a.name, err)
	}
	d.log(armed(step, a.name))
	d.assume("mean and SD worked out from a median")
	if from.Skewed {
		d.find(review.Warning, "M15", fmt.Sprintf("the median of the %s arm lies far from the middle of its spread (skewness %.2f), so that a mean worked out as if the outcome were normal is doubtful; pool without it by --where \"converted is no\", or ask for the mean and SD", a.name, from.Skewness))
	}
	return from.Arm, nil
}

func (d *derivation) fromMedian(a armFields, n float64) (effect.FromMedian, effect.Conversion, error) {
	quartiles, ends := d.has(a.quartile1, a.quartile3), d.has(a.min, a.max)
	switch {
	case quartiles && ends:
		return effect.FromFiveNumbers(d.value(a.min), d.value(a.quartile1), d.value(a.median), d.value(a.quartile3), d.value(a.max), n)
	case quartiles:
		return effect.FromQuartiles(d.value(a.quartile1), d.value(a.median), d.value(a.quartile3), n)
	}
	return effect.FromRange(d.value(a.min), d.value(a.median), d.value(a.max), n)
}

// resultType returns what the row's means are of.
func (d *derivation) resultType() effect.ResultType {
	r, _ := d.row.Remark(review.ResultType.String())
	kind, err := effect.ParseResultType(r.Text)
	if err != nil {
		return effect.ResultTypeUnknown
	}
	return kind
}

// changes turns means at the end into changes from baseline where the row has
// both arms' baselines and a correlation, and does not say that its means are
// changes already.
func (d *derivation) changes(treated, control effect.Arm) (effect.Arm, effect.Arm, error) {
	if !d.computesChange() {
		return treated, control, nil
	}
	r := d.value(review.WithinCorrelation)
	for _, side := range []struct {
		arm    *effect.Arm
		fields armFields
	}{{&treated, treatedArm}, {&control, controlArm}} {
		change, step, err := effect.ChangeArm(*side.arm, d.value(side.fields.baselineMean), d.value(side.fields.baselineSD), r)
		if err != nil {
			return treated, control, fmt.Errorf("%s arm: %w", side.fields.name, err)
		}
		d.log(armed(step, side.fields.name))
		*side.arm = change
	}
	d.assume("correlation of baseline and end as stated")
	return treated, control, nil
}

func (d *derivation) computesChange() bool {
	return d.resultType() != effect.Change && d.has(review.WithinCorrelation, review.BaselineMeanTreated, review.BaselineSDTreated,
		review.BaselineMeanControl, review.BaselineSDControl)
}

// mixedScores warns of standardised differences of changes pooled with those of
// final values: their standard deviations differ in kind.
func (o *Outcome) mixedScores() []review.Finding {
	if o.Analysis.Measure != effect.StandardisedMeanDifference {
		return nil
	}
	first := map[effect.ResultType]*review.Study{}
	for i := range o.Studies {
		study := &o.Studies[i]
		if study.Basis != FromMeans {
			continue
		}
		d := derivation{row: study.Source}
		kind := d.resultType()
		if d.computesChange() {
			kind = effect.Change
		}
		if first[kind] == nil {
			first[kind] = study.Source
		}
	}
	change, final := first[effect.Change], first[effect.Final]
	if change == nil || final == nil {
		return nil
	}
	return []review.Finding{{Severity: review.Warning, Rule: "M11", Place: change.Row, Study: change.Name, Outcome: o.Name, Accepted: change.AcceptedReason("M11"),
		Message: fmt.Sprintf("changes from baseline (%s) are pooled with final values (%s) as standardised differences, though their standard deviations differ in kind; pool one of them, or use the mean difference", change.Name, final.Name)}}
}

// fromMeansAsCounts returns the log odds ratio that the standardised difference
// of both arms stands for.
func (d *derivation) fromMeansAsCounts() (effect.Estimate, error) {
	e, err := d.compareArms(effect.StandardisedMeanDifference)
	if err != nil {
		return e, err
	}
	d.assume("standardised difference taken as an odds ratio")
	return d.made(effect.OddsFromStandardised(e))
}

// hasPairedMeans reports whether a cross-over trial gives its means with what
// tells how the two measurements of a person go together.
func (d *derivation) hasPairedMeans() bool {
	return d.crossover() && d.hasBothMeans() && d.people() > 0 && (d.has(review.WithinCorrelation) || d.has(review.SDDifference))
}

// people returns how many people a cross-over trial measured twice; 0 if the row
// does not say.
func (d *derivation) people() float64 {
	for _, f := range []review.Field{review.Total, review.TotalTreated, review.TotalControl} {
		if d.has(f) {
			return d.value(f)
		}
	}
	return 0
}

// fromPairedMeans compares the two treatments within people, by the standard
// deviation of the differences if it is given, else by a stated correlation.
func (d *derivation) fromPairedMeans() (effect.Estimate, error) {
	n1, n2 := d.people(), d.people()
	if d.has(review.TotalTreated, review.TotalControl) {
		n1, n2 = d.value(review.TotalTreated), d.value(review.TotalControl)
	}
	treated, control, err := d.arms(n1, n2)
	if err != nil {
		return effect.Estimate{}, err
	}
	r := d.value(review.WithinCorrelation)
	if d.has(review.SDDifference) {
		var step effect.Conversion
		if r, step, err = effect.ImpliedCorrelation(treated.SD, control.SD, d.value(review.SDDifference)); err != nil {
			return effect.Estimate{}, err
		}
		step.From[0].Name, step.From[1].Name, step.From[2].Name = "sd treated", "sd control", review.SDDifference.String()
		d.log(step)
	} else {
		d.assume("correlation within people as stated")
	}
	return d.made(effect.FromPaired(d.measure, treated, control, r))
}

// hasEstimatePaired reports whether a mean difference within people is given with
// the standard deviation of the differences.
func (d *derivation) hasEstimatePaired() bool {
	return d.has(review.Estimate, review.SDDifference) && d.people() > 0 && d.own() == effect.MeanDifference
}

func (d *derivation) fromDifferences() (effect.Estimate, error) {
	e, steps, err := effect.FromDifferences(d.value(review.Estimate), d.value(review.SDDifference), d.people())
	for i := range steps {
		steps[i].From[0].Name = review.Estimate.String()
	}
	return d.made(e, steps, err)
}

// hasMeansTest reports whether two means without standard deviations come with a
// standard error, limits or a test of their difference.
func (d *derivation) hasMeansTest() bool {
	return d.has(review.MeanTreated, review.MeanControl) && !d.hasEstimate() &&
		(d.has(review.StandardError) || d.has(review.LimitLow, review.LimitHigh) || d.has(review.TestStatistic) || d.has(review.PValue))
}

// fromMeansTest takes the difference of two means with the standard error that a
// report gives of it.
func (d *derivation) fromMeansTest() (effect.Estimate, error) {
	difference := d.value(review.MeanTreated) - d.value(review.MeanControl)
	d.log(effect.Conversion{What: "difference of two means",
		From: []effect.Value{{Name: "mean treated", Value: d.value(review.MeanTreated)}, {Name: "mean control", Value: d.value(review.MeanControl)}},
		To:   []effect.Value{{Name: "estimate", Value: difference}}, Source: "Cochrane Handbook 6.5.1"})
	const m = effect.MeanDifference
	var e effect.Estimate
	var err error
	switch {
	case d.has(review.StandardError):
		e, err = d.made(effect.FromSE(m, difference, d.value(review.StandardError)))
	case d.has(review.LimitLow, review.LimitHigh):
		e, err = d.made(effect.FromStudentLimits(m, difference, d.value(review.LimitLow), d.value(review.LimitHigh), d.level(), d.freedom(m)))
	case d.has(review.TestStatistic):
		t := math.Copysign(d.value(review.TestStatistic), difference) // reports often print t without its sign
		e, err = d.made(effect.FromT(m, difference, t))
	default:
		d.assume("standard error worked out from a p-value")
		e, err = d.byP(m, difference)
	}
	if err != nil {
		return e, err
	}
	return d.toMeasure(e, m)
}
