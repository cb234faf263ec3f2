package layout

import (
	"cmp"
	"fmt"
	"math"
	"slices"
)

// InfluenceInput is what a chart of influence shows, as plain display data.
// Estimates and limits stand on the analysis scale: natural logs for ratio
// measures.
type InfluenceInput struct {
	Title, Subtitle string
	Study           string // what a row is called: "trial" or "study"; empty is "study"
	Scale           EffectScale
	Sides           Sides // Lower and Higher stand under the zero lines of pull and distance
	Rows            []InfluenceRow
	Pooled          ForestPooled // of all rows; Unwanted and Totals are not used
	ByPull          bool         // rows by the size of their pull, largest first; else as given
	Notes           []Note       // after the notes on the columns, which the chart writes itself
	Level           float64      // of the pooled interval, such as 0.95
}

// InfluenceRow says what one study does to the pooled result.
type InfluenceRow struct {
	Name, Year string           // shown as "Name Year"; either may be empty
	Dagger     bool             // marked †, explained in a note
	Pull       float64          // (estimate − estimate without it) / standard error without it
	Carried    float64          // steps of evidence with all studies less those without it
	Weights    *InfluenceWeight // nil where the method gives studies no weights
	Problem    string           // why there is no result without it; then no number is used
}

// InfluenceWeight holds what rests on the weights of a method.
type InfluenceWeight struct {
	Residual float64 // studentised deleted residual
	Leverage float64 // share of the pooled estimate, 0 to 1
}

// mostInfluence bounds pulls, residuals and steps; beyond it no digit matters.
const mostInfluence = 1e12

func (in *InfluenceInput) validate() error {
	c := checks{chart: "influence chart", ratio: in.Scale.Ratio}
	if len(in.Rows) < 2 {
		return fmt.Errorf("influence chart: %d %s; it takes 2 to leave one out", len(in.Rows), noun(in.Study, len(in.Rows)))
	}
	if err := c.frame(in.Scale, in.Level); err != nil {
		return err
	}
	p := in.Pooled
	if err := c.result("pooled result", p.Estimate, p.Low, p.High, p.LnEvidence); err != nil {
		return err
	}
	for i, r := range in.Rows {
		if err := r.validate(); err != nil {
			return fmt.Errorf("influence chart: row %d (%s): %w", i+1, Clean(r.Name), err)
		}
	}
	return nil
}

func (r InfluenceRow) validate() error {
	if r.Problem != "" {
		return nil
	}
	values := map[string]float64{"pull": r.Pull, "evidence carried": r.Carried}
	if r.Weights != nil {
		values["residual"] = r.Weights.Residual
		if h := r.Weights.Leverage; !(0 <= h && h <= 1) {
			return fmt.Errorf("leverage %v must lie from 0 to 1", h)
		}
	}
	for _, what := range []string{"pull", "evidence carried", "residual"} {
		if v := values[what]; !(math.Abs(v) <= mostInfluence) {
			return fmt.Errorf("%s of %v is beyond what an axis can show (±%v); leave the row out or check its standard error", what, v, mostInfluence)
		}
	}
	return nil
}

// cleaned returns a copy whose texts may stand in a drawing, rows in the order
// in which they are drawn.
func (in *InfluenceInput) cleaned() InfluenceInput {
	out := *in
	out.Title, out.Subtitle, out.Study = Clean(in.Title), Clean(in.Subtitle), Clean(in.Study)
	out.Scale, out.Sides, out.Notes = in.Scale.cleaned(), in.Sides.cleaned(), cleanNotes(in.Notes)
	out.Rows = make([]InfluenceRow, len(in.Rows))
	for i, r := range in.Rows {
		r.Name, r.Year, r.Problem = Clean(r.Name), Clean(r.Year), Clean(r.Problem)
		if in.Rows[i].Problem != "" {
			r.Pull, r.Carried, r.Weights = 0, 0, nil
			if r.Problem == "" {
				r.Problem = "no result"
			}
		}
		out.Rows[i] = r
	}
	if in.ByPull {
		slices.SortStableFunc(out.Rows, func(a, b InfluenceRow) int {
			return cmp.Compare(math.Abs(b.Pull), math.Abs(a.Pull))
		})
	}
	return out
}

func (in *InfluenceInput) plural(n int) string { return noun(in.Study, n) }

// weighted reports whether any row has weights.
func (in *InfluenceInput) weighted() bool {
	return slices.ContainsFunc(in.Rows, func(r InfluenceRow) bool { return r.Weights != nil })
}

// tail is what follows a name and is never cut: the year and the dagger.
func (r InfluenceRow) tail() string { return ForestRow{Year: r.Year, Dagger: r.Dagger}.tail() }
