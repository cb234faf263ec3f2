package layout

import (
	"fmt"
	"math"
	"strings"

	"steelyard/forest/words"
	"steelyard/meta/evidence"
)

// funnel is a funnel chart while it is laid out.
type funnel struct {
	scatter
	in       FunnelInput // cleaned
	contours []contour   // from the innermost
}

// contour is a line along which a study's estimate lies z standard errors from no
// effect.
type contour struct {
	z     float64
	label string
	right float64 // height at which it leaves the panel at the right; NaN if below
}

// funnelBands are the tints from the innermost contour outwards.
var funnelBands = []Ink{FunnelNone, FunnelFaint, FunnelFair, FunnelFirm, FunnelHeavy, FunnelMassive}

// Funnel lays out whether small studies show other effects: each study's estimate
// against its standard error, which falls towards the top, over contours that join
// estimates with the same evidence, |z| = √(1 + ln 2 + 2·ln ER), a step apart, or
// with the same two-sided p. The fan is white where a study speaks for no effect.
// Studies beyond the axes become heads at the edge, and a note counts them.
//
// It returns an error naming the row if a number is not finite or beyond what an
// axis can show, and a *TooNarrowError if the panel finds no room.
func Funnel(in FunnelInput, style Style) (Document, error) {
	if err := in.validate(); err != nil {
		return Document{}, err
	}
	style, err := style.settled("funnel", "funnel chart")
	if err != nil {
		return Document{}, err
	}
	c := &funnel{in: in.cleaned()}
	c.scatter = newScatter(style, c.in.Title, c.in.Subtitle)
	if err := c.arrange(); err != nil {
		return Document{}, err
	}
	return onePage(c.page()), nil
}

// contoursOf returns the contours of a kind, from the innermost.
func contoursOf(kind Contours) []contour {
	var all []contour
	if kind == PContours {
		for _, c := range []struct {
			z    float64
			text string
		}{{1.6448536269514722, "p = 0.10"}, {1.959963984540054, "p = 0.05"}, {2.5758293035489004, "p = 0.01"}, {3.2905267314919255, "p = 0.001"}} {
			all = append(all, contour{z: c.z, label: c.text})
		}
		return all
	}
	for steps := range 5 {
		ln := float64(steps) * evidence.LnStep
		all = append(all, contour{z: math.Sqrt(1 + math.Ln2 + 2*ln), label: words.Odds(ln)})
	}
	return all
}

// arrange places axes, contours and studies.
func (c *funnel) arrange() error {
	size := c.metrics.second
	c.contours = contoursOf(c.style.Contours)
	right := 0.0
	for _, k := range c.contours {
		right = max(right, Width(k.label, size, false))
	}
	c.up = axis{low: 0, high: c.deepest(), x0: c.top, x1: c.bottom}
	c.up.setUprightTicks(size)
	if err := c.frame("funnel chart", numbersRoom(c.up, size), right+4); err != nil {
		return err
	}
	low, high := c.limits()
	c.across = axis{low: low, high: high, x0: c.plot.low, x1: c.plot.high, ratio: c.in.Scale.Ratio}
	c.across.setTicks(size)
	for i := range c.contours {
		k := &c.contours[i]
		k.right = math.NaN()
		if s := (high - c.in.Scale.Null) / k.z; s <= c.up.high {
			k.right = c.up.x(s)
		}
	}
	for _, r := range c.in.Rows {
		c.put(r.name(), r.Estimate, r.SE)
	}
	return nil
}

// deepest is the standard error at the foot of the panel: round, and not led by a
// few studies that are far less precise than the rest.
func (c *funnel) deepest() float64 {
	errors := make([]float64, len(c.in.Rows))
	most := 0.0
	for i, r := range c.in.Rows {
		errors[i] = r.SE
		most = max(most, r.SE)
	}
	most = 1.04 * math.Min(most, 4*quantile(errors, 0.9))
	step := roundStep(most / 8)
	return math.Ceil(most/step) * step
}

