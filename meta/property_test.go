package meta

import (
	"math"
	"slices"
	"testing"

	"pgregory.net/rapid"
)

// loose is the tolerance of properties that hold but for rounding and the
// accuracy of roots.
const loose = 1e-8

// drawStudies draws up to 12 studies whose standard errors span three decades, so
// that likelihoods with several maxima come up. Estimates are equal or differ by
// 1/1024 and more: smaller differences do not survive a change of unit.
func drawStudies(t *rapid.T, fewest int) (y, s []float64) {
	k := rapid.IntRange(fewest, 12).Draw(t, "k")
	for range k {
		y = append(y, float64(rapid.IntRange(-3072, 3072).Draw(t, "1024 y"))/1024)
		s = append(s, math.Pow(10, rapid.Float64Range(-2, 1).Draw(t, "log10 s")))
	}
	return y, s
}

// drawModel draws a model whose settings go together.
func drawModel(t *rapid.T) Model {
	m := Model{
		Effects:     rapid.SampledFrom([]Effects{RandomEffects, CommonEffect}).Draw(t, "effects"),
		Interval:    rapid.SampledFrom([]IntervalMethod{DefaultInterval, Wald, HartungKnapp, HartungKnappFloor, ProfileLikelihood, HenmiCopas}).Draw(t, "interval"),
		TauInterval: rapid.SampledFrom([]TauIntervalMethod{QProfile, TauProfileLikelihood}).Draw(t, "τ interval"),
		Prediction:  rapid.SampledFrom([]PredictionMethod{PredictionTwoLess, PredictionOneLess}).Draw(t, "prediction"),
		Level:       rapid.Float64Range(0.5, 0.999).Draw(t, "level"),
		Null:        rapid.Float64Range(-3, 3).Draw(t, "null"),
	}
	if ownTau(m.Interval) == DefaultTau {
		m.Tau = TauMethod(rapid.IntRange(int(DefaultTau), int(RestrictedML)).Draw(t, "τ"))
	}
	if m.Interval == HenmiCopas {
		m.Effects = RandomEffects
	}
	return m
}

func fitOf(t *rapid.T, m Model, y, s []float64) *Fit {
	f, err := m.Fit(y, s)
	if err != nil {
		t.Fatalf("%+v of %v, %v: %v", m, y, s, err)
	}
	return f
}

// sameMean checks that got is want after y → shift + factor·y. Statistics change
// sign with the factor, and its limits change places.
func sameMean(t *rapid.T, got, want Mean, shift, factor float64) {
	low, high := shift+factor*want.Low, shift+factor*want.High
	size := math.Abs(factor) * max(want.SE, (want.High-want.Low)/4)
	if factor < 0 {
		low, high = high, low
	}
	for _, c := range []struct {
		name      string
		got, want float64
		tolerance float64
	}{
		{"estimate", got.Estimate, shift + factor*want.Estimate, loose * size},
		{"se", got.SE, math.Abs(factor) * want.SE, loose * size},
		{"low", got.Low, low, 10 * loose * size},
		{"high", got.High, high, 10 * loose * size},
		{"statistic", got.Statistic, math.Copysign(1, factor) * want.Statistic, 1e-6 * max(1, math.Abs(want.Statistic))},
		{"ln p", got.LnP, want.LnP, 1e-6 * max(1, -want.LnP)},
		{"τ²", got.Tau2, factor * factor * want.Tau2, loose * factor * factor * max(want.Tau2, 1e-3)},
		{"Q", got.Q, want.Q, loose * max(1, want.Q)},
		{"ln evidence", got.Evidence.Ln(), want.Evidence.Ln(), 1e-6 * max(1, math.Abs(want.Evidence.Ln()))},
	} {
		if !within(c.got, c.want, c.tolerance) {
			t.Errorf("%s = %.15g, want %.15g", c.name, c.got, c.want)
		}
	}
}

func TestOrderDoesNotMatter(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		y, s := drawStudies(t, 1)
		m := drawModel(t)
		order := rapid.Permutation(slices.Collect(indices(len(y)))).Draw(t, "order")
		var py, ps []float64
		for _, i := range order {
			py, ps = append(py, y[i]), append(ps, s[i])
		}
		a, b := fitOf(t, m, y, s), fitOf(t, m, py, ps)
		sameMean(t, b.Mean, a.Mean, 0, 1)
		for j, i := range order {
			if !within(b.Weights[j], a.Weights[i], loose) || !within(b.Predictors[j].Estimate, a.Predictors[i].Estimate, loose) {
				t.Errorf("study %d has weight %v at place %d, %v at %d", i, b.Weights[j], j, a.Weights[i], i)
			}
		}
	})
}

