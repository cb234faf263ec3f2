package accrual

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"

	"steelyard/meta"
	"steelyard/meta/evidence"
	"steelyard/meta/numeric"
)

// Trial is the question what one more study could change: a review of estimates y
// with standard errors s, pooled by a model, and what is looked for when it is
// pooled anew with the next study.
type Trial struct {
	Y, SE []float64
	Model meta.Model
	// Important is the zone of effects too small to matter, on the analysis scale;
	// either end may be infinite. Nil: none.
	Important *meta.Limits
	// Steps are the numbers of steps whose passing is asked for, negative ones in
	// favour of no effect; none means 1 to 4. No point null can be favoured by more
	// than 0.64 steps (see Zone for evidence that can).
	Steps []float64
	// Weigh gives a mean pooled of estimates y with standard errors s the evidence
	// that is looked at; nil takes that of the model. It is called by several
	// goroutines at once.
	Weigh func(mean meta.Mean, y, s []float64) (evidence.Ratio, error)
}

// Outlook is the distribution of the updated result over what the next study may
// find: y_new ~ N(mean, se² + τ² + s_new²), τ² being estimated anew with it.
type Outlook struct {
	SE       float64  // s_new
	Expected Value    // mean of the updated steps
	Passing  []Chance // of the evidence against the null, in the order of Trial.Steps
	// ExcludesNull is the chance that the updated interval excludes the null.
	ExcludesNull Value
	Zone         *ZoneOutlook // nil without an important difference
	Spread       []Percentile // of the updated steps, estimate and limits
}

// ZoneOutlook is an Outlook for the zone of effects too small to matter.
type ZoneOutlook struct {
	Inside  Value    // the updated interval lies inside: no important effect
	Outside Value    // it lies beyond one end: an important effect
	Passing []Chance // of the evidence that the mean lies in the zone over outside, at Trial.Steps
}

// Percentile holds quantiles at one probability, each of its own distribution.
type Percentile struct{ P, Steps, Estimate, Low, High float64 }

// percentiles are the probabilities of Outlook.Spread.
var percentiles = []float64{0.05, 0.25, 0.5, 0.75, 0.95}

// foreseen is a Trial with its pooled result and its scratch space.
type foreseen struct {
	Trial
	mean, spread float64 // of the next study's true effect: se² + τ², as a standard deviation
	y, s         []float64
	pool         meta.Pooler
	zone, beyond evidence.Region
}

// foresee checks the question and pools the review as it is.
func (q Trial) foresee() (*foreseen, error) {
	if err := checkSteps(q.Steps); err != nil {
		return nil, err
	}
	if len(q.Steps) == 0 {
		q.Steps = []float64{1, 2, 3, 4}
	}
	f := &foreseen{Trial: q}
	now, err := f.pool.Pool(q.Model, q.Y, q.SE)
	if err != nil {
		return nil, err
	}
	if q.Important != nil {
		f.zone = evidence.Region{{Low: q.Important.Low, High: q.Important.High}}
		if f.zone.Check() != nil || len(f.zone.Complement()) == 0 {
			return nil, &InputError{fmt.Sprintf("the zone of unimportant effects from %v to %v is empty or holds every effect: give its low end below its high end, one of them finite",
				q.Important.Low, q.Important.High)}
		}
		f.beyond = f.zone.Complement()
	}
	total := 0.0
	for _, s := range q.SE {
		total += 1 / (s*s + now.Tau2)
	}
	f.mean, f.spread = now.Estimate, math.Sqrt(1/total+now.Tau2)
	f.y, f.s = append(slices.Clone(q.Y), 0), append(slices.Clone(q.SE), 0)
	return f, nil
}

// updated is the part of a result pooled anew that an outlook counts.
type updated struct{ steps, estimate, low, high, zone float64 }

// with pools the review with a next study.
func (f *foreseen) with(y, se float64) (updated, error) {
	last := len(f.y) - 1
	f.y[last], f.s[last] = y, se
	mean, err := f.pool.Pool(f.Model, f.y, f.s)
	if err != nil {
		return updated{}, err
	}
	if f.Weigh != nil {
		if mean.Evidence, err = f.Weigh(mean, f.y, f.s); err != nil {
			return updated{}, err
		}
	}
	u := updated{steps: mean.Evidence.Steps(), estimate: mean.Estimate, low: mean.Low, high: mean.High}
	if f.zone != nil {
		ratio, err := mean.Location().Region(f.zone, f.beyond)
		if err != nil {
			return u, err
		}
		u.zone = ratio.Steps()
	}
	return u, nil
}

