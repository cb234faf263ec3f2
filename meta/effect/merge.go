package effect

import (
	"fmt"
	"math"

	"steelyard/meta/numeric"
)

// Counts are people with the event and people in all, in one arm.
type Counts struct{ Events, Total float64 }

// Check returns an *InputError unless both counts are finite and whole,
// 0 ≤ events ≤ total and total > 0.
func (c Counts) Check() error { return c.check("") }

func (c Counts) check(arm string) error {
	if err := checkCount(named("events", arm), c.Events); err != nil {
		return err
	}
	if err := checkCount(named("total", arm), c.Total); err != nil {
		return err
	}
	return checkEvents(arm, c.Events, c.Total)
}

// numbered is how the i-th of several arms is called in a message.
func numbered(i int) string { return fmt.Sprintf("arm %d", i+1) }

func checkSeveral(n int) error {
	if n > 0 {
		return nil
	}
	return &InputError{What: "arms", Value: 0, Why: "to merge are none", Do: "give the arms that belong together"}
}

// MergeCounts adds up the events and the totals of arms, as where two doses are
// compared with one control. It returns an *InputError for no arm, for one that
// fails Check and for a total too large.
//
// Source: Cochrane Handbook 6.2.9, 23.3.4.
func MergeCounts(arms ...Counts) (Counts, Conversion, error) {
	if err := checkSeveral(len(arms)); err != nil {
		return Counts{}, Conversion{}, err
	}
	var out Counts
	from := make([]Value, 0, 2*len(arms))
	for i, a := range arms {
		if err := a.check(numbered(i)); err != nil {
			return Counts{}, Conversion{}, err
		}
		out.Events += a.Events
		out.Total += a.Total
		from = append(from, Value{named("events", numbered(i)), a.Events}, Value{named("total", numbered(i)), a.Total})
	}
	if err := out.Check(); err != nil {
		return Counts{}, Conversion{}, err
	}
	return out, Conversion{
		What: "arms merged: events and totals added up", From: from,
		To: []Value{{"events", out.Events}, {"total", out.Total}}, Source: "Cochrane Handbook 6.2.9",
	}, nil
}

// MergeArms returns the mean, the standard deviation and the number of people of
// several arms as if they had been one, with M the mean weighted by people:
//
//	SD² = [Σ(nᵢ−1)SDᵢ² + Σnᵢ(mᵢ−M)²] / (Σnᵢ − 1)
//
// which is that of the raw data of all. It returns an *InputError for no arm,
// for one that fails Check and for a result outside the range of numbers.
//
// Source: Cochrane Handbook 6.5.2.10.
func MergeArms(arms ...Arm) (Arm, Conversion, error) {
	if err := checkSeveral(len(arms)); err != nil {
		return Arm{}, Conversion{}, err
	}
	var people, shift, squares numeric.Sum
	from := make([]Value, 0, 3*len(arms))
	for i, a := range arms {
		arm := numbered(i)
		if err := a.check(arm); err != nil {
			return Arm{}, Conversion{}, err
		}
		people.Add(a.N)
		shift.Add(a.N * (a.Mean - arms[0].Mean))
		from = append(from, Value{named("mean", arm), a.Mean}, Value{named("sd", arm), a.SD}, Value{named("total", arm), a.N})
	}
	n := people.Value()
	offset := shift.Value() / n
	for _, a := range arms {
		squares.Add((a.N - 1) * a.SD * a.SD)
		d := (a.Mean - arms[0].Mean) - offset
		squares.Add(a.N * d * d)
	}
	out := Arm{Mean: arms[0].Mean + offset, SD: math.Sqrt(squares.Value() / (n - 1)), N: n}
	if err := out.Check(); err != nil {
		return Arm{}, Conversion{}, err
	}
	return out, Conversion{
		What: "arms merged: mean and standard deviation of all people", From: from,
		To: []Value{{"mean", out.Mean}, {"sd", out.SD}, {"total", out.N}}, Source: "Cochrane Handbook 6.5.2.10",
	}, nil
}

// SplitControl divides the control arm of a table among a number of comparisons
// that share it, so that nobody counts twice: events and total over parts. It
// returns an *InputError for a table that fails Check and for fewer than one
// part.
//
// Source: Cochrane Handbook 23.3.4.
func SplitControl(t Table, parts int) (EffectiveTable, Conversion, error) {
	if err := t.Check(); err != nil {
		return EffectiveTable{}, Conversion{}, err
	}
	if err := checkParts(parts); err != nil {
		return EffectiveTable{}, Conversion{}, err
	}
	k := float64(parts)
	out := Table{Events1: t.Events1, Total1: t.Total1, Events2: t.Events2 / k, Total2: t.Total2 / k}
	return EffectiveTable{out}, Conversion{
		What: "shared control arm divided among its comparisons",
		From: []Value{{"events control", t.Events2}, {"total control", t.Total2}, {"comparisons", k}},
		To:   []Value{{"events control", out.Events2}, {"total control", out.Total2}}, Source: "Cochrane Handbook 23.3.4",
	}, nil
}

// SplitArm divides the people of an arm with a mean among a number of
// comparisons that share it; mean and standard deviation stay. It returns an
// *InputError for an arm that fails Check, for fewer than one part, and where
// fewer than two people would be left to each.
//
// Source: Cochrane Handbook 23.3.4.
func SplitArm(a Arm, parts int) (Arm, Conversion, error) {
	if err := a.Check(); err != nil {
		return Arm{}, Conversion{}, err
	}
	if err := checkParts(parts); err != nil {
		return Arm{}, Conversion{}, err
	}
	out := Arm{Mean: a.Mean, SD: a.SD, N: a.N / float64(parts)}
	if out.N < 2 {
		return Arm{}, Conversion{}, &InputError{What: "total", Value: out.N, Why: "is below 2 after the arm is divided", Do: "merge the other arms instead"}
	}
	return out, Conversion{
		What: "shared arm divided among its comparisons",
		From: []Value{{"total", a.N}, {"comparisons", float64(parts)}},
		To:   []Value{{"total", out.N}}, Source: "Cochrane Handbook 23.3.4",
	}, nil
}

func checkParts(parts int) error {
	if parts >= 1 {
		return nil
	}
	return &InputError{What: "comparisons", Value: float64(parts), Why: "are below 1", Do: "enter among how many comparisons the arm is shared"}
}
