package effect

// EffectiveTable is a 2×2 table of effective counts: real counts divided by a
// design effect, or a control arm shared out among comparisons. They need not be
// whole. Only the functions that adjust counts make one, and Adjusted for a reviewer
// who says so, so that a fraction typed in a sheet is still refused by Table.Check.
type EffectiveTable struct{ counts Table }

// Adjusted returns effective counts that the reviewer has adjusted already, such as
// for clusters, and vouches for. It returns an *InputError unless they are finite
// and 0 ≤ events ≤ total, total > 0 in both arms.
func Adjusted(t Table) (EffectiveTable, error) {
	e := EffectiveTable{t}
	if err := e.check(); err != nil {
		return EffectiveTable{}, err
	}
	return e, nil
}

// Counts returns the effective counts.
func (t EffectiveTable) Counts() Table { return t.counts }

// check returns an *InputError for the zero value, which nothing made.
func (t EffectiveTable) check() error {
	for _, v := range t.counts.values() {
		if err := checkAmount(v.Name, v.Value); err != nil {
			return err
		}
	}
	return t.counts.checkArms()
}

// FromEffectiveTable is FromTable for effective counts; it returns the same
// errors, except that the counts need not be whole.
func FromEffectiveTable(m Measure, t EffectiveTable, c Correction) (Estimate, []Conversion, error) {
	if err := m.checkTable(); err != nil {
		return Estimate{}, nil, err
	}
	if err := t.check(); err != nil {
		return Estimate{}, nil, err
	}
	return fromTable(m, t.counts, c)
}

// PetoEffective is Peto for effective counts, which must be of more than one
// person in all; otherwise it returns an *InputError.
func PetoEffective(t EffectiveTable) (observedMinusExpected, variance float64, err error) {
	if err := t.check(); err != nil {
		return 0, 0, err
	}
	if n := t.counts.Total1 + t.counts.Total2; !(n > 1) {
		return 0, 0, &InputError{What: "total", Value: n, Why: "of both arms is not above 1 after the adjustment", Do: "check the design effect"}
	}
	return peto(t.counts)
}

// FromPetoEffective is FromPeto for effective counts; see PetoEffective.
func FromPetoEffective(t EffectiveTable) (Estimate, []Conversion, error) {
	difference, variance, err := PetoEffective(t)
	if err != nil {
		return Estimate{}, nil, err
	}
	return fromPeto(t.counts, difference, variance)
}
