package meta

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"steelyard/meta/numeric"
)

func TestPredictionByHand(t *testing.T) {
	// y = 0, 2, 4 with s = 1: τ² = 4 − 1 = 3, mean 2, se² = 4/3, t on 1 df at 95 %
	// is tan(0.475π) = 12.7062: 2 ± 12.7062·√(3 + 4/3).
	y, s := []float64{0, 2, 4}, []float64{1, 1, 1}
	half := math.Tan(0.475*math.Pi) * math.Sqrt(13.0/3)
	f := mustFit(t, at95, y, s)
	if f.Prediction.DF != 1 || f.Prediction.Widened || f.Prediction.Method != PredictionTwoLess {
		t.Errorf("prediction %+v, want 1 df, not widened", *f.Prediction)
	}
	checker{t, 1e-9}.near("low", f.Prediction.Low, 2-half)
	checker{t, 1e-9}.near("high", f.Prediction.High, 2+half)
}

func TestPredictionIsWidened(t *testing.T) {
	// Hedges and Olkin give τ² = 0 for aspirin_lor while Q/(k−1) = 1.66: on k − 1
	// degrees of freedom the prediction must then equal the interval for the mean.
	d := readStudies(t, "aspirin_lor")
	m := with(HedgesOlkin, HartungKnapp)
	m.Prediction = PredictionOneLess
	f := mustFit(t, m, d.y, d.s)
	if !f.Prediction.Widened {
		t.Fatalf("prediction %+v beside %+v: not widened", *f.Prediction, f.Mean)
	}
	checker{t, 1e-12}.near("low", f.Prediction.Low, f.Mean.Low)
	checker{t, 1e-12}.near("high", f.Prediction.High, f.Mean.High)
	if !hasCaveat(f, PredictionWidened) {
		t.Errorf("caveats %v", f.Caveats)
	}
	m.Prediction = PredictionTwoLess // the wider t alone
	f = mustFit(t, m, d.y, d.s)
	ratio := (f.Prediction.High - f.Prediction.Low) / (f.Mean.High - f.Mean.Low)
	checker{t, 1e-12}.near("ratio", ratio, numeric.StudentCritical(0.05, 5)/numeric.StudentCritical(0.05, 6))
}

func TestNoPrediction(t *testing.T) {
	two := mustFit(t, at95, []float64{1, 2}, []float64{1, 1})
	if two.Prediction != nil || !hasCaveat(two, PredictionNeedsThree) {
		t.Errorf("two studies: prediction %v, caveats %v", two.Prediction, two.Caveats)
	}
	common := mustFit(t, Model{Level: 0.95, Effects: CommonEffect}, []float64{1, 2, 3}, []float64{1, 1, 1})
	if common.Prediction != nil || hasCaveat(common, PredictionNeedsThree) {
		t.Errorf("common effect: prediction %v, caveats %v", common.Prediction, common.Caveats)
	}
}

// TestBootstrapAgainstItsDefinition compares the limits with draws straight from
// the definition. With equal s it needs no numerical law of Q: τ² is drawn as
// max(0, Σ(y−ȳ)²/χ² − s²), χ² on k − 1 df, the mean is ȳ, and se² is
// Σ(y−ȳ)²/(k(k−1)), at any τ².
func TestBootstrapAgainstItsDefinition(t *testing.T) {
	for name, y := range map[string][]float64{
		"much scatter":   {-1.2, 0.4, 0.9, 2.5, 0.1, -0.3},
		"little scatter": {-0.3, 0.5, 0.1},
	} {
		s := slices.Repeat([]float64{0.6}, len(y))
		m := with(DefaultTau, HartungKnapp)
		m.Prediction, m.Seed = PredictionBootstrap, 7
		f := mustFit(t, m, y, s)
		below, above := bootstrapShares(y, 0.6, f.Prediction)
		// 25,000 draws place a 2.5 % quantile to 0.1 % in probability (one standard error).
		if !within(below, 0.025, 0.004) || !within(above, 0.025, 0.004) {
			t.Errorf("%s: %.4f of the draws below, %.4f above, want 0.025", name, below, above)
		}
		if !math.IsInf(f.Prediction.DF, 1) || f.Prediction.Method != PredictionBootstrap || f.Prediction.Widened {
			t.Errorf("%s: prediction %+v", name, *f.Prediction)
		}
	}
}

// bootstrapShares returns the shares of draws from the definition, for equal
// standard errors s, that fall below and above a prediction interval.
func bootstrapShares(y []float64, s float64, interval *Prediction) (below, above float64) {
	const draws = 400_000
	k := float64(len(y))
	mean, squares := 0.0, 0.0
	for _, x := range y {
		mean += x / k
	}
	for _, x := range y {
		squares += (x - mean) * (x - mean)
	}
	random := rand.New(rand.NewPCG(1, 2))
	chiSquare := func() float64 {
		sum := 0.0
		for range len(y) - 1 {
			z := random.NormFloat64()
			sum += z * z
		}
		return sum
	}
	se := math.Sqrt(squares / (k * (k - 1)))
	for range draws {
		tau := math.Sqrt(max(0, squares/chiSquare()-s*s))
		theta := mean + tau*random.NormFloat64() - se*random.NormFloat64()/math.Sqrt(chiSquare()/(k-1))
		if theta < interval.Low {
			below += 1. / draws
		}
		if theta > interval.High {
			above += 1. / draws
		}
	}
	return below, above
}

