package layout

import (
	"fmt"
	"math"
	"slices"
)

// LeaveOneOutInput is what a leave-one-out chart shows, as plain display data.
// Estimates and limits stand on the analysis scale: natural logs for ratio
// measures.
type LeaveOneOutInput struct {
	Title, Subtitle string
	Study           string // what a row is called: "trial" or "study"; empty is "study"
	Scale           EffectScale
	Sides           Sides    // Lower and Higher stand under the line of no effect
	All             Omission // the result of all studies, its name unused
	Rows            []Omission
	Below           float64 // evidence in steps whose crossing the notes tell; NaN is the last whole step under that of all studies, or even odds
	Notes           []Note  // after the notes that the chart writes itself
	Level           float64 // of all intervals, such as 0.95
}

// Omission is the result without one study.
type Omission struct {
	Name, Year          string  // of the study that is left out
	Estimate, Low, High float64 // analysis scale
	Tau                 float64 // spread between the other studies; below 0 where the model has none
	LnEvidence          float64 // ln of the evidence ratio, effect over none
	Problem             string  // why there is no result; then the numbers are not used
}

func (in *LeaveOneOutInput) validate() error {
	c := checks{chart: "leave-one-out chart", ratio: in.Scale.Ratio}
	if len(in.Rows) < 2 {
		return fmt.Errorf("leave-one-out chart: %d %s; without one of them nothing would be left, so give at least 2", len(in.Rows), in.plural(len(in.Rows)))
	}
	if err := c.frame(in.Scale, in.Level); err != nil {
		return err
	}
	check := func(where string, o Omission) error {
		if err := c.result(where, o.Estimate, o.Low, o.High, o.LnEvidence); err != nil {
			return err
		}
		if !(math.Abs(o.Tau) <= mostDifference) {
			return fmt.Errorf("leave-one-out chart: %s: spread between %s of %v; it must be finite", where, in.plural(2), o.Tau)
		}
		return nil
	}
	if err := check("all "+in.plural(2), in.All); err != nil {
		return err
	}
	for i, o := range in.Rows {
		if o.Problem != "" {
			continue
		}
		if err := check(fmt.Sprintf("row %d (without %s)", i+1, Clean(o.Name)), o); err != nil {
			return err
		}
	}
	if math.Abs(in.Below) > mostLnEvidence {
		return fmt.Errorf("leave-one-out chart: evidence below %v steps cannot be told; give a number of steps", in.Below)
	}
	return nil
}

// cleaned returns a copy whose texts may stand in a drawing, with the rows
// sorted by what each study carries, the largest first and rows without a result
// last.
func (in *LeaveOneOutInput) cleaned() LeaveOneOutInput {
	out := *in
	out.Title, out.Subtitle, out.Study = Clean(in.Title), Clean(in.Subtitle), Clean(in.Study)
	out.Scale, out.Sides, out.Notes = in.Scale.cleaned(), in.Sides.cleaned(), cleanNotes(in.Notes)
	if math.IsNaN(out.Below) {
		out.Below = math.Max(0, math.Floor(in.All.LnEvidence/lnStep))
	}
	out.Rows = make([]Omission, len(in.Rows))
	for i, o := range in.Rows {
		o.Name, o.Year, o.Problem = Clean(o.Name), Clean(o.Year), Clean(o.Problem)
		out.Rows[i] = o
	}
	slices.SortStableFunc(out.Rows, func(a, b Omission) int {
		switch {
		case a.Problem != b.Problem && a.Problem == "":
			return -1
		case a.Problem != b.Problem && b.Problem == "":
			return 1
		case a.LnEvidence < b.LnEvidence:
			return -1
		case a.LnEvidence > b.LnEvidence:
			return 1
		}
		return 0
	})
	return out
}

// carried is how many steps of evidence a study carries.
func (in *LeaveOneOutInput) carried(o Omission) float64 {
	return (in.All.LnEvidence - o.LnEvidence) / lnStep
}

func (in *LeaveOneOutInput) plural(n int) string { return noun(in.Study, n) }
