package layout

import (
	"fmt"
	"math"

	"steelyard/meta/choice"
)

// FunnelInput is what a funnel chart shows, as plain display data. Estimates and
// standard errors stand on the analysis scale: natural logs for ratio measures.
type FunnelInput struct {
	Title, Subtitle string
	Study           string // "trial" or "study"; empty is "study"
	Scale           EffectScale
	Sides           Sides
	Rows            []FunnelRow
	Pooled          *float64 // the pooled estimate; nil draws none
	Notes           []Note   // after the note on the lines, which the chart writes itself
}

// FunnelRow is one study.
type FunnelRow struct {
	Name, Year   string
	Estimate, SE float64
}

// Contours says what the lines of a funnel chart join.
type Contours int

// Lines of equal evidence, a step apart (the default), or of equal two-sided p.
const (
	EvidenceContours Contours = iota
	PContours
)

var contourNames = choice.Of[Contours]("kind of contours", "evidence", "p")

// String returns "evidence" or "p".
func (c Contours) String() string { return contourNames.String(c) }

// ContourNames returns the names of all kinds of contours.
func ContourNames() []string { return contourNames.All() }

// ParseContours returns the kind of contours that text names.
func ParseContours(text string) (Contours, error) { return contourNames.Parse(text) }

func (in *FunnelInput) validate() error {
	c := checks{chart: "funnel chart", ratio: in.Scale.Ratio}
	if len(in.Rows) == 0 {
		return fmt.Errorf("funnel chart: there is no study to draw")
	}
	if err := c.frame(in.Scale, 0.95); err != nil {
		return err
	}
	if in.Pooled != nil {
		if err := c.value("the pooled estimate", *in.Pooled, true); err != nil {
			return err
		}
	}
	for i, r := range in.Rows {
		where := fmt.Sprintf("row %d (%s)", i+1, Clean(r.Name))
		if err := c.value(where+": estimate", r.Estimate, true); err != nil {
			return err
		}
		if !(r.SE > 0 && r.SE <= mostDifference) || math.IsInf(1/r.SE, 0) {
			return fmt.Errorf("funnel chart: %s: the standard error is %v; it must be above 0 and at most %v", where, r.SE, mostDifference)
		}
	}
	return nil
}

// cleaned returns a copy whose texts may stand in a drawing.
func (in *FunnelInput) cleaned() FunnelInput {
	out := *in
	out.Title, out.Subtitle, out.Study = Clean(in.Title), Clean(in.Subtitle), Clean(in.Study)
	out.Scale, out.Sides, out.Notes = in.Scale.cleaned(), in.Sides.cleaned(), cleanNotes(in.Notes)
	out.Rows = make([]FunnelRow, len(in.Rows))
	for i, r := range in.Rows {
		r.Name, r.Year = Clean(r.Name), Clean(r.Year)
		out.Rows[i] = r
	}
	return out
}

func (r FunnelRow) name() string { return joinName(r.Name, r.Year) }
