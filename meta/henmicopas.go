package meta

import (
	"fmt"
	"math"

	"steelyard/meta/numeric"
)

// henmiCopas returns the Henmi–Copas interval: centred on the common-effect mean
// μ̂₀, which small studies move little, yet wide enough for random effects,
//
//	μ̂₀ ± t·√((1 + τ̂²W₂/W₁)/W₁),  Wᵣ = Σv⁻ʳ, τ̂² by DerSimonian and Laird,
//
// with t from the joint law of μ̂₀ and Q at τ² = τ̂² (see henmiCopasLaw). The
// evidence takes the normal form at the z that has the p-value at which the
// interval just touches the null. Weights are those of the common effect.
//
// Source: Henmi & Copas (2010), Statistics in Medicine 29:2969-2983.
func (p *Pooler) henmiCopas() (answer, error) {
	law := newHenmiCopasLaw(&p.data, p.zero, p.final.tau2)
	a := answer{estimate: p.zero.mean, se: math.Sqrt(law.inflation / p.zero.w), df: infinite}
	a.statistic = (a.estimate - p.null) / a.se
	critical, err := law.critical(1 - p.model.Level)
	if err != nil {
		return a, fmt.Errorf("henmi-copas interval: %w", err)
	}
	a = a.around(critical)
	if a.lnP, err = law.lnP(math.Abs(a.statistic)); err != nil {
		return a, fmt.Errorf("henmi-copas p-value: %w", err)
	}
	z := math.Copysign(numeric.NormalFromLogTail(a.lnP-math.Ln2), a.statistic)
	return a.located(z, p.null, p.model.Level), nil
}

// henmiCopasLaw is the joint law of R = μ̂₀ − μ, a normal variable, and Cochran's
// Q, which given R is taken as a gamma variable with its exact mean m0 + m2·R²
// and variance v0 + v2·R². The interval with critical value t covers μ where
//
//	Q ≥ k−1 + (W₁ − W₂/W₁)(W₁/W₂)(R²W₁/t² − 1),
//
// and always where R²W₁ ≤ t², as τ̂² is never below 0.
type henmiCopasLaw struct {
	df        float64 // k − 1
	gain      float64 // (W₁ − W₂/W₁)·W₁/W₂
	inflation float64 // 1 + τ²W₂/W₁, which is W₁ times the variance of R
	m0, m2    float64 // of the mean of Q, by R in units of its standard deviation
	v0, v2    float64 // of the variance of Q, likewise
}

// newHenmiCopasLaw works out the law at tau2. With d = 1 + wτ² and p = wd/Σwd,
// M = Σpd, the moments of Q given R follow from those of the estimates given R:
//
//	m0 = Σd(1−p)                          m2 = Σw(d−D)²/D²·Var R,  D = Σwd/W₁
//	v0 = 2[Σd² − 2Σd²p + M²]              v2 = 4Σwd(d−M)²/D²·Var R
//
// The most precise study is set apart, so that nothing cancels where it dominates.
func newHenmiCopasLaw(data *sample, zero moments, tau2 float64) henmiCopasLaw {
	var w2, wd, restW2, restWD numeric.Sum
	for i, v := range data.v {
		w := 1 / v
		d := 1 + w*tau2
		w2.Add(w * w)
		wd.Add(w * d)
		if i != data.best {
			restW2.Add(w * w)
			restWD.Add(w * d)
		}
	}
	bestW := 1 / data.v[data.best]
	bestD, bestP := 1+bestW*tau2, 1-restWD.Value()/wd.Value()
	law := henmiCopasLaw{
		df:        data.df(),
		gain:      zero.c * zero.w / w2.Value(),
		inflation: wd.Value() / zero.w,
	}
	var restM, restM2, m0, v0 numeric.Sum // restM: M without the most precise study
	for i, v := range data.v {
		if i == data.best {
			continue
		}
		d := 1 + tau2/v
		share := d / v / wd.Value()
		restM.Add(d * share)
		restM2.Add(d * share * d * share)
		m0.Add(d * (1 - share))
		v0.Add(d * d * (1 - share) * (1 - share))
	}
	missing := restWD.Value() / wd.Value() // 1 − p of the most precise study
	m0.Add(bestD * missing)
	v0.Add(bestD * bestD * missing * missing)
	v0.Add(2*bestD*bestP*restM.Value() + restM.Value()*restM.Value() - restM2.Value())
	law.m0, law.v0 = m0.Value(), 2*v0.Value()

	bestFromD := tau2 * (bestW*(zero.w-bestW) - restW2.Value()) / zero.w
	bestFromM := bestD*missing - restM.Value()
	var m2, v2 numeric.Sum
	for i, v := range data.v {
		fromD, fromM := bestFromD, bestFromM
		if i != data.best {
			fromD = (tau2/v - bestW*tau2) + bestFromD
			fromM = (tau2/v - bestW*tau2) + bestFromM
		}
		m2.Add(fromD * fromD / v)
		v2.Add(fromM * fromM * (1 + tau2/v) / v)
	}
	scale := 1 / (law.inflation * zero.w) // Var R / D²
	law.m2, law.v2 = m2.Value()*scale, 4*v2.Value()*scale
	return law
}

