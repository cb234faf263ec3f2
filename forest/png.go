package forest

import (
	"bytes"
	"encoding/binary"
	"fmt"
	"hash/crc32"
	"image/png"
	"io"
	"math"
	"sync"

	xfont "golang.org/x/image/font"
	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/font/liberation"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/vgimg"

	"steelyard/forest/layout"
)

// maxPixels is the largest PNG that is drawn; beyond it memory and time run
// away (500 rows at 300 dpi took 0.7 GB).
const maxPixels = 40e6

const pointsPerInch = 72

// TooLargeError reports a PNG that would have more than 40 million pixels.
type TooLargeError struct {
	Width, Height float64 // pixels asked for
	DPI, MostDPI  int     // asked for, and the most that this page allows
}

func (e *TooLargeError) Error() string {
	return fmt.Sprintf("PNG of %.0f × %.0f pixels at %d dpi: more than 40 million pixels; ask for at most %d dpi, or write PDF or SVG, which have no pixels",
		e.Width, e.Height, e.DPI, e.MostDPI)
}

// WritePNG writes one page as a PNG image with dpi pixels per inch, which the
// file states, so that it prints at the size of the drawing. dpi must lie from
// 36 to 2400; an image of more than 40 million pixels is refused with a
// *TooLargeError. Characters without a glyph are drawn as hollow boxes.
func WritePNG(w io.Writer, page layout.Drawing, theme layout.Theme, dpi int) error {
	if dpi < 36 || dpi > 2400 {
		return fmt.Errorf("resolution of %d dpi: must be from 36 to 2400; 300 suits print, 150 a screen", dpi)
	}
	scale := float64(dpi) / pointsPerInch
	width, height := page.Width*scale, page.Height*scale
	if !(width*height <= maxPixels) {
		most := math.Sqrt(maxPixels/(page.Width*page.Height)) * pointsPerInch
		return &TooLargeError{Width: width, Height: height, DPI: dpi, MostDPI: int(most)}
	}
	canvas := vgimg.NewWith(
		vgimg.UseWH(vg.Length(page.Width), vg.Length(page.Height)),
		vgimg.UseDPI(dpi),
		vgimg.UseBackgroundColor(colourOf(theme, layout.Paper)))
	ink := pngInk{canvas: canvas, faces: font.NewCache(liberation.Collection()), theme: theme, height: page.Height}
	page.Each(ink.draw)
	var image bytes.Buffer
	if err := pngEncoder.Encode(&image, canvas.Image()); err != nil {
		return fmt.Errorf("writing the PNG: %w", err)
	}
	_, err := w.Write(withResolution(image.Bytes(), dpi))
	return err
}

// pngEncoder is fast at the cost of files some tenths larger; its scratch space is kept.
var pngEncoder = png.Encoder{CompressionLevel: png.BestSpeed, BufferPool: &pngBuffers{}}

// pngBuffers keeps the encoder's scratch space from image to image.
type pngBuffers struct{ sync.Pool }

// Get returns scratch space, or nil where none is kept.
func (p *pngBuffers) Get() *png.EncoderBuffer {
	b, _ := p.Pool.Get().(*png.EncoderBuffer)
	return b
}

// Put keeps scratch space.
func (p *pngBuffers) Put(b *png.EncoderBuffer) { p.Pool.Put(b) }

// pngInk draws items on a canvas whose y runs upwards.
type pngInk struct {
	canvas vg.Canvas
	faces  *font.Cache
	theme  layout.Theme
	height float64
}

func (p pngInk) at(x, y float64) vg.Point {
	return vg.Point{X: vg.Length(x), Y: vg.Length(p.height - y)}
}