func TestBootstrapFollowsItsSeed(t *testing.T) {
	d := readStudies(t, "bcg_lor")
	m := at95
	m.Prediction = PredictionBootstrap
	first, again := mustFit(t, m, d.y, d.s), mustFit(t, m, d.y, d.s)
	m.Seed = 1
	other := mustFit(t, m, d.y, d.s)
	if *first.Prediction != *again.Prediction {
		t.Errorf("same seed: %v and %v", *first.Prediction, *again.Prediction)
	}
	width := first.Prediction.High - first.Prediction.Low
	if *first.Prediction == *other.Prediction || !within(other.Prediction.Low, first.Prediction.Low, 0.05*width) {
		t.Errorf("another seed: %v and %v", *first.Prediction, *other.Prediction)
	}
}

func TestGammaDraw(t *testing.T) {
	random := rand.New(rand.NewPCG(3, 4))
	for _, shape := range []float64{1, 2.5, 40} { // mean and variance are the shape
		const n = 200_000
		sum, squares := 0.0, 0.0
		for range n {
			x := gammaDraw(random, shape)
			sum += x
			squares += (x - shape) * (x - shape)
		}
		if mean := sum / n; !within(mean, shape, 5*math.Sqrt(shape/n)) {
			t.Errorf("shape %v: mean %v", shape, mean)
		}
		if variance := squares / n; !near(variance, shape, 0.03) {
			t.Errorf("shape %v: variance %v", shape, variance)
		}
	}
}

func TestStudentDraw(t *testing.T) {
	random := rand.New(rand.NewPCG(5, 6))
	for _, df := range []float64{2, 5, 30} { // two-sided 5 % lies beyond the critical value
		const n = 100_000
		critical, beyond := numeric.StudentCritical(0.05, df), 0
		for range n {
			if math.Abs(studentDraw(random, df)) > critical {
				beyond++
			}
		}
		if share := float64(beyond) / n; !within(share, 0.05, 5*math.Sqrt(0.05*0.95/n)) {
			t.Errorf("%v df: %v beyond the critical value, want 0.05", df, share)
		}
	}
}

func TestPredictorsByHand(t *testing.T) {
	// y = 0, 2, 4 with s = 1: τ² = 3, λ = ¾, mean 2, se² = 4/3: the first is
	// 2 + ¾(0 − 2) = 0.5 with variance ¾ + (1/16)(4/3) = 5/6.
	f := mustFit(t, at95, []float64{0, 2, 4}, []float64{1, 1, 1})
	c := checker{t, 1e-9}
	c.near("first", f.Predictors[0].Estimate, 0.5)
	c.near("its se", f.Predictors[0].SE, math.Sqrt(5.0/6))
	c.near("second", f.Predictors[1].Estimate, 2)
	// A common effect: every study's effect is the mean.
	common := mustFit(t, Model{Level: 0.95, Effects: CommonEffect}, []float64{0, 2, 4}, []float64{1, 1, 1})
	for _, b := range common.Predictors {
		c.near("common", b.Estimate, 2)
		c.near("common se", b.SE, 1/math.Sqrt(3))
	}
}

func hasCaveat(f *Fit, kind CaveatKind) bool {
	for _, c := range f.Caveats {
		if c.Kind == kind {
			return true
		}
	}
	return false
}

// TestCoverage: with equal s the Hartung–Knapp statistic follows Student's t
// exactly, so that its interval covers at its level; the bootstrap covers a new
// effect at 93 to 95 % (simulated for the methods).
func TestCoverage(t *testing.T) {
	const k, tau = 5, 0.7
	runs := 4000
	if testing.Short() {
		runs = 1000
	}
	random := rand.New(rand.NewPCG(11, 12))
	y, s := make([]float64, k), []float64{1, 1, 1, 1, 1}
	var p Pooler
	covered, predicted, predictions := 0, 0, 0
	for run := range runs {
		for i := range y {
			y[i] = tau*random.NormFloat64() + random.NormFloat64()
		}
		mean, err := p.Pool(with(RestrictedML, HartungKnapp), y, s)
		if err != nil {
			t.Fatal(err)
		}
		if mean.Low <= 0 && 0 <= mean.High {
			covered++
		}
		if run%40 == 0 {
			m := at95
			m.Prediction, m.Seed = PredictionBootstrap, uint64(run)
			f := mustFit(t, m, y, s)
			next := tau * random.NormFloat64()
			predictions++
			if f.Prediction.Low <= next && next <= f.Prediction.High {
				predicted++
			}
		}
	}
	if share := float64(covered) / float64(runs); !within(share, 0.95, 4*math.Sqrt(0.95*0.05/float64(runs))) {
		t.Errorf("Hartung–Knapp covers %.4f, want 0.95", share)
	}
	share := float64(predicted) / float64(predictions)
	if allowance := 4 * math.Sqrt(0.94*0.06/float64(predictions)); share < 0.93-allowance {
		t.Errorf("bootstrap prediction covers %.4f of %d, want 0.93 or more", share, predictions)
	}
}
