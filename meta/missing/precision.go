package missing

import (
	"math"

	"steelyard/meta"
)

// Precision is the estimate of PET–PEESE with both of its lines.
type Precision struct {
	PET, PEESE meta.Mean // effect of a study without error, by either line
	Slope      meta.Mean // of the PET line
	Square     bool      // PEESE is taken: PET shows an effect
}

// petLevel is the one-sided level at which PET is said to show an effect.
const petLevel = 0.05

// Adjusted returns the estimate that the choice between the lines leaves.
func (p *Precision) Adjusted() meta.Mean {
	if p.Square {
		return p.PEESE
	}
	return p.PET
}

// PETPEESE returns the effect at a standard error of 0 by the line in the standard
// error (PET), and by the line in its square (PEESE), both with weights 1/s² and
// residual variances in proportion. PEESE is taken if PET's test of that effect
// passes the 5% level on the side on which the effects lie on average, else PET.
//
// Source: Stanley & Doucouliagos (2014), Research Synthesis Methods 5:60-78.
func PETPEESE(m meta.Model, y, s []float64) (*Precision, error) {
	pet, err := Egger(m, y, s)
	if err != nil {
		return nil, err
	}
	squares := make([]float64, len(s))
	for i, x := range s {
		squares[i] = x * x
	}
	w := reciprocalSquares(s)
	peese, err := multiplicative(m, PrecisionEffect, y, squares, w)
	if err != nil {
		return nil, err
	}
	best := heaviest(w)
	_, _, mean := weightedMeans(y, s, w, y[best], s[best])
	p := &Precision{PET: pet.Limit, PEESE: peese.Limit, Slope: pet.Slope}
	sameSide := (mean-m.Null)*pet.Limit.Statistic > 0
	p.Square = sameSide && pet.Limit.LnP-math.Ln2 < math.Log(petLevel)
	return p, nil
}