func indices(n int) func(yield func(int) bool) {
	return func(yield func(int) bool) {
		for i := range n {
			if !yield(i) {
				return
			}
		}
	}
}

func TestUnitDoesNotMatter(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		y, s := drawStudies(t, 1)
		m := drawModel(t)
		factor := math.Copysign(math.Pow(10, rapid.Float64Range(-3, 3).Draw(t, "log10 factor")),
			rapid.SampledFrom([]float64{-1, 1}).Draw(t, "sign"))
		shift := factor * rapid.Float64Range(-10, 10).Draw(t, "shift")
		other := m
		other.Null = shift + factor*m.Null
		var ty, ts []float64
		for i := range y {
			ty, ts = append(ty, shift+factor*y[i]), append(ts, math.Abs(factor)*s[i])
		}
		a, b := fitOf(t, m, y, s), fitOf(t, other, ty, ts)
		sameMean(t, b.Mean, a.Mean, shift, factor)
		if !within(b.Tau2.High, factor*factor*a.Tau2.High, 1e-6*factor*factor*max(a.Tau2.High, 1e-3)) {
			t.Errorf("upper limit of τ² = %v, want %v", b.Tau2.High, factor*factor*a.Tau2.High)
		}
	})
}

func TestScaleOfAnyMagnitude(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		y, s := drawStudies(t, 2)
		m := drawModel(t)
		factor := math.Ldexp(1, rapid.IntRange(-480, 480).Draw(t, "binary exponent"))
		other := m
		other.Null *= factor
		var ty, ts []float64
		for i := range y {
			ty, ts = append(ty, factor*y[i]), append(ts, factor*s[i])
		}
		a, b := mustMean(t, m, y, s), mustMean(t, other, ty, ts)
		if b.Estimate != factor*a.Estimate || b.Low != factor*a.Low || b.High != factor*a.High ||
			b.LnP != a.LnP || b.Evidence != a.Evidence || !near(b.Tau2, factor*factor*a.Tau2, 1e-12) {
			t.Errorf("scaled by a power of two: %+v, unscaled %+v", b, a)
		}
	})
}

func mustMean(t *rapid.T, m Model, y, s []float64) Mean {
	var p Pooler
	mean, err := p.Pool(m, y, s)
	if err != nil {
		t.Fatalf("%+v of %v, %v: %v", m, y, s, err)
	}
	return mean
}

// TestOffsetCostsNoDigits adds 2²⁰ to estimates that are whole multiples of 2⁻¹⁰,
// and a null of 2⁻³², which is exact: nothing but the position may change.
func TestOffsetCostsNoDigits(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		y, s := drawStudies(t, 1)
		m := drawModel(t)
		m.Null = math.Round(m.Null*0x1p32) * 0x1p-32
		const offset = 0x1p20
		moved := make([]float64, len(y))
		for i := range y {
			moved[i] = y[i] + offset
		}
		a := mustMean(t, m, y, s)
		m.Null += offset
		b := mustMean(t, m, moved, s)
		if a.SE != b.SE || a.Statistic != b.Statistic || a.LnP != b.LnP || a.Tau2 != b.Tau2 || a.Evidence != b.Evidence {
			t.Errorf("with an offset %+v, without %+v", b, a)
		}
		if !within(b.Estimate-offset, a.Estimate, 0x1p-32) {
			t.Errorf("estimate %v, want %v", b.Estimate-offset, a.Estimate)
		}
	})
}

// TestHugeStudyChangesNothing: a study whose standard error grows without bound
// drops out of the common effect and of both likelihoods; k counts it elsewhere.
func TestHugeStudyChangesNothing(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		y, s := drawStudies(t, 2)
		models := []Model{{Level: 0.95, Effects: CommonEffect}, with(MaximumLikelihood, Wald), with(RestrictedML, Wald)}
		m := rapid.SampledFrom(models).Draw(t, "model")
		a := mustMean(t, m, y, s)
		b := mustMean(t, m, append(slices.Clone(y), 1), append(slices.Clone(s), 1e9))
		b.Q = a.Q
		sameMean(t, b, a, 0, 1)
	})
}

func TestWeightsSumToOne(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		y, s := drawStudies(t, 1)
		f := fitOf(t, drawModel(t), y, s)
		sum, mean := 0.0, 0.0
		for i, w := range f.Weights {
			sum += w
			mean += w * y[i]
		}
		if !within(sum, 1, 1e-12) || !within(mean, f.Mean.Estimate, 1e-11) {
			t.Errorf("weights sum to %v, their mean is %v, estimate %v", sum, mean, f.Mean.Estimate)
		}
	})
}

