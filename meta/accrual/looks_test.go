package accrual

import (
	"context"
	"encoding/csv"
	"errors"
	"math"
	"os"
	"reflect"
	"strconv"
	"testing"
	"time"

	"steelyard/meta"
	"steelyard/meta/evidence"
	"steelyard/meta/numeric"
)

var background = context.Background()

// oneByOne is the order in which each study enters alone.
func oneByOne(k int) [][]int {
	groups := make([][]int, k)
	for row := range groups {
		groups[row] = []int{row}
	}
	return groups
}

func equalSE(k int, s float64) []float64 {
	list := make([]float64, k)
	for i := range list {
		list[i] = s
	}
	return list
}

func mustLook(t testing.TB, q Sequence, truths []Scenario, draws Draws) []Repeated {
	t.Helper()
	r, err := Looks(background, q, truths, draws)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// fourErrors reports whether a simulated number is within four standard errors of
// want; an error of 0 is taken as that of one draw.
func fourErrors(got Value, want float64, n int) bool {
	return math.Abs(got.Value-want) <= 4*max(got.Error, 1/float64(n))
}

// criticalZ returns the |z| at which the normal form reaches a number of steps:
// (z² − 1 − ln 2)/2 = steps·ln(2+√3).
func criticalZ(steps float64) float64 {
	return math.Sqrt(1 + math.Ln2 + 2*steps*evidence.LnStep)
}

// TestOneLookMatchesTail: with one look at a common effect the chance is the tail
// of the normal law, under no effect and under one.
func TestOneLookMatchesTail(t *testing.T) {
	se := []float64{0.3, 0.2, 0.5}
	w := 1/0.09 + 1/0.04 + 1/0.25
	q := Sequence{SE: se, Groups: [][]int{{0, 1, 2}}, Model: meta.Model{Effects: meta.CommonEffect, Level: 0.95, Null: 0.1}}
	const n = 40_000
	for _, r := range mustLook(t, q, []Scenario{{Mean: 0.1}, {Mean: 0.5}}, Draws{N: n, Seed: 3}) {
		shift := (r.Scenario.Mean - 0.1) * math.Sqrt(w)
		for i, c := range r.AnyLook {
			z := criticalZ(c.Steps)
			want := numeric.NormalTail(z-shift) + numeric.NormalTail(z+shift)
			if !fourErrors(c.Value, want, n) {
				t.Errorf("mean %v, %v steps: %v ± %v, closed form %v", r.Scenario.Mean, c.Steps, c.Value.Value, c.Error, want)
			}
			if c != r.LastLook[i] {
				t.Errorf("one look: any %v, last %v", c, r.LastLook[i])
			}
		}
	}
	// The median and the 95 % quantile of |z| under no effect: 0.67449 and 1.95996.
	r := mustLook(t, q, []Scenario{{Mean: 0.1}}, Draws{N: n, Seed: 4})[0]
	if want := evidence.Normal(0.6744897501960817).Steps(); !fourErrors(r.Median, want, n) {
		t.Errorf("median %v ± %v, want %v", r.Median.Value, r.Median.Error, want)
	}
	if want := evidence.Normal(1.9599639845400545).Steps(); !fourErrors(r.High, want, n) || r.High.Error > 0.05 {
		t.Errorf("95 %% quantile %v ± %v, want %v", r.High.Value, r.High.Error, want)
	}
}

// TestTwoLooksMatchBivariateNormal: the chance of passing at either of two looks
// of equal weight, by integrating over the first statistic. With z₂ = (z₁ + u)/√2
// the chance of neither is E[P(|z₁ + u| < c√2); |z₁| < c].
func TestTwoLooksMatchBivariateNormal(t *testing.T) {
	q := Sequence{SE: equalSE(2, 0.4), Groups: oneByOne(2), Model: meta.Model{Effects: meta.CommonEffect, Level: 0.95}, From: 1}
	const n = 40_000
	r := mustLook(t, q, []Scenario{{}}, Draws{N: n, Seed: 5})[0]
	if r.Looks != 2 {
		t.Fatalf("%d looks", r.Looks)
	}
	for i, c := range r.AnyLook {
		z := criticalZ(c.Steps)
		neither, _, err := numeric.Integrate(func(x float64) float64 {
			density := math.Exp(-0.5*x*x) / math.Sqrt(2*math.Pi)
			return density * (numeric.NormalTail(-z*math.Sqrt2-x) - numeric.NormalTail(z*math.Sqrt2-x))
		}, -z, z, 1e-10)
		if err != nil {
			t.Fatal(err)
		}
		if !fourErrors(c.Value, 1-neither, n) {
			t.Errorf("%v steps at either look: %v ± %v, want %v", c.Steps, c.Value.Value, c.Error, 1-neither)
		}
		if want := 2 * numeric.NormalTail(z); !fourErrors(r.LastLook[i].Value, want, n) {
			t.Errorf("%v steps at the last look: %v, want %v", c.Steps, r.LastLook[i].Value.Value, want)
		}
	}
}

// TestCalibration spot-checks the table of the methods: % of data sets without an
// effect that pass steps 1 to 4, the worst of three patterns of precision and three
// values of τ, simulated there with 200,000 data sets or more. The room is four of
// our errors, half a unit of the last digit printed, and a tenth, since the table
// does not print how the second pattern is spaced.
func TestCalibration(t *testing.T) {
	const n = 20_000
	for _, c := range []struct {
		name  string
		k     int
		taus  []float64
		model meta.Model
		want  [4]float64
	}{
		{"default", 3, []float64{0.5, 1, 2}, meta.Model{Level: 0.95}, [4]float64{5.4, 0.5, 0, 0}},
		{"default", 10, []float64{0}, meta.Model{Level: 0.95}, [4]float64{1.1, 0, 0, 0}},
		{"wald", 3, []float64{0}, meta.Model{Level: 0.95, Interval: meta.Wald}, [4]float64{2.7, 0.6, 0.1, 0}},
		{"wald", 3, []float64{0.5, 1, 2}, meta.Model{Level: 0.95, Interval: meta.Wald}, [4]float64{22, 16, 12, 10}},
		{"wald", 5, []float64{0.5, 1, 2}, meta.Model{Level: 0.95, Interval: meta.Wald}, [4]float64{15, 9.8, 6.9, 5.1}},
		{"student-t", 5, []float64{0.5, 1, 2}, meta.Model{Level: 0.95, Evidence: evidence.StudentForm}, [4]float64{9.8, 4.0, 1.4, 0.6}},
	} {
		var worst [4]float64
		var failed [4]Value
		for _, se := range precisions(c.k) {
			q := Sequence{SE: se, Groups: [][]int{nil}, Model: c.model}
			for row := range c.k {
				q.Groups[0] = append(q.Groups[0], row)
			}
			var truths []Scenario
			for _, tau := range c.taus {
				truths = append(truths, Scenario{Tau2: tau * tau})
			}
			for _, r := range mustLook(t, q, truths, Draws{N: n, Seed: 6}) {
				for i, chance := range r.LastLook {
					if got := 100 * chance.Value.Value; got >= worst[i] {
						worst[i], failed[i] = got, chance.Value
					}
				}
			}
		}
		for i, got := range worst {
			unit := 0.05
			if c.want[i] >= 10 {
				unit = 0.5
			}
			room := 400*max(failed[i].Error, 1./n) + unit + 0.1*c.want[i]
			if !(math.Abs(got-c.want[i]) <= room) {
				t.Errorf("%s, k = %d, τ in %v: step %d passed by %.2f %%, want %v ± %.2f", c.name, c.k, c.taus, i+1, got, c.want[i], room)
			}
		}
	}
}

// precisions returns the patterns of the table: equal standard errors, from 0.4 to
// 2, and one a quarter of the rest.
func precisions(k int) [][]float64 {
	wide, one := make([]float64, k), equalSE(k, 1)
	for i := range wide {
		wide[i] = 0.4 * math.Pow(5, float64(i)/float64(k-1))
	}
	one[0] = 0.25
	return [][]float64{equalSE(k, 1), wide, one}
}

// TestRepeatedLooksOfMethods: looks 3 to 10 without an effect; the methods give
// 1.9, 0.1, 0, 0 % for the default at τ = 0 and at most 11, 2.5, 0.6, 0.2 with τ,
// and 9.3, 2.3, 0.6, 0.2 for the normal form with Wald at τ = 0.
func TestRepeatedLooksOfMethods(t *testing.T) {
	const n = 10_000
	q := Sequence{SE: equalSE(10, 1), Groups: oneByOne(10), From: 3}
	check := func(name string, r Repeated, want [4]float64, exact bool) {
		if r.Looks != 8 {
			t.Errorf("%s: %d looks", name, r.Looks)
		}
		for i, c := range r.AnyLook {
			got, room := 100*c.Value.Value, 400*max(c.Error, 1./n)+0.1 // the methods print two digits
			if exact && !(math.Abs(got-want[i]) <= room+0.25*want[i]) || got > want[i]+room {
				t.Errorf("%s: %v steps passed at any look by %.2f %%, want %v", name, c.Steps, got, want[i])
			}
		}
	}
	q.Model = meta.Model{Level: 0.95}
	r := mustLook(t, q, []Scenario{{}, {Tau2: 1}}, Draws{N: n, Seed: 8})
	check("default, τ = 0", r[0], [4]float64{1.9, 0.1, 0, 0}, true)
	check("default, τ = 1", r[1], [4]float64{11, 2.5, 0.6, 0.2}, false)
	q.Model.Interval = meta.Wald
	check("wald, τ = 0", mustLook(t, q, []Scenario{{}}, Draws{N: n, Seed: 8})[0], [4]float64{9.3, 2.3, 0.6, 0.2}, true)
}

func TestWorkersDoNotMatter(t *testing.T) {
	q := Sequence{SE: []float64{0.3, 0.2, 0.5, 0.4}, Groups: [][]int{{2}, {0, 3}, {1}}, Model: meta.Model{Level: 0.95}}
	truths := []Scenario{{Tau2: 0.04}, {}, {Mean: 0.3, Tau2: 0.04}}
	var all [][]Repeated
	for _, workers := range []int{1, 2, 5} {
		all = append(all, mustLook(t, q, truths, Draws{N: 1000, Seed: 9, Work: meta.Work{Workers: workers}}))
	}
	if !reflect.DeepEqual(all[0], all[1]) || !reflect.DeepEqual(all[0], all[2]) {
		t.Error("the number of workers changed the result")
	}
	if other := mustLook(t, q, truths, Draws{N: 1000, Seed: 10}); reflect.DeepEqual(all[0], other) {
		t.Error("another seed gave the same result")
	}
	if all[0][0].Looks != 2 {
		t.Errorf("%d looks count, want 2: the first has one study", all[0][0].Looks)
	}
}

func TestLooksStopAndReport(t *testing.T) {
	q := Sequence{SE: equalSE(30, 1), Groups: oneByOne(30), Model: meta.Model{Level: 0.95}}
	cause := errors.New("enough")
	ctx, cancel := context.WithCancelCause(background)
	time.AfterFunc(30*time.Millisecond, func() { cancel(cause) })
	start := time.Now()
	if _, err := Looks(ctx, q, []Scenario{{}}, Draws{N: 10_000_000}); !errors.Is(err, cause) {
		t.Errorf("stopped with %v", err)
	}
	if took := time.Since(start); took > time.Second { // 0.1 s and what a busy machine adds
		t.Errorf("stopped only after %v", took)
	}
	last, calls := 0, 0
	q.SE, q.Groups = q.SE[:3], oneByOne(3)
	mustLook(t, q, []Scenario{{}, {Mean: 1}}, Draws{N: 500, Work: meta.Work{Progress: func(done, total int) {
		if done <= last || total != 1000 {
			t.Errorf("progress %d of %d after %d", done, total, last)
		}
		last = done
		calls++
	}}})
	if last != 1000 || calls < 4 {
		t.Errorf("progress ended at %d after %d calls", last, calls)
	}
}

func TestLooksRefuse(t *testing.T) {
	good := Sequence{SE: equalSE(3, 1), Groups: oneByOne(3), Model: meta.Model{Level: 0.95}}
	draws := Draws{N: 100}
	var input *InputError
	var order *meta.OrderError
	var study *meta.InputError
	var model *meta.ModelError
	for name, c := range map[string]struct {
		change func(q *Sequence, s *Scenario, d *Draws)
		as     any
	}{
		"few draws":        {func(_ *Sequence, _ *Scenario, d *Draws) { d.N = 99 }, &input},
		"negative τ²":      {func(_ *Sequence, s *Scenario, _ *Draws) { s.Tau2 = -1 }, &input},
		"mean no number":   {func(_ *Sequence, s *Scenario, _ *Draws) { s.Mean = math.NaN() }, &input},
		"0 steps":          {func(q *Sequence, _ *Scenario, _ *Draws) { q.Steps = []float64{0} }, &input},
		"never as many":    {func(q *Sequence, _ *Scenario, _ *Draws) { q.From = 4 }, &input},
		"a row twice":      {func(q *Sequence, _ *Scenario, _ *Draws) { q.Groups = [][]int{{0, 1}, {1, 2}} }, &order},
		"standard error 0": {func(q *Sequence, _ *Scenario, _ *Draws) { q.SE = []float64{1, 0, 1} }, &study},
		"level 2":          {func(q *Sequence, _ *Scenario, _ *Draws) { q.Model.Level = 2 }, &model},
		"null no number":   {func(q *Sequence, _ *Scenario, _ *Draws) { q.Model.Null = math.NaN() }, &model},
	} {
		q, truth, d := good, Scenario{}, draws
		c.change(&q, &truth, &d)
		if r, err := Looks(background, q, []Scenario{truth}, d); r != nil || !errors.As(err, c.as) {
			t.Errorf("%s: %v, %v", name, r, err)
		}
	}
	if _, err := Looks(background, Sequence{Model: good.Model}, nil, draws); !errors.Is(err, meta.ErrNoStudies) {
		t.Errorf("no studies: %v", err)
	}
}

func TestScenarios(t *testing.T) {
	effect := -0.3
	got := Scenarios(meta.Mean{Tau2: 0.2}, 0.1, &effect)
	want := []Scenario{{Mean: 0.1, Tau2: 0.2}, {Mean: 0.1}, {Mean: -0.3, Tau2: 0.2}}
	if !reflect.DeepEqual(got, want) {
		t.Errorf("%v, want %v", got, want)
	}
	if got := Scenarios(meta.Mean{}, 0, nil); !reflect.DeepEqual(got, []Scenario{{}}) {
		t.Errorf("without spread: %v", got)
	}
}

// readStudies reads NAME.csv of testdata/checks: study, y, se.
func readStudies(t testing.TB, name string) (y, s []float64) {
	t.Helper()
	file, err := os.Open("../../testdata/checks/" + name + ".csv")
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	all, err := csv.NewReader(file).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	for _, row := range all[1:] {
		for i, into := range []*[]float64{&y, &s} {
			x, err := strconv.ParseFloat(row[1+i], 64)
			if err != nil {
				t.Fatal(err)
			}
			*into = append(*into, x)
		}
	}
	return y, s
}

// TestDrawsDoNotAllocate: memory does not grow with the number of looks taken.
func TestDrawsDoNotAllocate(t *testing.T) {
	_, s := readStudies(t, "bcg_lor")
	q := Sequence{SE: s, Groups: oneByOne(len(s)), Model: meta.Model{Level: 0.95}}
	plan, err := q.plan(background, nil, Draws{N: 100})
	if err != nil {
		t.Fatal(err)
	}
	w := plan.worker(Scenario{Tau2: 0.3}, make([]float64, 1), make([]float64, 1))
	numbers := newStream()
	block := 0
	if got := testing.AllocsPerRun(50, func() {
		numbers.start(1, looksQuestion, block)
		block++
		if err := w.draw(background, 0, numbers.random); err != nil {
			t.Fatal(err)
		}
	}); got != 0 {
		t.Errorf("%v allocations per sequence", got)
	}
}

func BenchmarkLooks(b *testing.B) {
	y, s := readStudies(b, "bcg_lor")
	for _, interval := range []meta.IntervalMethod{meta.Wald, meta.HartungKnappFloor} {
		b.Run("interval="+interval.String()+"/sequences=100000/looks=13", func(b *testing.B) {
			m := meta.Model{Level: 0.95, Tau: meta.RestrictedML, Interval: interval}
			var pool meta.Pooler
			mean, err := pool.Pool(m, y, s)
			if err != nil {
				b.Fatal(err)
			}
			q := Sequence{SE: s, Groups: oneByOne(len(s)), Model: m, From: 1}
			for b.Loop() {
				mustLook(b, q, []Scenario{{Tau2: mean.Tau2}}, Draws{N: 100_000, Seed: 1})
			}
		})
	}
}
