package evidence

import (
	"math"

	"steelyard/meta/numeric"
)

// Normal returns the evidence for θ ≠ θ₀ of an estimate z standard errors from
// θ₀ whose error is normal:
//
//	ln ER = (z² - 1 - ln 2)/2
//
// At z = 0 it is 2.33 : 1 for no effect, the most it can say for that.
//
// Source: Dudbridge (2024), PLoS ONE 19(2):e0297874.
func Normal(z float64) Ratio { return Ratio{ln: 0.5 * (z*z - 1 - math.Ln2)} }

// ChiSquare returns the evidence of a statistic x that is chi-square with df
// degrees of freedom under H0:
//
//	ln ER = (x - df(1 + ln 2))/2
//
// With Cochran's Q it weighs unrelated effects against one common effect.
//
// Source: Dudbridge (2024), PLoS ONE 19(2):e0297874.
func ChiSquare(x, df float64) Ratio {
	if !(x >= 0) || !(df > 0) {
		return invalid()
	}
	return Ratio{ln: 0.5 * (x - df*(1+math.Ln2))}
}

func invalid() Ratio { return Ratio{ln: math.NaN()} }

// Matched returns the evidence of Student's t with df degrees of freedom as the
// normal form at the z that has the same two-sided p-value: one meaning in
// frequencies whatever the degrees of freedom, at most 2.33 : 1 for no effect.
func Matched(t, df float64) Ratio { return Normal(MatchedZ(t, df)) }

// MatchedTail returns the evidence of any statistic as the normal form at the z
// that has the same one-sided tail, given by its natural logarithm: Matched, where
// the tail of |t| is known already.
func MatchedTail(lnTail float64) Ratio { return Normal(numeric.NormalFromLogTail(lnTail)) }

// MatchedZ returns the normal statistic that has the sign and the p-value of
// Student's t with df degrees of freedom.
func MatchedZ(t, df float64) float64 {
	if math.IsInf(df, 1) {
		return t
	}
	return math.Copysign(numeric.NormalFromLogTail(numeric.LogStudentTail(math.Abs(t), df)), t)
}

// MatchedF returns the evidence of Fisher's F with d1 and d2 degrees of freedom
// as the chi-square form with d1 degrees of freedom at the chi-square that has
// the same p-value.
func MatchedF(f, d1, d2 float64) Ratio {
	if math.IsInf(d2, 1) {
		return ChiSquare(d1*f, d1)
	}
	return ChiSquare(numeric.ChiSquareFromLogTail(numeric.LogFTail(f, d1, d2), d1), d1)
}

// Student returns the evidence of Student's t with df degrees of freedom from
// the t likelihood itself, the scale having the prior dσ/σ. With n = df+1,
//
//	ln BF₀₁ = lnΓ(n) + lnΓ((n-1)/2) - lnΓ(n/2) - lnΓ(n-½)
//	          - (n/2) ln(1 + t²/df) + b₁ - b₀
//
// and ER its inverse; b₁ and b₀ correct for using the data twice. It tends to
// the normal form with many degrees of freedom; with few, both ends are heavy.
func Student(t, df float64) Ratio { return F(t*t, 1, df).orStudentTail(t, df) }

// orStudentTail mends a ratio whose t² overflowed.
func (r Ratio) orStudentTail(t, df float64) Ratio {
	if !math.IsInf(r.ln, 1) || math.IsInf(t, 0) || math.IsInf(df, 1) {
		return r
	}
	base := F(0, 1, df).ln
	return Ratio{ln: base + (df+1)*(math.Log(math.Abs(t))-0.5*math.Log(df))}
}

