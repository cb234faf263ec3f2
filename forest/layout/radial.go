package layout

import (
	"fmt"
	"math"
	"strings"
	"unicode"
	"unicode/utf8"

	"steelyard/forest/words"
)

// radial is a radial chart while it is laid out.
type radial struct {
	scatter
	in    FunnelInput // cleaned
	rays  axis        // effects at the right edge, each where its ray from the origin ends
	low   float64     // interval of the pooled estimate
	high  float64
	level float64
}

// RadialInput is what a radial chart shows.
type RadialInput struct {
	FunnelInput
	Low, High float64 // interval of the pooled estimate, analysis scale; not used without it
	Level     float64 // of that interval, such as 0.95
}

// radialReach is how many standard errors from the pooled ray the dashed lines lie:
// about 95% of studies lie between them if they share one effect.
const radialReach = 2

// Radial lays out how far each study lies from no effect in its own standard errors
// against its precision, 1/standard error: a ray from the origin joins studies of
// one effect, which the axis at the right names. The pooled effect is a ray with
// its interval; studies that share it scatter around it with a standard deviation
// of 1 whatever their precision, so that most lie between the dashed lines.
//
// Source: Galbraith (1988), Statistics in Medicine 7:889-894.
//
// Errors are those of Funnel.
func Radial(in RadialInput, style Style) (Document, error) {
	if err := in.validate(); err != nil {
		return Document{}, fmt.Errorf("radial chart: %w", err)
	}
	check := checks{chart: "radial chart", ratio: in.Scale.Ratio}
	if in.Pooled != nil {
		if err := check.limits("the pooled estimate", in.Low, in.High); err != nil {
			return Document{}, err
		}
	}
	style, err := style.settled("radial", "radial chart")
	if err != nil {
		return Document{}, err
	}
	c := &radial{in: in.cleaned(), low: in.Low, high: in.High, level: in.Level}
	c.scatter = newScatter(style, c.in.Title, c.in.Subtitle)
	if err := c.arrange(); err != nil {
		return Document{}, err
	}
	return onePage(c.page()), nil
}

// arrange places axes and studies. Precision ends at the most precise study, the
// upright axis at 1.1 times the farthest 49 of 50 studies.
func (c *radial) arrange() error {
	size := c.metrics.second
	precision := make([]float64, len(c.in.Rows))
	z := make([]float64, len(c.in.Rows))
	far := 0.0
	for i, r := range c.in.Rows {
		precision[i] = 1 / r.SE
		z[i] = (r.Estimate - c.in.Scale.Null) / r.SE
		far = max(far, math.Abs(z[i]))
	}
	most := 1.04 * math.Min(quantile(precision, 1), 4*quantile(precision, 0.9))
	up := span{-radialReach - 0.5, radialReach + 0.5}
	shown := math.Min(far, 2*quantile(absolute(z), 0.9)+1)
	for _, v := range z {
		up.hold(clamp(v, -shown, shown))
	}
	if c.in.Pooled != nil {
		up.hold(clamp((*c.in.Pooled-c.in.Scale.Null)*most, -3*shown-3, 3*shown+3))
	}
	up.low, up.high = outward(up.low, up.high, false)
	c.up = axis{low: up.low, high: up.high, x0: c.bottom, x1: c.top}
	c.up.setUprightTicks(size)
	c.rays = axis{low: c.in.Scale.Null + up.low/most, high: c.in.Scale.Null + up.high/most, x0: c.bottom, x1: c.top, ratio: c.in.Scale.Ratio}
	c.rays.setUprightTicks(size)
	if err := c.frame("radial chart", numbersRoom(c.up, size), numbersRoom(c.rays, size)); err != nil {
		return err
	}
	c.across = axis{low: 0, high: most, x0: c.plot.low, x1: c.plot.high}
	c.across.setTicks(size)
	for i, r := range c.in.Rows {
		c.put(r.name(), precision[i], z[i])
	}
	return nil
}