func (p pngInk) draw(it layout.Item) {
	switch it := it.(type) {
	case layout.Line:
		p.line(it)
	case layout.Rect:
		right, low := it.X+it.Width, it.Y+it.Height
		p.area(p.closed(layout.Point{X: it.X, Y: it.Y}, layout.Point{X: right, Y: it.Y},
			layout.Point{X: right, Y: low}, layout.Point{X: it.X, Y: low}), it.Paint)
	case layout.Polygon:
		p.area(p.closed(it.Points...), it.Paint)
	case layout.Disc:
		var path vg.Path
		path.Move(p.at(it.X+it.Radius, it.Y))
		path.Arc(p.at(it.X, it.Y), vg.Length(it.Radius), 0, 2*math.Pi)
		path.Close()
		p.area(path, it.Paint)
	case layout.Text:
		p.text(it)
	}
}

func (p pngInk) line(l layout.Line) {
	if l.Round {
		p.dots(l)
		return
	}
	dash := make([]vg.Length, len(l.Dash))
	for i, v := range l.Dash {
		dash[i] = vg.Length(v)
	}
	p.canvas.SetColor(colourOf(p.theme, l.Ink))
	p.canvas.SetLineWidth(vg.Length(l.Width))
	p.canvas.SetLineDash(dash, 0)
	var path vg.Path
	path.Move(p.at(l.X1, l.Y1))
	path.Line(p.at(l.X2, l.Y2))
	p.canvas.Stroke(path)
	p.canvas.SetLineDash(nil, 0)
}

// dots draws a line with round ends, which the canvas lacks: each dash becomes
// a short line with a disc at both ends.
func (p pngInk) dots(l layout.Line) {
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

func (p pngInk) closed(points ...layout.Point) vg.Path {
	var path vg.Path
	for i, pt := range points {
		if i == 0 {
			path.Move(p.at(pt.X, pt.Y))
			continue
		}
		path.Line(p.at(pt.X, pt.Y))
	}
	path.Close()
	return path
}

func (p pngInk) area(path vg.Path, paint layout.Paint) {
	paint = p.theme.Resolve(paint)
	p.canvas.SetColor(colourOf(p.theme, paint.Fill))
	p.canvas.Fill(path)
	if paint.OutlineWidth > 0 {
		p.canvas.SetColor(colourOf(p.theme, paint.Outline))
		p.canvas.SetLineWidth(vg.Length(paint.OutlineWidth))
		p.canvas.Stroke(path)
	}
}

// text draws each character where the width table puts it. A whole string would
// be set with pairs of letters drawn closer (kerning), which moves digits out of
// their columns.
func (p pngInk) text(t layout.Text) {
	for _, run := range t.Runs() {
		what := font.Font{Typeface: "Liberation", Variant: "Sans"}
		if run.Bold {
			what.Weight = xfont.WeightBold
		}
		if run.Italic {
			what.Style = xfont.StyleItalic
		}
		face := p.faces.Lookup(what, vg.Length(t.Size))
		p.canvas.SetColor(colourOf(p.theme, run.Ink))
		x := run.Left
		for _, r := range run.Text {
			shown := layout.Printable(string(r))
			p.canvas.FillString(face, p.at(x, t.Y), shown)
			x += layout.Width(string(r), t.Size, run.Bold)
		}
	}
}

// withResolution puts the pHYs chunk, which states the pixels per metre, behind
// the header of an encoded PNG.
func withResolution(image []byte, dpi int) []byte {
	const headerEnd = 8 + 4 + 4 + 13 + 4 // signature, then length, name, data and sum of IHDR
	perMetre := uint32(math.Round(float64(dpi) / 0.0254))
	chunk := append(make([]byte, 0, 21), 0, 0, 0, 9)
	chunk = append(chunk, "pHYs"...)
	chunk = binary.BigEndian.AppendUint32(chunk, perMetre)
	chunk = binary.BigEndian.AppendUint32(chunk, perMetre)
	chunk = append(chunk, 1) // unit: metre
	chunk = binary.BigEndian.AppendUint32(chunk, crc32.ChecksumIEEE(chunk[4:]))
	out := make([]byte, 0, len(image)+len(chunk))
	out = append(out, image[:headerEnd]...)
	out = append(out, chunk...)
	return append(out, image[headerEnd:]...)
}
