package numeric

import "math"

// gammaLargeFrom is the shape from which the incomplete gamma function is the
// normal law with two corrections; the next is of relative size 1/shape².
const gammaLargeFrom = 1e6

// logGammaLarge returns the logs of both tails for a large shape a. With z the
// signed root of twice the deviance and η = z/√a,
//
//	P(X > x) = Φ(-z) + φ(z)/√a·(c₀(η) + c₁(η)/a)
//
// Source: Temme (1979), SIAM Journal on Mathematical Analysis 10:757-766.
func logGammaLarge(x, shape float64) (upper, lower float64) {
	mu := (x - shape) / shape
	eta := math.Copysign(math.Sqrt(2*lessLog1p(mu)), mu)
	z := eta * math.Sqrt(shape)
	if math.IsInf(z, 0) {
		return min(0, -z), min(0, z)
	}
	size := math.Abs(z)
	fix := math.Log(eta / mu) // where Mills' ratio is 1/z
	if size < 1e4 {
		c := temmeFirst(eta, mu) + temmeSecond(eta, mu)/shape
		fix = math.Log1p(math.Copysign(c, c*z) / math.Sqrt(shape) / math.Exp(LogMills(size)))
	}
	near := LogNormalTail(size) + fix
	far := math.Log1p(-math.Exp(near))
	if z < 0 {
		return far, near
	}
	return near, far
}

// temmeFirst returns c₀ = 1/μ - 1/η, near 0 by its series.
func temmeFirst(eta, mu float64) float64 {
	if math.Abs(eta) < 0.01 {
		return -1./3 + eta*(1./12+eta*(-2./135+eta*(1./864+eta*(1./2835))))
	}
	return 1/mu - 1/eta
}

// temmeSecond returns c₁ = 1/η³ - 1/μ³ - 1/μ² - 1/(12μ), near 0 by its series.
func temmeSecond(eta, mu float64) float64 {
	if math.Abs(eta) < 0.01 {
		return -1./540 + eta*(-1./288+eta*(1./378))
	}
	return 1/(eta*eta*eta) - 1/(mu*mu*mu) - 1/(mu*mu) - 1/(12*mu)
}