// outside returns, for |R| u beyond x0 = t/√inflation in units of its standard
// deviation, ln of its density relative to that at x0 times the chance that the
// interval then misses μ.
func (law henmiCopasLaw) outside(u, x0 float64) float64 {
	x, ratio := x0+u, u/x0
	bar := law.df + law.gain*(2*ratio+ratio*ratio)
	mean, variance := law.m0+law.m2*x*x, law.v0+law.v2*x*x
	return -u*x0 - 0.5*u*u + logGammaLower(bar*(mean/variance), mean*(mean/variance))
}

// lnP returns ln of the chance that the interval with critical value t misses
// μ: the p-value at t standard errors from the null.
func (law henmiCopasLaw) lnP(t float64) (float64, error) {
	if t == 0 {
		return 0, nil
	}
	x0 := t / math.Sqrt(law.inflation)
	lnIntegral, err := logIntegral(func(u float64) float64 { return law.outside(u, x0) })
	lnDensity := -0.5*x0*x0 - 0.5*math.Log(2*math.Pi)
	return min(0, math.Ln2+lnDensity+lnIntegral), err
}

// critical returns the t at which the interval misses μ with chance alpha.
func (law henmiCopasLaw) critical(alpha float64) (float64, error) {
	want := math.Log(alpha)
	var failed error
	excess := func(t float64) float64 {
		lnP, err := law.lnP(t)
		if err != nil {
			failed = err
		}
		return lnP - want
	}
	// |R| alone must exceed t/√inflation, which bounds t from above.
	high := numeric.NormalCritical(alpha) * math.Sqrt(law.inflation) * (1 + 1e-9)
	low := 0.5 * high
	for excess(low) < 0 && low > 1e-12*high {
		low *= 0.5
	}
	t, err := numeric.Root(excess, low, high, rootTolerance)
	if failed != nil {
		return 0, failed
	}
	return t, err
}

// hugeShape is the gamma shape from which the tail is taken from its expansion,
// whose relative error there is below 1e-9.
const hugeShape = 1e6

// logGammaLower returns the log of the chance that a gamma variable of the given
// shape is below x > 0.
//
// Source of the form for a huge shape: Barndorff-Nielsen (1990), Journal of the
// Royal Statistical Society B 52:485-496.
func logGammaLower(x, shape float64) float64 {
	if shape > hugeShape {
		m := (x - shape) / shape
		r := math.Copysign(math.Sqrt(2*shape*(m-math.Log1p(m))), m)
		shift := 1 / (3 * math.Sqrt(shape))
		if math.Abs(m) > 1e-4 {
			shift = math.Log(math.Sqrt(shape)*m/r) / r
		}
		return numeric.LogNormalTail(-r - shift)
	}
	if x >= shape+1 {
		return math.Log1p(-numeric.GammaTail(x, shape))
	}
	sum, term := 1.0, 1.0
	for n := shape + 1; term > 1e-17*sum; n++ {
		term *= x / n
		sum += term
	}
	return shape*math.Log(x) - x - numeric.LogGamma(shape+1) + math.Log(sum)
}
