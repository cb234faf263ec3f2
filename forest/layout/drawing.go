package layout

// Point is a place in points; x runs to the right, y downwards.
type Point struct{ X, Y float64 }

// Document is a chart of one or more pages. All pages have the same width.
type Document struct {
	Pages []Drawing

	// Missing lists the characters of the texts that Liberation Sans lacks, each
	// once, in code point order. SVG viewers take them from another font; PDF
	// and PNG show a hollow box. Empty means that every character has a glyph.
	Missing []rune
}

// onePage is a document of one page.
func onePage(page Drawing) Document {
	pages := []Drawing{page}
	return Document{Pages: pages, Missing: missing(pages)}
}

// Drawing is one page.
type Drawing struct {
	ID            string  // prefix of the ids in the SVG; unique on a page that holds several drawings
	Width, Height float64 // points
	Title         string  // what the chart shows, for <title> and the document's properties
	Description   string  // all its numbers in words, for readers who cannot see it
	Items         []Item  // drawn in order, later ones over earlier ones
}

// Item is one piece of a drawing: Line, Rect, Polygon, Disc, Text or Group.
type Item interface{ item() }

// Line is a straight stroke.
type Line struct {
	X1, Y1, X2, Y2 float64
	Width          float64   // points
	Dash           []float64 // lengths of stroke and gap in points; nil is solid
	Round          bool      // round ends, which turns short dashes into dots
	Ink            Ink
}

// Rect is a rectangle with sides along the axes; X, Y is its upper left corner.
type Rect struct {
	X, Y, Width, Height float64
	Paint               Paint
}

// Polygon is a closed figure.
type Polygon struct {
	Points []Point
	Paint  Paint
}

// Disc is a filled circle.
type Disc struct {
	X, Y, Radius float64
	Paint        Paint
}

// Paint says how an area is inked: filled, and with an outline if
// OutlineWidth (points, centred on the edge) is above 0.
type Paint struct {
	Fill         Ink
	Outline      Ink
	OutlineWidth float64
}

// Solid is a fill without an outline.
func Solid(ink Ink) Paint { return Paint{Fill: ink} }

// Hollow is an area in paper colour with an outline.
func Hollow(ink Ink, width float64) Paint {
	return Paint{Fill: Paper, Outline: ink, OutlineWidth: width}
}

// Group is a named part of a drawing. In SVG it becomes <g> with the id
// "<drawing>-<ID>" and the tooltip Title; either may be empty.
type Group struct {
	ID    string
	Title string
	Items []Item
}

func (Line) item()    {}
func (Rect) item()    {}
func (Polygon) item() {}
func (Disc) item()    {}
func (Text) item()    {}
func (Group) item()   {}

// Each calls f for every item of the drawing that is not a Group, in drawing
// order.
func (d Drawing) Each(f func(Item)) { each(d.Items, f) }

func each(items []Item, f func(Item)) {
	for _, it := range items {
		if g, ok := it.(Group); ok {
			each(g.Items, f)
			continue
		}
		f(it)
	}
}