func absolute(values []float64) []float64 {
	out := make([]float64, len(values))
	for i, v := range values {
		out[i] = math.Abs(v)
	}
	return out
}

// ray is the line z = slope × precision + offset through the panel, cut at its edges;
// false where it misses the panel.
func (c *radial) ray(slope, offset float64) (Point, Point, bool) {
	from, to := 0.0, c.across.high
	for _, edge := range []float64{c.up.low, c.up.high} {
		if slope == 0 {
			continue
		}
		at := (edge - offset) / slope
		leaves := (edge == c.up.high) == (slope > 0)
		if leaves {
			to = math.Min(to, at)
		} else {
			from = math.Max(from, at)
		}
	}
	if !(from < to) || !c.up.holds(clamp(slope*(from+to)/2+offset, c.up.low, c.up.high)) {
		return Point{}, Point{}, false
	}
	place := func(x float64) Point { return Point{c.across.x(x), c.up.x(slope*x + offset)} }
	return place(from), place(to), true
}

// pooledItems draws the wedge of the pooled interval, the pooled ray, and the lines
// beside it.
func (c *radial) pooledItems() []Item {
	if c.in.Pooled == nil {
		return nil
	}
	null := c.in.Scale.Null
	slope := *c.in.Pooled - null
	items := []Item{Polygon{Points: c.wedge(c.low-null, c.high-null), Paint: Solid(IntervalBand)}}
	if a, b, ok := c.ray(slope, 0); ok {
		items = append(items, Line{X1: a.X, Y1: a.Y, X2: b.X, Y2: b.Y, Width: 0.8, Ink: Estimate})
	}
	for _, offset := range []float64{-radialReach, radialReach} {
		if a, b, ok := c.ray(slope, offset); ok {
			items = append(items, Line{X1: a.X, Y1: a.Y, X2: b.X, Y2: b.Y, Width: 0.6, Dash: []float64{2, 2}, Ink: Estimate})
		}
	}
	return items
}

// wedge is the part of the panel between two rays from the origin.
func (c *radial) wedge(low, high float64) []Point {
	origin := Point{c.plot.low, c.up.x(0)}
	points := []Point{origin}
	exit := func(slope float64) Point {
		z := slope * c.across.high
		switch {
		case z > c.up.high:
			return Point{c.across.x(c.up.high / slope), c.top}
		case z < c.up.low:
			return Point{c.across.x(c.up.low / slope), c.bottom}
		}
		return Point{c.plot.high, c.up.x(z)}
	}
	a, b := exit(low), exit(high)
	points = append(points, a)
	if a.Y == c.bottom && b.X == c.plot.high {
		points = append(points, Point{c.plot.high, c.bottom})
	}
	if b.Y == c.top && a.X == c.plot.high {
		points = append(points, Point{c.plot.high, c.top})
	}
	if a.Y == c.bottom && b.Y == c.top {
		points = append(points, Point{c.plot.high, c.bottom}, Point{c.plot.high, c.top})
	}
	return append(points, b)
}

// rayItems draws the axis of effects at the right edge.
func (c *radial) rayItems() []Item {
	size := c.metrics.second
	items := []Item{Line{X1: c.plot.high, Y1: c.top, X2: c.plot.high, Y2: c.bottom, Width: 0.5}}
	for _, t := range c.rays.ticks {
		items = append(items, Line{X1: c.plot.high, Y1: t.x, X2: c.plot.high + 2.2, Y2: t.x, Width: 0.5},
			label(c.plot.high+4, t.x+baseline(size), size, Start, Ordinary, t.label))
	}
	return items
}

