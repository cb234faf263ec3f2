package layout

import (
	"fmt"
	"math"
	"strings"

	"steelyard/forest/words"
)

// ContributionInput is what a chart of contributions shows, as plain display data.
type ContributionInput struct {
	Title, Subtitle string
	Study           string // "trial" or "study"; empty is "study"
	Rows            []ContributionRow
	Notes           []Note // after the note on the axes, which the chart writes itself
}

// ContributionRow is one study.
type ContributionRow struct {
	Name, Year string
	QShare     float64 // contribution to Cochran's Q, 0 or above
	Pull       float64 // (estimate − estimate without it)/standard error without it
}

// contribution is a chart of contributions while it is laid out.
type contribution struct {
	scatter
	in ContributionInput // cleaned
	q  float64           // Cochran's Q
}

// Contribution lays out which studies make the results differ and which move the
// answer: each study's contribution to Cochran's Q against its pull on the pooled
// estimate, in standard errors of the result without it.
//
// Source: Baujat, Mahé, Pignon & Hill (2002), Statistics in Medicine 21:2641-2652,
// whose upright axis is the square of a pull on the common effect.
//
// It returns an error naming the row if a number is not finite, and a
// *TooNarrowError if the panel finds no room.
func Contribution(in ContributionInput, style Style) (Document, error) {
	if err := in.validate(); err != nil {
		return Document{}, err
	}
	style, err := style.settled("contribution", "contribution chart")
	if err != nil {
		return Document{}, err
	}
	c := &contribution{in: in.cleaned()}
	c.scatter = newScatter(style, c.in.Title, c.in.Subtitle)
	if err := c.arrange(); err != nil {
		return Document{}, err
	}
	return onePage(c.page()), nil
}

func (in *ContributionInput) validate() error {
	if len(in.Rows) < 2 {
		return fmt.Errorf("contribution chart: %d %s; it takes 2 to differ", len(in.Rows), noun(in.Study, len(in.Rows)))
	}
	for i, r := range in.Rows {
		if !(r.QShare >= 0 && r.QShare <= mostInfluence) || !(math.Abs(r.Pull) <= mostInfluence) {
			return fmt.Errorf("contribution chart: row %d (%s): a contribution of %v to Q and a pull of %v standard errors are beyond what an axis can show; leave the row out or check its standard error", i+1, Clean(r.Name), r.QShare, r.Pull)
		}
	}
	return nil
}

// cleaned returns a copy whose texts may stand in a drawing.
func (in *ContributionInput) cleaned() ContributionInput {
	out := *in
	out.Title, out.Subtitle, out.Study, out.Notes = Clean(in.Title), Clean(in.Subtitle), Clean(in.Study), cleanNotes(in.Notes)
	out.Rows = make([]ContributionRow, len(in.Rows))
	for i, r := range in.Rows {
		r.Name, r.Year = Clean(r.Name), Clean(r.Year)
		out.Rows[i] = r
	}
	return out
}

// arrange places axes and studies.
func (c *contribution) arrange() error {
	size := c.metrics.second
	across, up := span{0, 1}, span{-0.1, 0.1}
	for _, r := range c.in.Rows {
		across.hold(1.04 * r.QShare)
		up.hold(1.04 * r.Pull)
		c.q += r.QShare
	}
	up.low, up.high = outward(up.low, up.high, false)
	step := roundStep(across.high / 8)
	across.high = math.Ceil(across.high/step) * step
	c.up = axis{low: up.low, high: up.high, x0: c.bottom, x1: c.top}
	c.up.setUprightTicks(size)
	if err := c.frame("contribution chart", numbersRoom(c.up, size), 8); err != nil {
		return err
	}
	c.across = axis{low: 0, high: across.high, x0: c.plot.low, x1: c.plot.high}
	c.across.setTicks(size)
	for _, r := range c.in.Rows {
		c.put(joinName(r.Name, r.Year), r.QShare, r.Pull)
	}
	return nil
}

// even is the contribution of each study if all differed alike by chance: its
// expected value under one common effect is 1 less its leverage, 1 − 1/k on average.
func (c *contribution) even() float64 { return 1 - 1/float64(len(c.in.Rows)) }

// page draws the chart.
func (c *contribution) page() Drawing {
	m := c.metrics
	title := c.in.Title
	if title == "" {
		title = "Which " + noun(c.in.Study, 2) + " make the results differ?"
	}
	zero := c.up.x(0)
	lines := []Item{Line{X1: c.plot.low, Y1: zero, X2: c.plot.high, Y2: zero, Width: 0.75}}
	if c.across.holds(c.even()) {
		x := c.across.x(c.even())
		lines = append(lines, Line{X1: x, Y1: c.top, X2: x, Y2: c.bottom, Width: 0.6, Dash: []float64{2, 2}, Ink: Soft})
	}
	axes, lowest := c.axisItems()
	lowest += 3.2 + m.second
	axes = append(axes, label((c.plot.low+c.plot.high)/2, lowest, m.second, Middle, Ordinary, "Contribution to Cochran’s Q"))
	width, height := c.across.high, c.up.high-c.up.low
	names := c.nameItems(farthestFirst(len(c.dots), func(i int) float64 {
		return math.Hypot(c.dots[i].x/width, 2*c.dots[i].y/height)
	}), []area{{c.plot.low, c.plot.high, zero - 0.5, zero + 0.5}})
	return c.drawing(title, c.description(), []Item{
		Group{ID: "head", Items: []Item{c.headItem("Pull on the result", "in standard errors of the result without it")}},
		Group{ID: "lines", Items: lines},
		Group{ID: noun(c.in.Study, 2), Items: append(c.discItems(), names...)},
		Group{ID: "axes", Items: axes},
	}, c.notes(), lowest)
}

func (c *contribution) notes() []Note {
	one := noun(c.in.Study, 1)
	notes := []Note{
		{"Right", fmt.Sprintf("the %s differs from the others by more than its standard error; the contributions sum to Q, %s here. Dashed: what chance alone gives a %s on average.", one, words.Linear(c.q, 1), one)},
		{"Up or down", fmt.Sprintf("the %s moves the pooled estimate that way. Only one that lies far out both ways decides much of the answer.", one)},
	}
	return append(notes, c.in.Notes...)
}

// description tells the numbers in words.
func (c *contribution) description() string {
	var b strings.Builder
	fmt.Fprintf(&b, "%s by contribution to Cochran's Q and pull on the result: ", words.Number(len(c.in.Rows), noun(c.in.Study, 1), noun(c.in.Study, 2)))
	for i, r := range c.in.Rows {
		if i > 0 {
			b.WriteString("; ")
		}
		fmt.Fprintf(&b, "%s %s, pull %s standard errors", joinName(r.Name, r.Year), words.Linear(r.QShare, 2), words.StepsChange(r.Pull))
	}
	fmt.Fprintf(&b, ". Q is %s.", words.Linear(c.q, 2))
	return b.String()
}
