package effect

import (
	"math"

	"steelyard/meta/numeric"
)

// Signed is a study known by its p-value alone: the z of it, above 0 if the
// effect lies higher, and the number of people.
type Signed struct{ Z, N float64 }

// Combined is what several such studies say together: z, above 0 if their effect
// lies higher, and the natural logarithm of the two-sided p-value.
type Combined struct{ Z, LnP float64 }

// SignedZ returns the z of an exact two-sided p-value, with the sign of the
// effect's direction. It returns an *InputError unless 0 < p ≤ 1 and the
// direction is known.
func SignedZ(p float64, d Direction) (float64, Conversion, error) {
	if p != 1 {
		if err := checkP(p, "two-sided"); err != nil {
			return 0, Conversion{}, err
		}
	}
	if err := d.check(); err != nil {
		return 0, Conversion{}, err
	}
	z := d.Sign() * numeric.NormalCritical(p)
	return z, Conversion{
		What: "z from a two-sided p-value, direction " + d.String(),
		From: []Value{{"p", p}}, To: []Value{{"z", z}}, Source: "standard normal law",
	}, nil
}

// SignedZOneSided returns the z of an exact one-sided p-value of the test for an
// effect in the direction tested; it points the other way if p is above ½. It
// returns an *InputError unless 0 < p < 1 and the direction is known.
func SignedZOneSided(p float64, tested Direction) (float64, Conversion, error) {
	if err := checkP(p, "one-sided"); err != nil {
		return 0, Conversion{}, err
	}
	if err := tested.check(); err != nil {
		return 0, Conversion{}, err
	}
	z := tested.Sign() * numeric.NormalFromLogTail(math.Log(p))
	return z, Conversion{
		What: "z from a one-sided p-value, tested for " + tested.String(),
		From: []Value{{"p", p}}, To: []Value{{"z", z}}, Source: "standard normal law",
	}, nil
}

// Stouffer combines studies known by their p-values, each weighted by the square
// root of its number of people: z = Σ√nᵢ·zᵢ / √Σnᵢ. The tail is carried as a
// logarithm and does not underflow. It returns an *InputError for no study and
// unless every z is finite and every n finite and above 0.
//
// Source: Stouffer et al. (1949), The American Soldier, volume 1; Lipták (1958)
// for the weights.
func Stouffer(studies []Signed) (Combined, Conversion, error) {
	if err := checkSigned(studies); err != nil {
		return Combined{}, Conversion{}, err
	}
	var sum, people numeric.Sum
	for _, s := range studies {
		sum.Add(math.Sqrt(s.N) * s.Z)
		people.Add(s.N)
	}
	z := sum.Value() / math.Sqrt(people.Value())
	return combined("z values combined by Stouffer's method, weighted by √n", studies,
		Combined{Z: z, LnP: twoSided(numeric.LogNormalTail(math.Abs(z)))}, "Stouffer et al. 1949")
}

// Fisher combines studies known by their p-values whatever their size. For each
// direction the one-sided p-values give −2Σ ln pᵢ, chi-square on 2k degrees of
// freedom under no effect; the smaller of the two tails, doubled, is the
// two-sided p-value, at most 1, and z is the normal one that has it, with the
// sign of that direction (above 0 if the tails are equal: studies that
// contradict each other strongly give a small p-value and no direction). It
// returns an *InputError as Stouffer does.
//
// Source: Fisher (1932), Statistical Methods for Research Workers, 4th edition;
// Owen (2009), Annals of Statistics 37:3867-3892 (both directions).
func Fisher(studies []Signed) (Combined, Conversion, error) {
	if err := checkSigned(studies); err != nil {
		return Combined{}, Conversion{}, err
	}
	var higher, lower numeric.Sum
	for _, s := range studies {
		higher.Add(-2 * numeric.LogNormalTail(s.Z))
		lower.Add(-2 * numeric.LogNormalTail(-s.Z))
	}
	df := float64(2 * len(studies))
	tail, sign := numeric.LogChiSquareTail(higher.Value(), df), 1.0
	if other := numeric.LogChiSquareTail(lower.Value(), df); other < tail {
		tail, sign = other, -1
	}
	lnP := twoSided(tail)
	z := sign * numeric.NormalFromLogTail(lnP-math.Ln2)
	return combined("p-values combined by Fisher's method in both directions", studies, Combined{Z: z, LnP: lnP}, "Fisher 1932; Owen 2009")
}

// twoSided doubles a tail given as a logarithm, to 1 at most.
func twoSided(lnTail float64) float64 { return math.Min(0, lnTail+math.Ln2) }

func checkSigned(studies []Signed) error {
	if len(studies) == 0 {
		return &InputError{What: "studies", Value: 0, Why: "to combine are none", Do: "give p, direction and total of at least one"}
	}
	for _, s := range studies {
		if err := checkFinite("z", s.Z); err != nil {
			return err
		}
		if err := checkPositive("total", s.N, "enter how many people the p-value is of"); err != nil {
			return err
		}
	}
	return nil
}

func combined(what string, studies []Signed, c Combined, source string) (Combined, Conversion, error) {
	for _, v := range []Value{{"z", c.Z}, {"ln p", c.LnP}} {
		if !finite(v.Value) {
			return Combined{}, Conversion{}, &InputError{What: v.Name, Value: v.Value, Why: "is too large to compute with", Do: "check z and total of every study"}
		}
	}
	from := make([]Value, 0, 2*len(studies))
	for _, s := range studies {
		from = append(from, Value{"z", s.Z}, Value{"total", s.N})
	}
	return c, Conversion{What: what, From: from, To: []Value{{"z", c.Z}, {"ln p", c.LnP}}, Source: source}, nil
}
