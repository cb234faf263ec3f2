package accrual

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"

	"steelyard/meta"
)

// Sequence is a review that is looked at again whenever studies enter: the
// standard errors of all studies in the order of the sheet, and the rows that
// enter at each look, ties together, as meta.Cumulative takes them.
type Sequence struct {
	SE     []float64
	Groups [][]int
	Model  meta.Model
	// From is the number of studies from which on a look counts; 0 means 2: a
	// single study's own effect is not a mean.
	From int
	// Steps are the numbers of steps whose passing is counted; none means 1 to 4.
	Steps []float64
}

// Scenario is a truth under which the sequence is simulated: the mean effect and
// the variance between studies.
type Scenario struct{ Mean, Tau2 float64 }

// Scenarios returns the truths of interest beside a pooled mean: no effect with τ²
// as estimated, no effect with τ² = 0 (left out where the estimate is 0), and, if
// stated, an effect with τ² as estimated.
func Scenarios(pooled meta.Mean, null float64, effect *float64) []Scenario {
	list := []Scenario{{Mean: null, Tau2: pooled.Tau2}}
	if pooled.Tau2 > 0 {
		list = append(list, Scenario{Mean: null})
	}
	if effect != nil {
		list = append(list, Scenario{Mean: *effect, Tau2: pooled.Tau2})
	}
	return list
}

// Repeated is what repeated looks show under one scenario. The mean of the largest
// evidence ratio is infinite, so quantiles of the largest steps stand for it.
//
// Every number of steps is a fixed bound on the statistic: with looks that never
// end each is passed in time under no effect too.
type Repeated struct {
	Scenario  Scenario
	Sequences int
	Looks     int      // that count
	AnyLook   []Chance // that the steps are passed at one look at least
	LastLook  []Chance
	Median    Value // of the largest steps over the looks
	High      Value // their 95 % quantile
}

// Looks simulates the sequence under each scenario: studies y ~ N(mean, s² + τ²),
// refitted by the model at each look that counts. The scenarios share their random
// numbers, so that they can be compared.
//
// It returns an *InputError for a question that cannot be asked, an
// *meta.OrderError for groups that are no order of the studies, errors of
// meta.Pooler.Pool, and the cause if ctx ends.
func Looks(ctx context.Context, q Sequence, scenarios []Scenario, draws Draws) ([]Repeated, error) {
	plan, err := q.plan(ctx, scenarios, draws)
	if err != nil {
		return nil, err
	}
	total := draws
	total.N *= len(scenarios)
	results := make([]Repeated, len(scenarios))
	for i, truth := range scenarios {
		part := draws
		if progress := draws.Work.Progress; progress != nil {
			part.Work.Progress = func(done, _ int) { progress(i*draws.N+done, total.N) }
		}
		largest, last := make([]float64, draws.N), make([]float64, draws.N)
		if err := part.run(ctx, looksQuestion, func() worker { return plan.worker(truth, largest, last) }); err != nil {
			return nil, err
		}
		slices.Sort(largest)
		slices.Sort(last)
		results[i] = Repeated{
			Scenario: truth, Sequences: draws.N, Looks: len(plan.sizes),
			AnyLook: chancesOf(largest, plan.steps), LastLook: chancesOf(last, plan.steps),
			Median: quantile(largest, 0.5), High: quantile(largest, 0.95),
		}
	}
	return results, nil
}

// looksQuestion and trialQuestion tell the random numbers of one question from
// those of another with the same seed.
const (
	looksQuestion = 1
	trialQuestion = 2
)

// lookPlan is a sequence in the order of accrual.
type lookPlan struct {
	model meta.Model
	se    []float64 // in the order in which the studies enter
	sizes []int     // studies at each look that counts
	steps []float64
}

// plan checks the question and puts the studies in order.
func (q Sequence) plan(ctx context.Context, scenarios []Scenario, draws Draws) (*lookPlan, error) {
	if err := draws.check(); err != nil {
		return nil, err
	}
	if err := checkSteps(q.Steps); err != nil {
		return nil, err
	}
	for _, truth := range scenarios {
		if !(truth.Tau2 >= 0) || math.IsInf(truth.Tau2, 1) || math.IsNaN(truth.Mean) || math.IsInf(truth.Mean, 0) {
			return nil, &InputError{fmt.Sprintf("a mean of %v with τ² %v is no truth to simulate: give a finite mean and a τ² of 0 or more", truth.Mean, truth.Tau2)}
		}
	}
	// Pooling estimates of 0 checks standard errors and model, accumulating them the
	// order.
	pairs, err := meta.NewPairs(q.Model, make([]float64, len(q.SE)), q.SE)
	if err != nil {
		return nil, err
	}
	if _, err := meta.Cumulative(ctx, pairs, q.Groups, meta.Work{Workers: 1}); err != nil {
		return nil, err
	}
	p := &lookPlan{model: q.Model, steps: q.Steps}
	if len(p.steps) == 0 {
		p.steps = []float64{1, 2, 3, 4}
	}
	from := q.From
	if from <= 0 {
		from = 2
	}
	for _, group := range q.Groups {
		for _, row := range group {
			p.se = append(p.se, q.SE[row])
		}
		if len(p.se) >= from {
			p.sizes = append(p.sizes, len(p.se))
		}
	}
	if len(p.sizes) == 0 {
		return nil, &InputError{fmt.Sprintf("no look has %d studies: there are %d; count looks from fewer studies on", from, len(p.se))}
	}
	return p, nil
}

// lookWorker simulates sequences in its own scratch space.
type lookWorker struct {
	plan          *lookPlan
	mean          float64
	sd, y         []float64
	pool          meta.Pooler
	largest, last []float64 // by sequence, shared by all workers
}

func (p *lookPlan) worker(truth Scenario, largest, last []float64) *lookWorker {
	w := &lookWorker{plan: p, mean: truth.Mean, largest: largest, last: last}
	w.sd, w.y = make([]float64, len(p.se)), make([]float64, len(p.se))
	for i, s := range p.se {
		w.sd[i] = math.Hypot(s, math.Sqrt(truth.Tau2))
	}
	return w
}

// draw simulates one sequence.
func (w *lookWorker) draw(ctx context.Context, i int, random *rand.Rand) error {
	for j, sd := range w.sd {
		w.y[j] = w.mean + sd*random.NormFloat64()
	}
	largest, last := math.Inf(-1), 0.0
	for _, n := range w.plan.sizes {
		if ctx.Err() != nil {
			return nil
		}
		mean, err := w.pool.Pool(w.plan.model, w.y[:n], w.plan.se[:n])
		if err != nil {
			return err
		}
		last = mean.Evidence.Steps()
		largest = max(largest, last)
	}
	w.largest[i], w.last[i] = largest, last
	return nil
}
