package forest

import (
	"math"

	"git.sr.ht/~sbinet/gg"

	"steelyard/forest/layout"
)

// pngInk draws the items of a page on a picture.
type pngInk struct {
	canvas  *gg.Context
	letters typesetter
	theme   layout.Theme
	scale   float64 // pixels per point
	foot    float64 // pixels by which the picture's whole rows exceed the page's height
}

// at returns the pixel position of a place on the page.
func (p *pngInk) at(x, y float64) (float64, float64) { return x * p.scale, y*p.scale + p.foot }

func (p *pngInk) draw(it layout.Item) {
	switch it := it.(type) {
	case layout.Line:
		p.line(it)
	case layout.Rect:
		right, low := it.X+it.Width, it.Y+it.Height
		p.closed(layout.Point{X: it.X, Y: it.Y}, layout.Point{X: right, Y: it.Y},
			layout.Point{X: right, Y: low}, layout.Point{X: it.X, Y: low})
		p.paint(it.Paint)
	case layout.Polygon:
		p.closed(it.Points...)
		p.paint(it.Paint)
	case layout.Disc:
		p.canvas.MoveTo(p.at(it.X+it.Radius, it.Y))
		x, y := p.at(it.X, it.Y)
		p.canvas.DrawArc(x, y, it.Radius*p.scale, 0, -2*math.Pi)
		p.canvas.ClosePath()
		p.paint(it.Paint)
	case layout.Text:
		p.text(it)
	}
}

func (p *pngInk) line(l layout.Line) {
	if l.Round {
		p.dots(l)
		return
	}
	if l.Width <= 0 {
		return
	}
	dash := make([]float64, len(l.Dash))
	for i, v := range l.Dash {
		dash[i] = v * p.scale
	}
	p.canvas.SetColor(colourOf(p.theme, l.Ink))
	p.canvas.SetLineWidth(l.Width * p.scale)
	p.canvas.SetDash(dash...)
	p.canvas.MoveTo(p.at(l.X1, l.Y1))
	p.canvas.LineTo(p.at(l.X2, l.Y2))
	p.canvas.Stroke()
	p.canvas.SetDash()
}

// dots draws a line with round ends, which the canvas lacks: each dash becomes
// a short line with a disc at both ends.
func (p *pngInk) dots(l layout.Line) {
	length := math.Hypot(l.X2-l.X1, l.Y2-l.Y1)
	on, period := length, length
	if len(l.Dash) == 2 {
		on, period = l.Dash[0], l.Dash[0]+l.Dash[1]
	}
	if !(period > 0) {
		return
	}
	for at := 0.0; at < length; at += period {
		end := math.Min(at+on, length)
		x1, y1 := l.X1+(l.X2-l.X1)*at/length, l.Y1+(l.Y2-l.Y1)*at/length
		x2, y2 := l.X1+(l.X2-l.X1)*end/length, l.Y1+(l.Y2-l.Y1)*end/length
		p.line(layout.Line{X1: x1, Y1: y1, X2: x2, Y2: y2, Width: l.Width, Ink: l.Ink})
		p.draw(layout.Disc{X: x1, Y: y1, Radius: l.Width / 2, Paint: layout.Solid(l.Ink)})
		p.draw(layout.Disc{X: x2, Y: y2, Radius: l.Width / 2, Paint: layout.Solid(l.Ink)})
	}
}

// closed lays the path around an area.
func (p *pngInk) closed(points ...layout.Point) {
	for i, pt := range points {
		if i == 0 {
			p.canvas.MoveTo(p.at(pt.X, pt.Y))
			continue
		}
		p.canvas.LineTo(p.at(pt.X, pt.Y))
	}
	p.canvas.ClosePath()
}

// paint fills the path and draws its outline.
func (p *pngInk) paint(paint layout.Paint) {
	paint = p.theme.Resolve(paint)
	p.canvas.SetColor(colourOf(p.theme, paint.Fill))
	p.canvas.FillPreserve()
	if paint.OutlineWidth > 0 {
		p.canvas.SetColor(colourOf(p.theme, paint.Outline))
		p.canvas.SetLineWidth(paint.OutlineWidth * p.scale)
		p.canvas.StrokePreserve()
	}
	p.canvas.ClearPath()
}

// text draws each character where the width table puts it. A whole string would
// be set with pairs of letters drawn closer (kerning), which moves digits out of
// their columns.
func (p *pngInk) text(t layout.Text) {
	for _, run := range t.Runs() {
		p.letters.choose(run.Bold, run.Italic, t.Size)
		ink := colourOf(p.theme, run.Ink)
		x := run.Left
		for _, r := range run.Text {
			for _, shown := range layout.Printable(string(r)) {
				p.letters.set(shown, x*p.scale, t.Y*p.scale, ink)
			}
			x += layout.Width(string(r), t.Size, run.Bold)
		}
	}
}
