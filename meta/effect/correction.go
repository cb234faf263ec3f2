package effect

import "steelyard/meta/choice"

// Correction is what is added to the cells of a 2×2 table whose zero cells
// leave an estimate or its variance undefined.
type Correction int

// The corrections. With n₁ and n₂ the totals of the treated and the control arm:
//
//   - Half adds 0.5 to all four cells;
//   - TreatmentArm adds n₁/(n₁+n₂) to both cells of the treated arm and
//     n₂/(n₁+n₂) to both of the control arm: proportional to the reciprocal of
//     the other arm's size, and 1 in sum, so that equal arms get Half;
//   - NoCorrection adds nothing: a table that needs a correction is refused.
//
// Source: Sweeting, Sutton & Lambert (2004), Statistics in Medicine
// 23:1351-1375 (from memory), who name TreatmentArm by the reciprocal of the
// other arm's size.
const (
	Half Correction = iota
	TreatmentArm
	NoCorrection
)

var correctionNames = choice.Of[Correction]("zero-cell correction", "half", "treatment-arm", "none").
	With(map[string]Correction{"reciprocal": TreatmentArm})

// String returns the correction's name, such as "treatment-arm".
func (c Correction) String() string { return correctionNames.String(c) }

// CorrectionNames returns the names of all corrections.
func CorrectionNames() []string { return correctionNames.All() }

// ParseCorrection returns the correction that text names.
func ParseCorrection(text string) (Correction, error) { return correctionNames.Parse(text) }

// MarshalText writes the correction's name.
func (c Correction) MarshalText() ([]byte, error) { return []byte(c.String()), nil }

// UnmarshalText reads a correction's name.
func (c *Correction) UnmarshalText(text []byte) (err error) {
	*c, err = ParseCorrection(string(text))
	return err
}

// uncorrected is the error of a table that needs a correction and gets none.
func uncorrected(culprit Value) error {
	return &InputError{What: culprit.Name, Value: culprit.Value,
		Why: "leaves the estimate or its standard error undefined without a zero-cell correction",
		Do:  "choose the correction half or treatment-arm, or a method that needs none"}
}

// apply returns the cells of a table with the correction added, and the record
// of it.
func (c Correction) apply(t Table) (cells, Conversion, error) {
	var k1, k2 float64
	source := "Sweeting, Sutton & Lambert 2004"
	switch c {
	case Half:
		k1, k2, source = 0.5, 0.5, "Cochrane Handbook 10.4.4.2"
	case TreatmentArm:
		n := t.Total1 + t.Total2
		k1, k2 = t.Total1/n, t.Total2/n
	default:
		_, err := ParseCorrection(c.String())
		return cells{}, Conversion{}, err
	}
	x := t.cells()
	return cells{a: x.a + k1, b: x.b + k1, c: x.c + k2, d: x.d + k2}, Conversion{
		What:   "zero-cell correction " + c.String() + ", added to events and to non-events",
		From:   t.values(),
		To:     []Value{{"added treated", k1}, {"added control", k2}},
		Source: source,
		Added:  true,
	}, nil
}