// F returns the evidence of Fisher's F with d1 and d2 degrees of freedom from
// the likelihood itself. With N = d1+d2,
//
//	ln BF₀₁ = lnΓ(N) + lnΓ(d2/2) - lnΓ(N/2) - lnΓ(N-d1/2)
//	          - (N/2) ln(1 + d1·f/d2) + b₁ - b₀
//	b₁ = (N-d1/2)(ψ(N-d1/2) - ψ(d2/2) - ln 2)
//	b₀ = N(ψ(N) - ψ(N/2) - ln 2)
//
// and ER its inverse. It tends to the chi-square form of d1·f as d2 grows.
func F(f, d1, d2 float64) Ratio {
	switch {
	case !(f >= 0) || !(d1 > 0) || !(d2 > 0) || math.IsInf(d1, 1):
		return invalid()
	case math.IsInf(d2, 1):
		return ChiSquare(d1*f, d1)
	}
	gammas := numeric.LogGammaRise(d2+d1/2, d1/2) - numeric.LogGammaRise(d2/2, d1/2)
	likelihood := 0.5 * (d1 + d2) * math.Log1p(d1/d2*f)
	return Ratio{ln: likelihood - gammas - correctionF(d1, d2)}
}

// correctionF returns b₁ - b₀ of the F form, written with ψ(x) - ln x so that
// nothing cancels at many degrees of freedom; it tends to d1/2.
func correctionF(d1, d2 float64) float64 {
	n := d1 + d2
	m := n - d1/2
	b1 := m * (numeric.DigammaLessLog(m) - numeric.DigammaLessLog(d2/2) + math.Log1p(d1/2/d2))
	b0 := n * (numeric.DigammaLessLog(n) - numeric.DigammaLessLog(n/2))
	return b1 - b0
}

// OneSided returns the evidence for θ > θ₀ against the point θ = θ₀ of an
// estimate z standard errors above θ₀:
//
//	ln ER = (z² - 1 - ln 2)/2 + ln Φ(√2 z) - ln Φ(z)
func OneSided(z float64) Ratio {
	if z < 0 {
		// exp(z²/2), exp(-z²) and exp(z²/2) of the three parts cancel.
		return Ratio{ln: -0.5*(1+math.Ln2) + numeric.LogMills(-math.Sqrt2*z) - numeric.LogMills(-z)}
	}
	return Ratio{ln: Normal(z).ln + numeric.LogNormalTail(-math.Sqrt2*z) - numeric.LogNormalTail(-z)}
}

// OneSidedMatched is OneSided at the normal statistic that has the sign and the
// p-value of Student's t with df degrees of freedom.
func OneSidedMatched(t, df float64) Ratio { return OneSided(MatchedZ(t, df)) }

// OneSidedStudent returns the evidence for θ > θ₀ against the point θ = θ₀ from
// the t likelihood: the form of Student with the share of (θ₀, ∞) in the squared
// likelihood over its share in the likelihood.
func OneSidedStudent(t, df float64) Ratio {
	if math.IsInf(df, 1) {
		return OneSided(t)
	}
	square := 2*df + 1
	share := numeric.LogStudentTail(-math.Sqrt(square/df)*t, square) - numeric.LogStudentTail(-t, df)
	return Ratio{ln: Student(t, df).ln + share}
}

// Bound returns the evidence for an effect that no prior can exceed, given an
// estimate z standard errors from θ₀: ln ER = z²/2.
//
// Source: Edwards, Lindman & Savage (1963), Psychological Review 70:193-242.
func Bound(z float64) Ratio { return Ratio{ln: 0.5 * z * z} }

// BoundStudent is Bound for Student's t with df degrees of freedom:
// ln ER = ½(df+1) ln(1 + t²/df).
func BoundStudent(t, df float64) Ratio {
	switch {
	case !(df > 0):
		return invalid()
	case math.IsInf(df, 1):
		return Bound(t)
	}
	r := math.Abs(t) / math.Sqrt(df)
	if r > 1e8 {
		return Ratio{ln: (df + 1) * math.Log(r)}
	}
	return Ratio{ln: 0.5 * (df + 1) * math.Log1p(r*r)}
}
