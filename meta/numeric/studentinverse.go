package numeric

import "math"

// newtonEnough is the relative step of Newton's method after which the point
// reached is exact: the error is of the order of the step's square.
const newtonEnough = 1e-10

// StudentCritical returns the t whose two-sided tail is alpha: P(|T| > t) =
// alpha. df may be any positive number, +Inf means the normal law. NaN unless
// 0 ≤ alpha ≤ 1.
func StudentCritical(alpha, df float64) float64 {
	if !(alpha >= 0 && alpha <= 1) {
		return math.NaN()
	}
	return StudentFromLogTail(math.Log(alpha)-ln2, df)
}

// StudentFromLogTail returns the t with ln P(T > t) = lnTail, for any lnTail ≤ 0;
// +Inf where t is beyond the range of a float64, NaN if lnTail > 0.
func StudentFromLogTail(lnTail, df float64) float64 {
	switch {
	case !(lnTail <= 0) || !(df > 0):
		return math.NaN()
	case math.IsInf(df, 1):
		return NormalFromLogTail(lnTail)
	case lnTail > -ln2:
		return -StudentFromLogTail(otherTail(lnTail), df)
	case lnTail == -ln2:
		return 0
	case math.IsInf(lnTail, -1):
		return math.Inf(1)
	}
	s := studentInverse(lnTail, df)
	return math.Sqrt(df) * math.Sqrt(math.Expm1(s*s))
}

// studentInverse solves for s = √ln(1 + t²/df). On that scale the log of the
// tail is close to a normal one's: concave for df ≥ ½, so Newton's steps close
// in from one side; a bracket guards them elsewhere.
func studentInverse(lnTail, df float64) float64 {
	low, high := 0.0, math.Inf(1)
	s := NormalFromLogTail(lnTail) / math.Sqrt(max(df-0.5, 0.5*df))
	for range 200 {
		q := s * s
		lnNow := studentUpper(q, df)
		if lnNow > lnTail {
			low = s
		} else {
			high = s
		}
		step := (lnNow - lnTail) * math.Exp(lnNow-studentLogSlope(s, df))
		next := s + step
		if !(next >= low && next <= high) {
			if math.IsInf(high, 1) {
				next = 2 * s
			} else {
				next = 0.5 * (low + high)
			}
		}
		if math.Abs(next-s) <= newtonEnough*s {
			return next
		}
		s = next
	}
	return s
}

// studentLogSlope returns the log of -d/ds P(T > t) at s = √ln(1 + t²/df).
func studentLogSlope(s, df float64) float64 {
	half := 0.5 * s * s
	lnH := 0.0 // of (sinh(half)/half)^(-1/2)
	if half > 1e-4 {
		lnH = -0.5 * (half + math.Log(-math.Expm1(-2*half)/(2*half)))
	} else {
		lnH = -half * half / 12
	}
	return LogGammaRise(df/2, 0.5) - lnSqrtPi - (df-0.5)*half + lnH
}
