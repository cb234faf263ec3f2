package layout

import (
	"fmt"

	"steelyard/meta/review"
)

// CumulativeInput is what a cumulative chart shows, as plain display data.
// Estimates and limits stand on the analysis scale: natural logs for ratio
// measures.
type CumulativeInput struct {
	Title, Subtitle string
	Study           string // what one entry is called: "trial" or "study"; empty is "study"
	Scale           EffectScale
	Sides           Sides             // Lower and Higher stand beside the line of no effect, such as "fewer" and "more"
	Points          []CumulativePoint // in the order of arrival
	Order           string            // what orders the points where it is not their date, such as "order of the sheet"
	Prior           float64           // probability of an effect before the data, for the scale at the right; 0 is none
	Method          string            // of each refit, such as "restricted maximum likelihood, Hartung–Knapp interval"
	Notes           []Note            // after the notes that the chart writes itself
	Level           float64           // of all intervals, such as 0.95
}

// CumulativePoint is the result after one arrival.
type CumulativePoint struct {
	Entered             []Arrival   // the studies that arrived together
	Date                review.Date // of the arrival; unknown if its year is 0, then after all known
	Label               string      // under the axis where the order is not by date; empty is the number of studies so far
	K                   int         // studies so far
	Estimate, Low, High float64     // analysis scale
	LnEvidence          float64     // ln of the evidence ratio, effect over none
}

// Arrival is a study that entered.
type Arrival struct{ Name, Year string }

// mostPoints bounds the points of a cumulative chart; more cannot be told apart.
const mostPoints = 1000

func (in *CumulativeInput) validate() error {
	c := checks{chart: "cumulative chart", ratio: in.Scale.Ratio}
	if len(in.Points) == 0 {
		return fmt.Errorf("cumulative chart: no points to draw; nothing was pooled")
	}
	if len(in.Points) > mostPoints {
		return fmt.Errorf("cumulative chart: %d points; at most %d can be told apart, so let more of them enter together", len(in.Points), mostPoints)
	}
	if err := c.frame(in.Scale, in.Level); err != nil {
		return err
	}
	if !(0 <= in.Prior && in.Prior < 1) {
		return fmt.Errorf("cumulative chart: prior probability %v must lie between 0 and 1", in.Prior)
	}
	k := 0
	for i, p := range in.Points {
		where := fmt.Sprintf("point %d", i+1)
		if err := c.result(where, p.Estimate, p.Low, p.High, p.LnEvidence); err != nil {
			return err
		}
		if len(p.Entered) == 0 || p.K < k+len(p.Entered) {
			return fmt.Errorf("cumulative chart: %s: %d studies so far, of which %d entered here; give those that entered and the number with all before", where, p.K, len(p.Entered))
		}
		k = p.K
		if d := p.Date; d.Year < 0 || d.Year > 9999 || d.Month < 0 || d.Month > 12 || d.Day < 0 || d.Day > 31 {
			return fmt.Errorf("cumulative chart: %s: no calendar has the date %d-%d-%d", where, d.Year, d.Month, d.Day)
		}
		if i > 0 && i < in.dated() && p.Date.Compare(in.Points[i-1].Date) < 0 {
			return fmt.Errorf("cumulative chart: %s: its date %s is before %s, that of the point before; put the points in order", where, p.Date, in.Points[i-1].Date)
		}
	}
	return nil
}

// dated returns how many points stand at their dates: the first ones, the others
// being without one; 0 if they are ordered by something else.
func (in *CumulativeInput) dated() int {
	if in.Order != "" {
		return 0
	}
	n := 0
	for n < len(in.Points) && in.Points[n].Date.Year > 0 {
		n++
	}
	for _, p := range in.Points[n:] {
		if p.Date.Year > 0 {
			return 0
		}
	}
	return n
}

// cleaned returns a copy whose texts may stand in a drawing.
func (in *CumulativeInput) cleaned() CumulativeInput {
	out := *in
	out.Title, out.Subtitle, out.Study = Clean(in.Title), Clean(in.Subtitle), Clean(in.Study)
	out.Order, out.Method = Clean(in.Order), Clean(in.Method)
	out.Scale, out.Sides, out.Notes = in.Scale.cleaned(), in.Sides.cleaned(), cleanNotes(in.Notes)
	out.Points = make([]CumulativePoint, len(in.Points))
	for i, p := range in.Points {
		p.Label = Clean(p.Label)
		entered := make([]Arrival, len(p.Entered))
		for j, a := range p.Entered {
			entered[j] = Arrival{Name: Clean(a.Name), Year: Clean(a.Year)}
		}
		p.Entered = entered
		out.Points[i] = p
	}
	return out
}

func (in *CumulativeInput) plural(n int) string { return noun(in.Study, n) }
