package layout

import "fmt"

// The two widths of the charts in points: 180 mm across a page, 85 mm in a
// column.
const (
	WideWidth   = 180 / millimetresPerPoint
	NarrowWidth = 85 / millimetresPerPoint
)

// maxPageHeight is the height beyond which a chart goes on to a new page, 230 mm.
const maxPageHeight = 230 / millimetresPerPoint

// minType is the least type size in print.
const minType = 6.5

// Style says how a chart is to look.
type Style struct {
	ID       string   // prefix of the ids in the SVG; empty is the chart's name, such as "forest"
	Width    float64  // points; 0 is WideWidth
	NoTitle  bool     // leave title and subtitle to the caption
	TypeSize float64  // points, of the rows; 0 chooses by width and number of rows
	Contours Contours // of a funnel chart
}

// ForestStyle is the style of a forest chart.
type ForestStyle = Style

// settled returns the style with what was left open filled in. It refuses sizes
// that no chart can have.
func (s Style) settled(id, chart string) (Style, error) {
	given := s
	if s.Width == 0 {
		s.Width = WideWidth
	}
	if !(s.Width >= 40 && s.Width <= 5000) || !(s.TypeSize == 0 || s.TypeSize >= minType && s.TypeSize <= 40) {
		return s, fmt.Errorf("%s: width of %v pt with type of %v pt; give a width of 40 to 5000 pt and a type size of %v to 40 pt", chart, given.Width, given.TypeSize, minType)
	}
	if s.ID == "" {
		s.ID = id
	}
	return s, nil
}

// TooNarrowError reports a width into which a chart does not fit.
type TooNarrowError struct {
	Chart        string  // such as "forest chart"
	Width, Least float64 // points
}

func (e *TooNarrowError) Error() string {
	return fmt.Sprintf("%s: a width of %.0f mm is too narrow; give at least %.0f mm",
		e.Chart, e.Width*millimetresPerPoint, e.Least*millimetresPerPoint+0.5)
}
