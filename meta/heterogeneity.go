package meta

import (
	"math"

	"steelyard/meta/evidence"
	"steelyard/meta/numeric"
)

// heterogeneity measures the scatter of the estimates. limits are those of τ².
//
//	I² by Q = (Q − df)/Q, not below 0      H² by Q = Q/df
//	I² by τ = τ²/(τ² + typical v)          H² by τ = (τ² + typical v)/typical v
//	typical v = (k−1)Σw/((Σw)² − Σw²), w = 1/v
//
// The limits of I² by Q are the test-based ones of ln H (see shareByQ), those of
// I² by τ follow from the limits of τ². A single study has no scatter: Q and
// both I² are 0, both H² 1, and its typical v is its own. Beside a common effect
// I² by τ is 0 as assumed, while its limits are those of the data.
//
// Source: Higgins & Thompson (2002), Statistics in Medicine 21:1539-1558.
func (p *Pooler) heterogeneity(limits Limits) Heterogeneity {
	d, q := &p.data, p.zero.q
	square := d.unit * d.unit
	if d.k() < 2 {
		return Heterogeneity{H2: 1, H2Tau: 1, Typical: d.v[0] * square}
	}
	typical := d.df() / p.zero.c
	share := func(tau2 float64) float64 { return shareByTau2(tau2, typical) }
	return Heterogeneity{
		Q:        q,
		DF:       d.k() - 1,
		LnP:      min(0, numeric.LogChiSquareTail(q, d.df())),
		I2Q:      shareByQ(q, d.k(), p.model.Level),
		I2Tau:    Share{Value: share(p.tau2()), Low: share(limits.Low), High: share(limits.High)},
		H2:       q / d.df(),
		H2Tau:    (p.tau2() + typical) / typical,
		Typical:  typical * square,
		Evidence: evidence.ChiSquare(q, d.df()),
	}
}

// shareByTau2 returns I² by τ².
func shareByTau2(tau2, typical float64) float64 { return tau2 / (tau2 + typical) }

// I2 returns the I² by τ² of the set that Pool pooled last: that of Fit, without its
// limits; 0 for a single study.
func (p *Pooler) I2() float64 {
	if p.data.k() < 2 {
		return 0
	}
	return shareByTau2(p.tau2(), p.data.df()/p.zero.c)
}

// HeterogeneityOf returns what a statistic q on df degrees of freedom says of
// scatter by itself, with limits of I² by Q at a level: what needs sampling
// variances, I² and H² by τ², is 0. With df below 1 nothing can scatter.
func HeterogeneityOf(q float64, df int, level float64) Heterogeneity {
	if df < 1 {
		return Heterogeneity{H2: 1}
	}
	return Heterogeneity{
		Q: q, DF: df, LnP: min(0, numeric.LogChiSquareTail(q, float64(df))),
		I2Q: shareByQ(q, df+1, level), H2: q / float64(df),
		Evidence: evidence.ChiSquare(q, float64(df)),
	}
}

// shareByQ returns I² = (Q − df)/Q, not below 0, with the limits that follow
// from H = √(Q/df), not below 1, by exp(ln H ± z·se), where
//
//	se = ½(ln Q − ln(k−1))/(√(2Q) − √(2k−3))    for Q > k
//	se = √((1 − 1/(3(k−2)²))/(2(k−2)))          else
//
// Two studies with Q ≤ 2 have no such se: the limits are 0 and 1.
func shareByQ(q float64, k int, level float64) Share {
	n, df := float64(k), float64(k-1)
	share := func(h float64) float64 {
		if !(h > 1) {
			return 0
		}
		return (h - 1) / h * ((h + 1) / h)
	}
	lnH := 0.5 * math.Log(max(1, q/df))
	var se float64
	switch {
	case q > n:
		se = 0.5 * math.Log(q/df) / (math.Sqrt(2*q) - math.Sqrt(2*n-3))
	case k == 2:
		return Share{Value: max(0, 1-df/q), Low: 0, High: 1}
	default:
		se = math.Sqrt((1 - 1/(3*(n-2)*(n-2))) / (2 * (n - 2)))
	}
	z := numeric.NormalCritical(1 - level)
	value := 0.0
	if q > df {
		value = (q - df) / q
	}
	return Share{Value: value, Low: share(math.Exp(lnH - z*se)), High: share(math.Exp(lnH + z*se))}
}
