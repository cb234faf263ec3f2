package collection

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"

	"steelyard/meta/evidence"
	"steelyard/meta/numeric"
)

// Fewest is the number of sets below which the spread of their statistics says too
// little of how many have an effect.
const Fewest = 200

// binWidth, furthest and terms make the histogram of the statistics and the curve
// through it: bins of that width between ±furthest, or to the statistics' own ends,
// and a polynomial of that many terms in the log of the density.
const (
	binWidth = 0.1
	furthest = 8
	terms    = 12
)

// TwoGroups is a collection of normal statistics z seen as a mixture of sets without
// an effect, whose z is standard normal, and sets with one:
//
//	f(z) = π₀φ(z) + (1 − π₀)f₁(z).
//
// Source: Efron (2010), Large-Scale Inference, chapters 2 and 5.
type TwoGroups struct {
	None float64 // π₀, the share of sets without an effect; at most 1

	low, high float64   // within which f is followed; beyond, it is taken at the end
	curve     []float64 // ln f, by powers of the scaled z
}

// TooFewError says that a collection is too small to be its own yardstick.
type TooFewError struct{ Sets int }

func (e *TooFewError) Error() string {
	return fmt.Sprintf("%d sets are too few to be weighed against the whole collection: it takes %d", e.Sets, Fewest)
}

// NewTwoGroups fits the mixture to the statistics. π₀ is the share of |z| below its
// median under no effect, doubled. ln f is a polynomial fitted to the histogram by
// Poisson regression (Lindsey's method). It returns a *TooFewError for fewer than
// Fewest sets.
func NewTwoGroups(z []float64) (*TwoGroups, error) {
	if len(z) < Fewest {
		return nil, &TooFewError{len(z)}
	}
	middle := numeric.NormalFromLogTail(math.Log(0.25)) // half of all |z| without an effect are below
	inner, low, high := 0, 0.0, 0.0
	for _, x := range z {
		if math.Abs(x) <= middle {
			inner++
		}
		low, high = min(low, x), max(high, x)
	}
	g := &TwoGroups{None: min(1, 2*float64(inner)/float64(len(z)))}
	g.low, g.high = max(low, -furthest), min(high, furthest)
	bins := max(terms+2, int(math.Ceil((g.high-g.low)/binWidth)))
	width := (g.high - g.low) / float64(bins)
	if !(width > 0) {
		return nil, fmt.Errorf("all statistics are equal, so that the collection says nothing of the share with an effect")
	}
	counts := make([]float64, bins)
	for _, x := range z {
		counts[min(bins-1, max(0, int((x-g.low)/width)))]++
	}
	return g, g.fit(counts, width, float64(len(z)))
}

// scaled puts a z on −1 to 1.
func (g *TwoGroups) scaled(z float64) float64 {
	return 2*(min(g.high, max(g.low, z))-g.low)/(g.high-g.low) - 1
}

// fit finds ln f by Newton's steps on the Poisson likelihood of the counts, which is
// concave; steps that overshoot are halved.
func (g *TwoGroups) fit(counts []float64, width, n float64) error {
	design := mat.NewDense(len(counts), terms, nil)
	for i := range counts {
		legendre(g.scaled(g.low+(float64(i)+0.5)*width), design.RawRowView(i))
	}
	beta := make([]float64, terms)
	beta[0] = math.Log(n / float64(len(counts)))
	height := likelihood(design, counts, beta)
	for range 100 {
		step, err := newton(design, counts, beta)
		if err != nil {
			return err
		}
		next, share := make([]float64, terms), 1.0
		better := math.Inf(-1)
		for ; share > 1e-6; share /= 2 {
			for j := range next {
				next[j] = beta[j] + share*step[j]
			}
			if better = likelihood(design, counts, next); better >= height {
				break
			}
		}
		done := better-height <= 1e-9*n
		if better >= height {
			beta, height = next, better
		}
		if done {
			beta[0] -= math.Log(n * width) // from counts to a density
			g.curve = beta
			return nil
		}
	}
	return fmt.Errorf("density of the statistics: %w", numeric.ErrNotConverged)
}

// legendre fills in the Legendre polynomials at x.
func legendre(x float64, into []float64) {
	into[0], into[1] = 1, x
	for j := 2; j < len(into); j++ {
		n := float64(j)
		into[j] = ((2*n-1)*x*into[j-1] - (n-1)*into[j-2]) / n
	}
}

// likelihood returns the Poisson log-likelihood of the counts, up to a constant.
func likelihood(design *mat.Dense, counts, beta []float64) float64 {
	var sum numeric.Sum
	for i, count := range counts {
		eta := dot(design.RawRowView(i), beta)
		sum.Add(count*eta - math.Exp(eta))
	}
	return sum.Value()
}

func dot(a, b []float64) float64 {
	sum := 0.0
	for i, x := range a {
		sum += x * b[i]
	}
	return sum
}

// newton returns Newton's step of the Poisson regression.
func newton(design *mat.Dense, counts, beta []float64) ([]float64, error) {
	information := mat.NewSymDense(terms, nil)
	score := mat.NewVecDense(terms, nil)
	for i, count := range counts {
		row := design.RawRowView(i)
		expected := math.Exp(dot(row, beta))
		for a := range terms {
			score.SetVec(a, score.AtVec(a)+row[a]*(count-expected))
			for b := a; b < terms; b++ {
				information.SetSym(a, b, information.At(a, b)+row[a]*row[b]*expected)
			}
		}
	}
	var chol mat.Cholesky
	if !chol.Factorize(information) {
		return nil, fmt.Errorf("the statistics lie on too few places for a curve through them")
	}
	step := mat.NewVecDense(terms, nil)
	if err := chol.SolveVecTo(step, score); err != nil {
		return nil, fmt.Errorf("density of the statistics: %w", err)
	}
	return step.RawVector().Data, nil
}

// LocalRate returns the share of sets without an effect among those with about this
// z: the local rate of false discoveries π₀φ(z)/f(z), at most 1. Beyond ±8, and
// beyond the collection's own ends, it is that at the end.
func (g *TwoGroups) LocalRate(z float64) float64 { return min(1, math.Exp(g.lnRate(z))) }

// lnRate returns ln(π₀φ(z)/f(z)), which may exceed 0 where the curve errs.
func (g *TwoGroups) lnRate(z float64) float64 {
	z = min(g.high, max(g.low, z))
	var basis [terms]float64
	legendre(g.scaled(z), basis[:])
	return math.Log(g.None) - 0.5*z*z - 0.5*math.Log(2*math.Pi) - dot(basis[:], g.curve)
}

// Evidence returns the evidence for an effect of a set with statistic z under the
// mixture: f₁(z)/φ(z), the odds that LocalRate leaves over those before the set was
// seen. ok is false where the collection shows no set with an effect (π₀ = 1) or the
// density leaves none there.
func (g *TwoGroups) Evidence(z float64) (ratio evidence.Ratio, ok bool) {
	lnRate := g.lnRate(z)
	if !(g.None < 1) || !(g.None > 0) || lnRate >= 0 {
		return ratio, false
	}
	// (1 − rate)/rate over (1 − π₀)/π₀.
	odds := math.Log(-math.Expm1(lnRate)) - lnRate
	return evidence.FromLn(odds - math.Log1p(-g.None) + math.Log(g.None)), true
}