// events are what an outlook counts, each a margin that is at least 0 where the
// event happens: first the passing of each step, then that the interval excludes
// the null to either side, then those of the zone.
func (f *foreseen) events() []func(u updated) float64 {
	var list []func(u updated) float64
	passing := func(of func(u updated) float64) {
		for _, want := range f.Steps {
			list = append(list, func(u updated) float64 { return math.Copysign(1, want) * (of(u) - want) })
		}
	}
	passing(func(u updated) float64 { return u.steps })
	null := f.Model.Null
	list = append(list, func(u updated) float64 { return outside(u, null, null) })
	if f.zone == nil {
		return list
	}
	low, high := f.Important.Low, f.Important.High
	list = append(list,
		func(u updated) float64 { return min(u.low-low, high-u.high) },
		func(u updated) float64 { return outside(u, low, high) })
	passing(func(u updated) float64 { return u.zone })
	return list
}

// outside is positive where an interval lies above high or below low.
func outside(u updated, low, high float64) float64 { return max(u.low-high, low-u.high) }

// outlook gathers the chances of the events.
func (f *foreseen) outlook(se float64, expected Value, chances []Value, spread []Percentile) *Outlook {
	o := &Outlook{SE: se, Expected: expected, Spread: spread}
	n := len(f.Steps)
	for i, want := range f.Steps {
		o.Passing = append(o.Passing, Chance{Steps: want, Value: chances[i]})
	}
	o.ExcludesNull = chances[n]
	if f.zone != nil {
		o.Zone = &ZoneOutlook{Inside: chances[n+1], Outside: chances[n+2]}
		for i, want := range f.Steps {
			o.Zone.Passing = append(o.Zone.Passing, Chance{Steps: want, Value: chances[n+3+i]})
		}
	}
	return o
}

// checkSE returns an *InputError unless se is finite and above 0.
func checkSE(se float64) error {
	if !(se > 0) || math.IsInf(se, 1) {
		return &InputError{fmt.Sprintf("the standard error %v of the next study is not a finite number above 0: correct it", se)}
	}
	return nil
}

// predictive returns the standard deviation of the next study's estimate.
func (f *foreseen) predictive(se float64) float64 { return math.Hypot(f.spread, se) }

// Foresee returns what a next study of standard error se may change, by
// quadrature: the chances from the values of y_new at which an event begins or
// ends, found by bracketed roots; the expected steps to about 1e-3; percentiles to
// about 1e-3 of their spread.
//
// It returns an *InputError for a question that cannot be asked, errors of
// meta.Pooler.Pool, and the cause if ctx ends.
func (q Trial) Foresee(ctx context.Context, se float64) (*Outlook, error) {
	f, err := q.foresee()
	if err != nil {
		return nil, err
	}
	if err := checkSE(se); err != nil {
		return nil, err
	}
	return f.foresee(ctx, se)
}

// Simulate returns what Foresee returns from draws of y_new, with Monte-Carlo
// errors: slower and less sure, and made in another way.
func (q Trial) Simulate(ctx context.Context, se float64, draws Draws) (*Outlook, error) {
	f, err := q.foresee()
	if err != nil {
		return nil, err
	}
	if err := checkSE(se); err != nil {
		return nil, err
	}
	if err := draws.check(); err != nil {
		return nil, err
	}
	results := make([]updated, draws.N)
	err = draws.run(ctx, trialQuestion, func() worker {
		own := *f
		own.pool = meta.Pooler{}
		own.y, own.s = slices.Clone(f.y), slices.Clone(f.s)
		return &trialWorker{f: &own, se: se, results: results}
	})
	if err != nil {
		return nil, err
	}
	events := f.events()
	chances := make([]Value, len(events))
	for i, margin := range events {
		count := 0
		for _, u := range results {
			if margin(u) >= 0 {
				count++
			}
		}
		chances[i] = share(count, draws.N)
	}
	spread := make([]Percentile, len(percentiles))
	values := make([]float64, draws.N)
	sorted := func(of func(u updated) float64) []float64 {
		for i, u := range results {
			values[i] = of(u)
		}
		slices.Sort(values)
		return values
	}
	for c, column := range columns {
		list := sorted(column)
		for i, p := range percentiles {
			spread[i].P = p
			*spread[i].column(c) = quantile(list, p).Value
		}
	}
	return f.outlook(se, meanOf(sorted(columns[0])), chances, spread), nil
}

