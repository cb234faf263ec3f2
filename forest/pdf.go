package forest

import (
	"errors"
	"fmt"
	"io"
	"slices"
	"time"

	"codeberg.org/go-fonts/liberation/liberationsansbold"
	"codeberg.org/go-fonts/liberation/liberationsansbolditalic"
	"codeberg.org/go-fonts/liberation/liberationsansitalic"
	"codeberg.org/go-fonts/liberation/liberationsansregular"
	"codeberg.org/go-pdf/fpdf"

	"steelyard/forest/layout"
)

// errNoPages reports a document without a page.
var errNoPages = errors.New("the document has no pages; lay out a chart first")

// pdfDate stands in every PDF as its date of creation, so that the same results
// give the same bytes.
var pdfDate = time.Date(2000, 1, 1, 0, 0, 0, 0, time.UTC)

// WritePDF writes all pages as one PDF file with real, searchable text and
// embedded subsets of the type face. The same document and theme give the same
// bytes. Characters without a glyph are drawn as hollow boxes; doc.Missing
// lists them.
func WritePDF(w io.Writer, doc layout.Document, theme layout.Theme) error {
	if len(doc.Pages) == 0 {
		return errNoPages
	}
	first := doc.Pages[0]
	f := fpdf.NewCustom(&fpdf.InitType{UnitStr: "pt", Size: fpdf.SizeType{Wd: first.Width, Ht: first.Height}})
	f.SetCatalogSort(true)
	f.SetCreationDate(pdfDate)
	f.SetModificationDate(pdfDate)
	f.SetTitle(layout.Clean(first.Title), true)
	f.SetSubject(layout.Clean(first.Description), true)
	f.SetCreator("steelyard", true)
	f.SetProducer("steelyard", true)
	f.SetMargins(0, 0, 0)
	f.SetAutoPageBreak(false, 0)
	for _, style := range usedStyles(doc) {
		f.AddUTF8FontFromBytes(pdfFamily, style, pdfFonts[style])
	}
	ink := pdfInk{f: f, theme: theme}
	for _, page := range doc.Pages {
		f.AddPageFormat("P", fpdf.SizeType{Wd: page.Width, Ht: page.Height})
		ink.rect(layout.Rect{Width: page.Width, Height: page.Height, Paint: layout.Solid(layout.Paper)})
		page.Each(ink.draw)
	}
	if err := f.Output(w); err != nil {
		return fmt.Errorf("writing the PDF: %w", err)
	}
	return nil
}

const pdfFamily = "LiberationSans"

// pdfFonts are the faces by the PDF library's letters for bold and italic.
var pdfFonts = map[string][]byte{
	"":   liberationsansregular.TTF,
	"B":  liberationsansbold.TTF,
	"I":  liberationsansitalic.TTF,
	"BI": liberationsansbolditalic.TTF,
}

func pdfStyle(s layout.Span) string {
	style := ""
	if s.Bold {
		style += "B"
	}
	if s.Italic {
		style += "I"
	}
	return style
}

// usedStyles returns the faces that a document needs, in order.
func usedStyles(doc layout.Document) []string {
	var used []string
	for _, page := range doc.Pages {
		page.Each(func(it layout.Item) {
			if t, ok := it.(layout.Text); ok {
				for _, s := range t.Spans {
					used = append(used, pdfStyle(s))
				}
			}
		})
	}
	slices.Sort(used)
	return slices.Compact(used)
}

// pdfInk draws items on the current page.
type pdfInk struct {
	f     *fpdf.Fpdf
	theme layout.Theme
}

func (p pdfInk) draw(it layout.Item) {
	switch it := it.(type) {
	case layout.Line:
		p.line(it)
	case layout.Rect:
		p.rect(it)
	case layout.Polygon:
		p.polygon(it)
	case layout.Disc:
		p.f.Circle(it.X, it.Y, it.Radius, p.paint(it.Paint))
	case layout.Text:
		p.text(it)
	}
}

func (p pdfInk) line(l layout.Line) {
	c := colourOf(p.theme, l.Ink)
	p.f.SetDrawColor(int(c.R), int(c.G), int(c.B))
	p.f.SetLineWidth(l.Width)
	dash := l.Dash
	if dash == nil {
		dash = []float64{}
	}
	p.f.SetDashPattern(dash, 0)
	if l.Round {
		p.f.SetLineCapStyle("round")
	}
	p.f.Line(l.X1, l.Y1, l.X2, l.Y2)
	p.f.SetLineCapStyle("butt")
	p.f.SetDashPattern([]float64{}, 0)
}

func (p pdfInk) rect(r layout.Rect) { p.f.Rect(r.X, r.Y, r.Width, r.Height, p.paint(r.Paint)) }

func (p pdfInk) polygon(g layout.Polygon) {
	pts := make([]fpdf.PointType, len(g.Points))
	for i, pt := range g.Points {
		pts[i] = fpdf.PointType{X: pt.X, Y: pt.Y}
	}
	p.f.Polygon(pts, p.paint(g.Paint))
}

// paint sets the colours of an area and returns the library's word for how to
// draw it: F filled, FD filled with an outline.
func (p pdfInk) paint(paint layout.Paint) string {
	paint = p.theme.Resolve(paint)
	c := colourOf(p.theme, paint.Fill)
	p.f.SetFillColor(int(c.R), int(c.G), int(c.B))
	if paint.OutlineWidth <= 0 {
		return "F"
	}
	c = colourOf(p.theme, paint.Outline)
	p.f.SetDrawColor(int(c.R), int(c.G), int(c.B))
	p.f.SetLineWidth(paint.OutlineWidth)
	return "FD"
}

func (p pdfInk) text(t layout.Text) {
	for _, run := range t.Runs() {
		c := colourOf(p.theme, run.Ink)
		p.f.SetTextColor(int(c.R), int(c.G), int(c.B))
		p.f.SetFont(pdfFamily, pdfStyle(run.Span), t.Size)
		p.f.Text(run.Left, t.Y, layout.Printable(run.Text))
	}
}