func TestHigherLevelIsWider(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		y, s := drawStudies(t, 1)
		m := drawModel(t)
		wide := m
		wide.Level = m.Level + (1-m.Level)*rapid.Float64Range(0.05, 0.95).Draw(t, "wider")
		a, b := fitOf(t, m, y, s), fitOf(t, wide, y, s)
		if !(b.Mean.Low < a.Mean.Low && b.Mean.High > a.Mean.High) {
			t.Errorf("level %v gives %v to %v, %v gives %v to %v", m.Level, a.Mean.Low, a.Mean.High, wide.Level, b.Mean.Low, b.Mean.High)
		}
		if b.Tau2.Low > a.Tau2.Low || b.Tau2.High < a.Tau2.High {
			t.Errorf("τ² limits %v at level %v, %v at %v", a.Tau2, m.Level, b.Tau2, wide.Level)
		}
		if b.Heterogeneity.I2Q.Low > a.Heterogeneity.I2Q.Low || b.Heterogeneity.I2Q.High < a.Heterogeneity.I2Q.High {
			t.Errorf("I² limits %v at level %v, %v at %v", a.Heterogeneity.I2Q, m.Level, b.Heterogeneity.I2Q, wide.Level)
		}
		// Whether a prediction is widened depends on the level: those alike compare.
		if a.Prediction != nil && a.Prediction.Widened == b.Prediction.Widened && (b.Prediction.Low > a.Prediction.Low || b.Prediction.High < a.Prediction.High) {
			t.Errorf("prediction %v at level %v, %v at %v", *a.Prediction, m.Level, *b.Prediction, wide.Level)
		}
	})
}

// TestIntervalAndPAgree: with the null at a limit of the interval, the two-sided
// p is 1 − level, whatever the method.
func TestIntervalAndPAgree(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		y, s := drawStudies(t, 1)
		m := drawModel(t)
		mean := mustMean(t, m, y, s)
		for _, limit := range []float64{mean.Low, mean.High} {
			m.Null = limit
			if at := mustMean(t, m, y, s); !within(at.LnP, math.Log(1-m.Level), 1e-6) {
				t.Errorf("%v: p = %v at the limit %v, want %v", m.Interval, math.Exp(at.LnP), limit, 1-m.Level)
			}
		}
	})
}

// TestLocationAgreesWithEvidence: the standard error given for regions puts the
// null at the z (or t) that the evidence was taken at.
func TestLocationAgreesWithEvidence(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		y, s := drawStudies(t, 1)
		m := drawModel(t)
		mean := mustMean(t, m, y, s)
		l := mean.Location()
		if l.Estimate != mean.Estimate || l.DF != mean.DF {
			t.Fatalf("location %+v of %+v", l, mean)
		}
		if err := l.Check(); err != nil {
			t.Fatal(err)
		}
		ratio := (mean.Estimate - m.Null) / l.SE
		if math.IsInf(l.DF, 1) && math.Abs(ratio) > 1e-3 { // ln ER = (z² − 1 − ln 2)/2
			if want := mean.Evidence.Ln(); !within(0.5*(ratio*ratio-1-math.Ln2), want, 1e-7*max(1, ratio*ratio)) {
				t.Errorf("%v: z = %v by location, evidence %v", m.Interval, ratio, want)
			}
		} else if !math.IsInf(l.DF, 1) && !within(ratio, mean.Statistic, 1e-9*max(1, math.Abs(ratio))) {
			t.Errorf("t = %v by location, %v by the mean", ratio, mean.Statistic)
		}
	})
}

func TestInputsAreNotModified(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		y, s := drawStudies(t, 1)
		keptY, keptS := slices.Clone(y), slices.Clone(s)
		fitOf(t, drawModel(t), y, s)
		if !slices.Equal(y, keptY) || !slices.Equal(s, keptS) {
			t.Error("the studies were changed")
		}
	})
}

// TestPoolerRemembersNothing: a Pooler that has seen other data gives what a new
// one gives.
func TestPoolerRemembersNothing(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		var used Pooler
		for range 3 {
			y, s := drawStudies(t, 1)
			m := drawModel(t)
			got, err := used.Pool(m, y, s)
			if err != nil {
				t.Fatal(err)
			}
			if want := mustMean(t, m, y, s); got != want {
				t.Errorf("used Pooler %+v, new one %+v", got, want)
			}
		}
	})
}

func TestPredictorsLieBetween(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		y, s := drawStudies(t, 2)
		f := fitOf(t, with(PauleMandel, Wald), y, s)
		for i, b := range f.Predictors {
			low, high := min(y[i], f.Mean.Estimate), max(y[i], f.Mean.Estimate)
			if b.Estimate < low-1e-12 || b.Estimate > high+1e-12 || !(b.SE > 0) || b.SE > s[i]*(1+1e-12) {
				t.Errorf("predictor %+v of y = %v, s = %v, mean %v", b, y[i], s[i], f.Mean.Estimate)
			}
		}
	})
}