// page draws the chart.
func (c *radial) page() Drawing {
	m := c.metrics
	title := c.in.Title
	if title == "" {
		title = "Do the " + noun(c.in.Study, 2) + " agree, whatever their precision?"
	}
	zero := c.up.x(0)
	slope := 0.0
	if c.in.Pooled != nil {
		slope = *c.in.Pooled - c.in.Scale.Null
	}
	axes, lowest := c.axisItems()
	lowest += 3.2 + m.second
	name := "Precision, 1/standard error" + " " + strings.TrimSpace(c.unit())
	name, _ = cut(name, "", c.style.Width-2*m.margin, m.second)
	axes = append(axes, label((c.plot.low+c.plot.high)/2, lowest, m.second, Middle, Ordinary, name))
	pooled := c.pooledItems()
	taken := append(besideLines(pooled), area{c.plot.low, c.plot.high, zero - 0.5, zero + 0.5})
	names := c.nameItems(farthestFirst(len(c.dots), func(i int) float64 { return math.Abs(c.dots[i].y - slope*c.dots[i].x) }), taken)
	heads := []Item{c.headItem("Standard errors from none", "")}
	if text := capitalised(c.in.Scale.Measure); Width("Standard errors from none  ", m.head, true)+Width(text, m.head, true) < c.style.Width-2*m.margin {
		heads = append(heads, boldLabel(c.style.Width-m.margin, c.head, m.head, End, text))
	}
	return c.drawing(title, c.description(), []Item{
		Group{ID: "head", Items: heads},
		Group{ID: "pooled", Items: pooled},
		Line{X1: c.plot.low, Y1: zero, X2: c.plot.high, Y2: zero, Width: 0.75},
		Group{ID: noun(c.in.Study, 2), Items: append(c.discItems(), names...)},
		Group{ID: "axes", Items: append(axes, c.rayItems()...)},
	}, c.notes(), lowest)
}

// capitalised is a text that begins with a capital.
func capitalised(text string) string {
	if text == "" {
		return text
	}
	first, size := utf8.DecodeRuneInString(text)
	return string(unicode.ToUpper(first)) + text[size:]
}

func (c *radial) unit() string {
	if c.in.Scale.Ratio {
		return "of the log " + c.in.Scale.Measure
	}
	return "of the " + c.in.Scale.Measure
}

// outside counts the studies beyond the dashed lines.
func (c *radial) outside() int {
	n := 0
	for _, d := range c.dots {
		if math.Abs(d.y-(*c.in.Pooled-c.in.Scale.Null)*d.x) > radialReach {
			n++
		}
	}
	return n
}

func (c *radial) notes() []Note {
	one, many := noun(c.in.Study, 1), noun(c.in.Study, 2)
	notes := []Note{{"Rays", fmt.Sprintf("from the origin join %s of one effect, read at the right; the steeper, the further from none. Precise %s lie at the right.", many, many)}}
	if c.in.Pooled != nil {
		notes = append(notes, Note{"Pooled", fmt.Sprintf("solid ray, its %s interval tinted. Dashed: 2 standard errors of a %s on each side; with one common effect about 1 in 20 lies beyond, here %d of %d.", words.Level(c.level), one, c.outside(), len(c.dots))})
	}
	if n := c.beyond(); n > 0 {
		notes = append(notes, Note{"Heads at the edge", fmt.Sprintf("%s beyond the axes.", words.Number(n, one, many))})
	}
	return append(notes, c.in.Notes...)
}

// description tells the numbers in words.
func (c *radial) description() string {
	var b strings.Builder
	fmt.Fprintf(&b, "%s by precision and distance from no effect: ", words.Number(len(c.in.Rows), noun(c.in.Study, 1), noun(c.in.Study, 2)))
	for i, r := range c.in.Rows {
		if i > 0 {
			b.WriteString("; ")
		}
		fmt.Fprintf(&b, "%s %s, 1/standard error %s, %s standard errors from none", r.name(), effectText(c.in.Scale, r.Estimate), words.Linear(1/r.SE, 2), words.Linear((r.Estimate-c.in.Scale.Null)/r.SE, 2))
	}
	b.WriteString(".")
	if c.in.Pooled != nil {
		fmt.Fprintf(&b, " Pooled %s (%s).", effectText(c.in.Scale, *c.in.Pooled), intervalText(c.in.Scale, c.low, c.high))
	}
	return b.String()
}
