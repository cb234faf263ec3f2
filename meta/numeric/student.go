package numeric

import "math"

// studentSeriesFrom is the number of degrees of freedom from which the tail near
// the centre is a short series of normal moments; below, the continued fraction
// of the incomplete beta function is as short.
const studentSeriesFrom = 64

// studentSeries holds the coefficients of (sinh(q/2)/(q/2))^(-1/2) in powers of
// q², exact fractions rounded once.
var studentSeries = [...]float64{
	1, -1. / 48, 1. / 2560, -61. / 7741440, 1.6967665791721782e-07, -3.805064191721906e-09,
	8.748377596315407e-11, -2.044523359411974e-12, 4.833351797967704e-14, -1.152434101767386e-15,
}

// StudentTail returns P(T > t) for Student's t with df degrees of freedom; df
// may be any positive number, +Inf means the normal law.
func StudentTail(t, df float64) float64 {
	if t < 0 {
		return 1 - StudentTail(-t, df)
	}
	return math.Exp(LogStudentTail(t, df))
}

// LogStudentTail returns ln P(T > t) for Student's t with df degrees of freedom;
// df may be any positive number, +Inf means the normal law.
func LogStudentTail(t, df float64) float64 {
	switch {
	case !(df > 0) || math.IsNaN(t):
		return math.NaN()
	case math.IsInf(df, 1):
		return LogNormalTail(t)
	case t < 0:
		return math.Log1p(-math.Exp(LogStudentTail(-t, df)))
	case math.IsInf(t, 1):
		return math.Inf(-1)
	}
	return studentUpper(logOnePlusSquare(t, df), df)
}

// logOnePlusSquare returns ln(1 + t²/df), also where t² overflows.
func logOnePlusSquare(t, df float64) float64 {
	r := t / math.Sqrt(df)
	if r = math.Abs(r); r > 1e8 {
		return 2 * math.Log(r)
	}
	return math.Log1p(r * r)
}

// studentUpper returns ln P(T > t), t ≥ 0, from q = ln(1 + t²/df).
func studentUpper(q, df float64) float64 {
	if df >= studentSeriesFrom && q < 1 {
		return studentNear(q, df)
	}
	// P(T > t) = ½ I_x(df/2, ½) with x = df/(df + t²) = exp(-q).
	return logBetaTails(df/2, 0.5, q) - ln2
}

// studentNear returns ln P(T > t) for many degrees of freedom and t² below about
// 1.7·df. With s² = ln(1 + t²/df),
//
//	P(T > t) = Γ((df+1)/2)/(√π Γ(df/2)) ∫_s^∞ exp(-(df-½)v²/2) h(v²) dv,
//	h(q) = (sinh(q/2)/(q/2))^(-1/2),
//
// and h is expanded: each power of v² is an incomplete normal moment, found by
// recursion from Mills' ratio.
func studentNear(q, df float64) float64 {
	rate := df - 0.5
	s := math.Sqrt(q)
	// moment is exp(rate·q/2)·√rate·∫_s^∞ v^(2j) exp(-rate·v²/2) dv.
	moment := math.Exp(LogMills(s * math.Sqrt(rate)))
	edge := s / math.Sqrt(rate)
	sum := 0.0
	for j, c := range studentSeries {
		term := c * moment
		sum += term
		if math.Abs(term) < 1e-18*sum {
			break
		}
		for n := 4*float64(j) + 1; n <= 4*float64(j)+3; n += 2 {
			moment = edge + n/rate*moment
			edge *= q
		}
	}
	return LogGammaRise(df/2, 0.5) - lnSqrtPi - 0.5*math.Log(rate) - 0.5*rate*q + math.Log(sum)
}

// LogStudentDensity returns the log of the density of Student's t at t.
func LogStudentDensity(t, df float64) float64 {
	switch {
	case !(df > 0) || math.IsNaN(t):
		return math.NaN()
	case math.IsInf(df, 1):
		return -0.5*t*t - lnSqrt2Pi
	}
	return LogGammaRise(df/2, 0.5) - lnSqrtPi - 0.5*math.Log(df) - 0.5*(df+1)*logOnePlusSquare(t, df)
}

// LogStudentBetween returns ln P(a < T < b) for a ≤ b, right in both far tails
// and for narrow intervals; -Inf when a = b, NaN when a > b.
func LogStudentBetween(a, b, df float64) float64 {
	switch {
	case !(a <= b) || !(df > 0):
		return math.NaN()
	case a == b:
		return math.Inf(-1)
	case math.IsInf(df, 1):
		return LogNormalBetween(a, b)
	case a >= 0:
		return logStudentAbove(a, b, df)
	case b <= 0:
		return logStudentAbove(-b, -a, df)
	}
	return math.Log(studentFromCentre(-a, df) + studentFromCentre(b, df))
}

// studentFromCentre returns P(0 < T < t), t ≥ 0.
func studentFromCentre(t, df float64) float64 {
	if t < 1 {
		return math.Exp(logStudentAbove(0, t, df))
	}
	return 0.5 - StudentTail(t, df)
}

// logStudentAbove is LogStudentBetween for 0 ≤ a < b.
func logStudentAbove(a, b, df float64) float64 {
	scale := min(1, math.Sqrt(df)/4)
	if w := b - a; w*max(1, a)/(1+a*a/df) < scale && w < scale*max(1, a) {
		front := logOnePlusSquare(a, df)
		sum := 0.0
		for i, u := range legendreNodes {
			sum += legendreWeights[i] * math.Exp(0.5*(df+1)*(front-logOnePlusSquare(a+w*u, df)))
		}
		return LogStudentDensity(a, df) + math.Log(w*sum)
	}
	top := LogStudentTail(a, df)
	if math.IsInf(b, 1) || math.IsInf(top, -1) {
		return top
	}
	return top + math.Log(-math.Expm1(LogStudentTail(b, df)-top))
}

// LogStudentStrip returns ln of the probability of a narrow strip of the given
// width round mid, for a width so small that the two ends as floating-point
// numbers would lose it: width·max(1, |mid|) ≤ 1e-4.
func LogStudentStrip(mid, width, df float64) float64 {
	if !(width > 0) || !(df > 0) {
		return math.NaN()
	}
	if math.IsInf(df, 1) {
		return LogNormalStrip(mid, width)
	}
	// The second-order term is width²/24 times the density's second derivative
	// over the density.
	r := mid / df
	u := 1 + mid*r
	slope := (df + 1) / df / u
	curve := slope*slope*mid*mid - slope*(1-2*mid*r/u)
	return math.Log(width) + LogStudentDensity(mid, df) + math.Log1p(width*width*curve/24)
}