// limits are the ends of the axis of effects: no effect with room beside it, the
// pooled estimate, and the estimates, nearest first, within a 50-fold span, or for
// differences within six spans of their middle four fifths.
func (c *funnel) limits() (low, high float64) {
	null := c.in.Scale.Null
	s := span{null, null}
	centre := null
	if c.in.Pooled != nil {
		centre = *c.in.Pooled
		s.hold(centre)
	}
	rows := make([]ForestRow, len(c.in.Rows))
	away := make([]float64, len(c.in.Rows))
	errors := make([]float64, len(c.in.Rows))
	for i, r := range c.in.Rows {
		rows[i].Estimate = r.Estimate
		away[i], errors[i] = math.Abs(r.Estimate-centre), r.SE
	}
	most := logSpan
	if !c.in.Scale.Ratio {
		most = 6 * math.Max(2*quantile(away, 0.8), 2*quantile(errors, 0.5))
	}
	most = math.Max(most, s.high-s.low)
	for _, v := range nearestFirst(rows, centre) {
		wider := s
		if wider.hold(v); wider.high-wider.low <= most {
			s = wider
		}
	}
	room := math.Max(0.5*(s.high-s.low), 0.5*c.contours[0].z*quantile(errors, 0.5))
	s.hold(null - room)
	s.hold(null + room)
	if least := leastSpan(c.in.Scale, math.Max(math.Abs(s.low), math.Abs(s.high))); s.high-s.low < least {
		s = span{null - least/2, null + least/2}
	}
	return outward(s.low, s.high, c.in.Scale.Ratio)
}

// fan is the part of the panel inside a contour.
func (c *funnel) fan(k contour) []Point {
	points := []Point{{c.across.x(c.in.Scale.Null), c.top}}
	right, left := c.exit(k.z, c.across.high), c.exit(-k.z, c.across.low)
	points = append(points, right)
	if right.Y < c.bottom {
		points = append(points, Point{c.plot.high, c.bottom})
	}
	if left.Y < c.bottom {
		points = append(points, Point{c.plot.low, c.bottom})
	}
	return append(points, left)
}

// exit is where the line of z standard errors from no effect leaves the panel.
func (c *funnel) exit(z, end float64) Point {
	null := c.in.Scale.Null
	if s := (end - null) / z; s <= c.up.high {
		return Point{c.across.x(end), c.up.x(s)}
	}
	return Point{c.across.x(null + z*c.up.high), c.bottom}
}

func (c *funnel) contourItems() []Item {
	bands := funnelBands[:len(c.contours)+1]
	items := []Item{Rect{X: c.plot.low, Y: c.top, Width: c.plot.high - c.plot.low, Height: c.bottom - c.top, Paint: Solid(bands[len(bands)-1])}}
	for i := len(c.contours) - 1; i >= 0; i-- {
		items = append(items, Polygon{Points: c.fan(c.contours[i]), Paint: Solid(bands[i])})
	}
	apex := Point{c.across.x(c.in.Scale.Null), c.top}
	for _, k := range c.contours {
		for _, p := range []Point{c.exit(k.z, c.across.high), c.exit(-k.z, c.across.low)} {
			items = append(items, Line{X1: apex.X, Y1: apex.Y, X2: p.X, Y2: p.Y, Width: 0.5, Ink: FunnelLine})
		}
	}
	return items
}

// labelItems writes what the contours mean where they leave the panel: at its right
// edge, or inside at its foot; those that would touch are left out, outer ones first.
func (c *funnel) labelItems() (items []Item, taken []area) {
	size := c.metrics.second
	var last float64 = math.Inf(1)
	for _, k := range c.contours {
		if !math.IsNaN(k.right) {
			y := clamp(k.right, c.top+size/2, c.bottom-size/2)
			if last-y < 1.08*size {
				continue
			}
			last = y
			items = append(items, label(c.plot.high+2.5, y+baseline(size), size, Start, Ordinary, k.label))
			continue
		}
		p := c.exit(k.z, c.across.high)
		t := label(p.X-3.5-0.25*size, c.bottom-3, size, End, Ordinary, k.label)
		a := areaOf(t).grown(1.5)
		clear := a.left > c.across.x(c.in.Scale.Null)+2
		for _, o := range taken {
			clear = clear && !a.meets(o)
		}
		for _, d := range c.dots {
			clear = clear && !a.grown(scatterDisc).holds(d.at)
		}
		if clear {
			items, taken = append(items, t), append(taken, a)
		}
	}
	return items, taken
}