// columns are the numbers whose percentiles are given.
var columns = [4]func(u updated) float64{
	func(u updated) float64 { return u.steps },
	func(u updated) float64 { return u.estimate },
	func(u updated) float64 { return u.low },
	func(u updated) float64 { return u.high },
}

func (p *Percentile) column(i int) *float64 {
	return [4]*float64{&p.Steps, &p.Estimate, &p.Low, &p.High}[i]
}

// trialWorker draws next studies.
type trialWorker struct {
	f       *foreseen
	se      float64
	results []updated
}

func (w *trialWorker) draw(_ context.Context, i int, random *rand.Rand) (err error) {
	w.results[i], err = w.f.with(w.f.mean+w.f.predictive(w.se)*random.NormFloat64(), w.se)
	return err
}

const (
	// trialReach is how many standard deviations of y_new are looked at; beyond
	// lies 1e-15.
	trialReach = 8.0
	// trialPoints is the number of values of y_new at which the review is pooled
	// anew, over that range.
	trialPoints = 320
	// weighedPoints is that number where the evidence is weighed by Trial.Weigh, which
	// may take a millisecond.
	weighedPoints = 96
)

// foresee is Foresee for a question that was checked.
func (f *foreseen) foresee(ctx context.Context, se float64) (*Outlook, error) {
	points := trialPoints
	if f.Weigh != nil {
		points = weighedPoints
	}
	step := 2 * trialReach / float64(points)
	sd := f.predictive(se)
	at := func(u float64) (updated, error) { return f.with(f.mean+sd*u, se) }
	nodes := make([]float64, points+1)
	results := make([]updated, points+1)
	expected := 0.0
	for i := range nodes {
		if ctx.Err() != nil {
			return nil, context.Cause(ctx)
		}
		nodes[i] = -trialReach + step*float64(i)
		var err error
		if results[i], err = at(nodes[i]); err != nil {
			return nil, err
		}
		expected += step * math.Exp(-0.5*nodes[i]*nodes[i]) / math.Sqrt(2*math.Pi) * results[i].steps
	}
	events := f.events()
	chances := make([]Value, len(events))
	for i, margin := range events {
		if ctx.Err() != nil {
			return nil, context.Cause(ctx)
		}
		p, err := chanceOf(margin, at, nodes, results)
		if err != nil {
			return nil, err
		}
		chances[i].Value = p
	}
	spread := make([]Percentile, len(percentiles))
	for c, column := range columns {
		values := make([]float64, len(results))
		for i, u := range results {
			values[i] = column(u)
		}
		for i, p := range percentiles {
			spread[i].P = p
			*spread[i].column(c) = gridQuantile(nodes, values, p)
		}
	}
	return f.outlook(se, Value{Value: expected}, chances, spread), nil
}

// chanceOf returns the standard normal probability of the u at which a margin is
// at least 0: between neighbouring nodes where it changes its sign the place is
// found by a bracketed root.
func chanceOf(margin func(updated) float64, at func(float64) (updated, error), nodes []float64, results []updated) (float64, error) {
	var fault error
	value := func(u float64) float64 {
		r, err := at(u)
		if err != nil {
			fault = err
			return 0
		}
		return margin(r)
	}
	total := 0.0
	start, inside := math.Inf(-1), margin(results[0]) >= 0
	for i := 1; i < len(nodes); i++ {
		now := margin(results[i]) >= 0
		if now == inside {
			continue
		}
		place, err := numeric.Root(value, nodes[i-1], nodes[i], 1e-9)
		if err == nil {
			err = fault
		}
		if err != nil {
			return 0, fmt.Errorf("where the next study turns the result: %w", err)
		}
		if inside {
			total += normalBetween(start, place)
		}
		start, inside = place, now
	}
	if inside {
		total += normalBetween(start, math.Inf(1))
	}
	return min(1, total), nil
}

func normalBetween(a, b float64) float64 { return math.Exp(numeric.LogNormalBetween(a, b)) }
