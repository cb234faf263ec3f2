package evidence

import "math"

// Jeffreys returns the category of Jeffreys for the strength of the evidence,
// whichever hypothesis it favours; the limits are half powers of ten.
//
// Source: Jeffreys (1961), Theory of Probability, 3rd ed., appendix B.
func Jeffreys(r Ratio) string {
	switch halves := math.Abs(r.ln) / (0.5 * math.Ln10); {
	case math.IsNaN(halves):
		return ""
	case halves >= 4:
		return "decisive"
	case halves >= 3:
		return "very strong"
	case halves >= 2:
		return "strong"
	case halves >= 1:
		return "substantial"
	}
	return "not worth more than a bare mention"
}

// KassRaftery returns the category of Kass and Raftery for the strength of the
// evidence, whichever hypothesis it favours; the limits are ratios of 3, 20 and
// 150.
//
// Source: Kass & Raftery (1995), Journal of the American Statistical Association
// 90:773-795, section 3.2.
func KassRaftery(r Ratio) string {
	switch ln := math.Abs(r.ln); {
	case math.IsNaN(ln):
		return ""
	case ln >= math.Log(150):
		return "very strong"
	case ln >= math.Log(20):
		return "strong"
	case ln >= math.Log(3):
		return "positive"
	}
	return "not worth more than a bare mention"
}