// pooledItems draws the line of the pooled estimate with its name at the top.
func (c *funnel) pooledItems(taken []area) ([]Item, []area) {
	if c.in.Pooled == nil || !c.across.holds(*c.in.Pooled) {
		return nil, taken
	}
	size := c.metrics.second
	x := c.across.x(*c.in.Pooled)
	items := []Item{Line{X1: x, Y1: c.top, X2: x, Y2: c.bottom, Width: 0.8, Dash: []float64{2, 2}, Ink: Estimate}}
	side, anchor := -3.0, End
	if *c.in.Pooled > c.in.Scale.Null {
		side, anchor = 3, Start
	}
	t := label(x+side, c.top+1.4*size, size, anchor, Ordinary, "pooled")
	a := areaOf(t).grown(1)
	clear := a.left >= c.plot.low && a.right <= c.plot.high
	for _, d := range c.dots {
		clear = clear && !a.grown(scatterDisc).holds(d.at)
	}
	if clear {
		items, taken = append(items, t), append(taken, a)
	}
	return items, taken
}

// page draws the chart.
func (c *funnel) page() Drawing {
	title := c.in.Title
	if title == "" {
		title = "Do small " + noun(c.in.Study, 2) + " show other effects?"
	}
	null := c.across.x(c.in.Scale.Null)
	labels, taken := c.labelItems()
	pooled, taken := c.pooledItems(taken)
	axes, numbers := c.axisItems()
	sides, lowest := c.directionItems(c.in.Sides, null, numbers)
	centre := c.in.Scale.Null
	if c.in.Pooled != nil {
		centre = *c.in.Pooled
	}
	taken = append(taken, area{null - 1, null + 1, c.top, c.bottom})
	taken = append(taken, besideLines(pooled)...)
	names := c.nameItems(farthestFirst(len(c.dots), func(i int) float64 { return math.Abs(c.dots[i].x-centre) / (c.dots[i].y + 0.1*c.up.high) }), taken)
	return c.drawing(title, c.description(), []Item{
		Group{ID: "head", Items: []Item{c.headItem("Standard error", c.unit())}},
		Group{ID: "contours", Items: c.contourItems()},
		Group{ID: "pooled", Items: pooled},
		Line{X1: null, Y1: c.top, X2: null, Y2: c.bottom, Width: 0.75},
		Group{ID: "labels", Items: labels},
		Group{ID: noun(c.in.Study, 2), Items: append(c.discItems(), names...)},
		Group{ID: "axes", Items: append(axes, sides...)},
	}, c.notes(), lowest)
}

// unit says of what the standard errors are.
func (c *funnel) unit() string {
	if c.in.Scale.Ratio {
		return "of the log " + c.in.Scale.Measure
	}
	return "of the " + c.in.Scale.Measure
}

func (c *funnel) notes() []Note {
	one := noun(c.in.Study, 1)
	lines := Note{"Lines", fmt.Sprintf("join results that give one %s the same evidence; each is one step, a factor 3.73, from the next. White: evidence for no effect.", one)}
	if c.style.Contours == PContours {
		lines.Text = fmt.Sprintf("join results that give one %s the same two-sided p; it falls outwards.", one)
	}
	notes := []Note{lines}
	if n := c.beyond(); n > 0 {
		notes = append(notes, Note{"Heads at the edge", fmt.Sprintf("%s beyond the axes.", words.Number(n, one, noun(c.in.Study, 2)))})
	}
	return append(notes, c.in.Notes...)
}

// description tells the numbers in words.
func (c *funnel) description() string {
	var b strings.Builder
	fmt.Fprintf(&b, "%s by %s and standard error: ", words.Number(len(c.in.Rows), noun(c.in.Study, 1), noun(c.in.Study, 2)), c.in.Scale.Measure)
	for i, r := range c.in.Rows {
		if i > 0 {
			b.WriteString("; ")
		}
		z := (r.Estimate - c.in.Scale.Null) / r.SE
		fmt.Fprintf(&b, "%s %s, standard error %s, %s", r.name(), effectText(c.in.Scale, r.Estimate), words.Linear(r.SE, words.Decimals(r.SE)), words.Odds(evidence.Normal(z).Ln()))
	}
	b.WriteString(". ")
	if c.in.Pooled != nil {
		fmt.Fprintf(&b, "Pooled %s. ", effectText(c.in.Scale, *c.in.Pooled))
	}
	b.WriteString("Contours mark equal " + map[Contours]string{EvidenceContours: "evidence", PContours: "p-values"}[c.style.Contours] + ".")
	for _, n := range c.in.Notes {
		b.WriteString(" " + n.Head + ": " + n.Text)
	}
	return b.String()
}
