package layout

import (
	"fmt"
	"math"
)

// BenefitInput is what the chart of benefit, trivial effect and harm shows, as plain
// display data. Where PerThousand is set, effects are differences per 1000, below 0 for
// fewer; else they stand on the analysis scale.
type BenefitInput struct {
	Title, Subtitle string
	PerThousand     bool
	Scale           EffectScale
	Sides           Sides     // Lower and Higher stand under the line of no effect
	Zones           [2]string // names of what lies below and above the trivial zone
	Heads           [2]string // over the rail and over the last column, such as "Important benefit : trivial"
	Under           string    // under "Baseline risk": "without brindle"
	Rows            []BenefitRow
	Notes           []Note // after the notes that the chart writes itself
	Level           float64
}

// BenefitRow is one baseline.
type BenefitRow struct {
	Name, Below         string // "Low", "150 per 1000"
	Estimate, Low, High float64
	// From and To are the ends of the trivial zone; NaN where one is out of reach.
	From, To        float64
	Value, Interval string // as the words have them: "44 fewer", "21 to 62 fewer"
	// Benefit is ln of the evidence for an important benefit over a trivial effect, Harm
	// that for a trivial effect over an important harm; NaN where out of reach.
	Benefit, Harm float64
	Settings      string // "58% of settings"; blank where none are predicted
}

// validate refuses numbers that no axis can hold.
func (in *BenefitInput) validate() error {
	const chart = "benefit chart"
	c := checks{chart: chart, ratio: in.Scale.Ratio && !in.PerThousand}
	if len(in.Rows) == 0 {
		return fmt.Errorf("%s: there is no row with an important difference to draw", chart)
	}
	if err := c.frame(in.Scale, in.Level); err != nil {
		return err
	}
	for i, r := range in.Rows {
		where := fmt.Sprintf("row %d (%s)", i+1, Clean(joinName(r.Name, r.Below)))
		if err := c.result(where, r.Estimate, r.Low, r.High, 0); err != nil {
			return err
		}
		for _, v := range []float64{r.From, r.To} {
			if err := c.value(where+": threshold", v, false); err != nil && !math.IsNaN(v) {
				return err
			}
		}
		for _, ln := range []float64{r.Benefit, r.Harm} {
			if math.Abs(ln) > mostLnEvidence {
				return fmt.Errorf("%s: %s: ln of the evidence ratio is %v; it must be finite", chart, where, ln)
			}
		}
		if r.From >= in.null() || r.To <= in.null() {
			return fmt.Errorf("%s: %s: thresholds %v and %v must lie on both sides of no effect", chart, where, r.From, r.To)
		}
	}
	return nil
}

// null is the value of no effect as the axis has it.
func (in *BenefitInput) null() float64 {
	if in.PerThousand {
		return 0
	}
	return in.Scale.Null
}

// cleaned returns a copy whose texts may stand in a drawing.
func (in *BenefitInput) cleaned() BenefitInput {
	out := *in
	out.Title, out.Subtitle, out.Under = Clean(in.Title), Clean(in.Subtitle), Clean(in.Under)
	out.Scale, out.Sides, out.Notes = in.Scale.cleaned(), in.Sides.cleaned(), cleanNotes(in.Notes)
	out.Rows = make([]BenefitRow, len(in.Rows))
	for i, r := range in.Rows {
		r.Name, r.Below, r.Value, r.Interval, r.Settings = Clean(r.Name), Clean(r.Below), Clean(r.Value), Clean(r.Interval), Clean(r.Settings)
		out.Rows[i] = r
	}
	return out
}

// alike reports whether all rows have the same thresholds.
func (in *BenefitInput) alike() bool {
	const rounding = 1e-9 // of thresholds that went through the analysis scale
	same := func(a, b float64) bool {
		return math.Abs(a-b) <= rounding*math.Abs(a) || math.IsNaN(a) && math.IsNaN(b)
	}
	for _, r := range in.Rows {
		if !same(r.From, in.Rows[0].From) || !same(r.To, in.Rows[0].To) {
			return false
		}
	}
	return true
}
