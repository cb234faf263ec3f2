package layout

import (
	"fmt"
	"math"
	"strings"

	"steelyard/forest/words"
	"steelyard/meta/evidence"
)

// room is the place that a text takes.
type room struct{ left, right, top, bottom float64 }

func roomOf(t Text) room {
	run := t.Runs()[0]
	return room{run.Left - 1.5, run.Left + run.Width + 1.5, t.Y - 0.78*t.Size, t.Y + 0.22*t.Size}
}

// meets reports whether a stroke's rectangle reaches into the room.
func (r room) meets(a, b Point) bool {
	return math.Min(a.X, b.X) < r.right && r.left < math.Max(a.X, b.X) && math.Min(a.Y, b.Y) < r.bottom && r.top < math.Max(a.Y, b.Y)
}

func (r room) overlaps(other room) bool {
	return r.meets(Point{other.left, other.top}, Point{other.right, other.bottom})
}

// across reports whether a level line runs through the room or touches it.
func (r room) across(y float64) bool { return r.top-1.2 < y && y < r.bottom+1.2 }

// labelItems writes what each line and curve is.
func (c *priorSensitivity) labelItems() []Item {
	levels := c.levelLabels()
	taken := []room{roomOf(levels[0]), roomOf(levels[1])}
	items := append(onPatch(levels[0], Paper, 1), onPatch(levels[1], Paper, 1)...)
	for _, name := range []struct {
		text  string
		path  []Point
		above bool
	}{{"normal prior", c.normal, true}, {"Cauchy prior", c.cauchy, false}} {
		if t, found := c.curveLabel(name.text, name.path, name.above, taken); found {
			taken = append(taken, roomOf(t))
			items = append(items, t)
		}
	}
	return items
}

// levelLabels stand above their lines, that of the evidence below its own where
// another line would run through it.
func (c *priorSensitivity) levelLabels() [2]Text {
	size, right := c.metrics.second, c.plot.high
	bound, level := c.ladder.place(c.in.LnBound/lnStep), c.ladder.place(c.in.LnEvidence/lnStep)
	limit := label(right, bound-3.2, size, End, Ordinary, "no prior can pass "+words.Odds(c.in.LnBound))
	text := c.in.LevelName + "  " + words.Odds(c.in.LnEvidence)
	value := boldLabel(right, level-3.6, size, End, text)
	if above := roomOf(value); above.across(bound) || above.across(c.ladder.y(0)) || above.overlaps(roomOf(limit)) {
		value.Y = level + 0.78*size + 3
	}
	return [2]Text{limit, value}
}

// curveLabel places a curve's name beside it, above at the right or below at the
// left, where nothing runs through it and, if that can be, no line of the ladder;
// of such places the one nearest to a fifth of the panel past the curve's top.
func (c *priorSensitivity) curveLabel(text string, path []Point, above bool, taken []room) (best Text, found bool) {
	if len(path) == 0 {
		return best, false
	}
	top := path[0]
	for _, p := range path {
		if p.Y < top.Y {
			top = p
		}
	}
	wanted := top.X + 0.2*(c.plot.high-c.plot.low)
	size, least := c.metrics.second, math.Inf(1)
	for _, p := range path {
		t := label(p.X+curveLabelGap, p.Y-2, size, Start, Ordinary, text)
		if !above {
			t = label(p.X-curveLabelGap, p.Y+size+3, size, End, Ordinary, text)
		}
		cost := math.Abs(p.X - wanted)
		if !c.clear(roomOf(t), taken) {
			continue
		}
		for _, s := range c.ladder.stepLines(size) {
			if roomOf(t).across(c.ladder.y(s.steps)) {
				cost += c.style.Width
			}
		}
		if cost < least {
			best, found, least = t, true, cost
		}
	}
	return best, found
}

// clear reports whether a room lies in the panel and holds no curve, no level line
// and no other text.
func (c *priorSensitivity) clear(r room, taken []room) bool {
	if r.left < c.plot.low || r.right > c.plot.high || r.top < c.ladder.top || r.bottom > c.ladder.bottom() {
		return false
	}
	for _, ln := range []float64{c.in.LnEvidence, c.in.LnBound, 0} {
		if r.across(c.ladder.place(ln / lnStep)) {
			return false
		}
	}
	for _, path := range [][]Point{c.normal, c.cauchy} {
		for i := 1; i < len(path); i++ {
			if r.meets(path[i-1], path[i]) {
				return false
			}
		}
	}
	for _, other := range taken {
		if r.overlaps(other) {
			return false
		}
	}
	return true
}

// description tells the chart's numbers in words.
func (c *priorSensitivity) description() string {
	var b strings.Builder
	if c.in.Title != "" {
		b.WriteString(c.in.Title + " ")
	}
	fmt.Fprintf(&b, "%s, effect against none: %s, %s, whatever the scale of these priors. ", capital(c.in.LevelName), words.Odds(c.in.LnEvidence), strengthText(c.in.LnEvidence))
	b.WriteString(c.highest("Normal", func(p PriorPoint) float64 { return p.Normal }))
	b.WriteString(c.highest("Cauchy", func(p PriorPoint) float64 { return p.Cauchy }))
	fmt.Fprintf(&b, "No prior can pass %s, %s steps. By scale, %s: ", words.Odds(c.in.LnBound), words.Steps(evidence.FromLn(c.in.LnBound).Steps()), c.in.ScaleName)
	for i, s := range c.in.Scales {
		if i > 0 {
			b.WriteString("; ")
		}
		b.WriteString(words.PriorScale(s.Scale))
		if s.Range != "" {
			b.WriteString(" (" + s.Range + ")")
		}
		fmt.Fprintf(&b, ", normal %s, Cauchy %s", words.Odds(s.Normal), words.Odds(s.Cauchy))
	}
	b.WriteString(".")
	return b.String()
}

// highest says how far a family of priors gets, and from which scale on it speaks
// for none.
func (c *priorSensitivity) highest(family string, ln func(PriorPoint) float64) string {
	top := c.in.Curve[0]
	for _, p := range c.in.Curve {
		if ln(p) > ln(top) {
			top = p
		}
	}
	text := fmt.Sprintf("%s prior: at most %s, at scale %s", family, words.Odds(ln(top)), words.PriorScale(top.Scale))
	for i := len(c.in.Curve) - 1; i > 0; i-- {
		a, b := c.in.Curve[i-1], c.in.Curve[i]
		if ln(b) < 0 && ln(a) >= 0 {
			share := ln(a) / (ln(a) - ln(b))
			text += "; below 1 : 1 for scales above " + words.PriorScale(a.Scale*math.Pow(b.Scale/a.Scale, share))
			break
		}
	}
	return text + ". "
}
