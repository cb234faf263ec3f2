package sparse

import (
	"math"

	"steelyard/meta/effect"
	"steelyard/meta/numeric"
)

// margins are the fixed margins of a table and the events observed in its
// treated arm, which lie between low and high.
type margins struct{ n1, n2, m, low, high, observed float64 }

func marginsOf(t effect.Table) margins {
	m := t.Events1 + t.Events2
	return margins{
		n1: t.Total1, n2: t.Total2, m: m,
		low: max(0, m-t.Total2), high: min(m, t.Total1), observed: t.Events1,
	}
}

// law is the law of the events in the treated arm given the margins, at a log
// odds ratio θ: non-central hypergeometric, P(a) ∝ C(n₁,a) C(n₂,m−a) e^(θa).
type law struct {
	first          float64   // events that share[0] belongs to
	share          []float64 // probabilities; those left out are below negligible of the largest
	mean, variance float64
	lnObserved     float64 // ln P(observed)
}

// negligible is the probability, relative to the largest of a law, below which
// terms are left out. The law is log-concave: all that is left out sums to a few
// times the first term of it.
const negligible = 1e-24

// widestLaw is how many probabilities of one law are held at most.
const widestLaw = 1 << 22

// rise returns P(a)/P(a−1) at θ = 0. It falls in a.
func (g margins) rise(a float64) float64 {
	return (g.n1 - a + 1) / a * ((g.m - a + 1) / (g.n2 - g.m + a))
}

// mode returns the most likely count at odds ratio psi.
func (g margins) mode(psi float64) float64 {
	low, high := g.low, g.high
	for low < high {
		mid := math.Ceil(low + 0.5*(high-low))
		if psi*g.rise(mid) >= 1 {
			low = mid
		} else {
			high = mid - 1
		}
	}
	return low
}

// at returns the law at log odds ratio θ, in the space of share if that is
// large enough. It returns a *SizeError for a law wider than widestLaw.
func (g margins) at(theta float64, share []float64) (law, error) {
	psi := math.Exp(theta)
	mode := g.mode(psi)
	first, down := mode, 1.0
	for first > g.low && down >= negligible && mode-first < widestLaw {
		down /= psi * g.rise(first)
		first--
	}
	last, up := mode, 1.0
	for last < g.high && up >= negligible && last-mode < widestLaw {
		last++
		up *= psi * g.rise(last)
	}
	if last-first >= widestLaw {
		return law{}, &SizeError{Terms: last - first}
	}
	share = append(share[:0], make([]float64, int(last-first)+1)...)
	at := int(mode - first)
	share[at] = 1
	for i, a := at, mode; i > 0; i, a = i-1, a-1 {
		share[i-1] = share[i] / (psi * g.rise(a))
	}
	for i, a := at+1, mode+1; i < len(share); i, a = i+1, a+1 {
		share[i] = share[i-1] * psi * g.rise(a)
	}
	return g.complete(theta, law{first: first, share: share}, mode), nil
}

// complete norms the probabilities, which are relative to that of the mode, and
// sets the moments.
func (g margins) complete(theta float64, l law, mode float64) law {
	var total, mean, variance numeric.Sum
	for i, p := range l.share {
		total.Add(p)
		mean.Add(p * (l.first + float64(i) - mode))
	}
	shift := mean.Value() / total.Value()
	for i, p := range l.share {
		gap := l.first + float64(i) - mode - shift
		variance.Add(p * gap * gap)
		l.share[i] = p / total.Value()
	}
	l.mean, l.variance = mode+shift, variance.Value()/total.Value()
	l.lnObserved = min(0, g.lnFrom(mode)+theta*(g.observed-mode)-math.Log(total.Value()))
	return l
}

// lnFrom returns ln P(observed) − ln P(a) at θ = 0.
func (g margins) lnFrom(a float64) float64 {
	if a == g.observed {
		return 0
	}
	x := g.observed
	rest := g.n2 - g.m
	return numeric.LogGammaRatio(a+1, x+1) + numeric.LogGammaRatio(g.n1-a+1, g.n1-x+1) +
		numeric.LogGammaRatio(g.m-a+1, g.m-x+1) + numeric.LogGammaRatio(rest+a+1, rest+x+1)
}
