package layout

import (
	"bytes"
	"io"
	"math"
	"strconv"
	"strings"
)

// FontFamily is the type face of every drawing with its fall-backs; Arial has
// the same widths.
const FontFamily = "'Liberation Sans', Arial, Helvetica, sans-serif"

const millimetresPerPoint = 25.4 / 72

// WriteSVG writes a drawing as a complete SVG image. The same drawing and theme
// give the same bytes. Text stays text; it is escaped, and the image holds no
// script, style or reference. Coordinates have at most two decimals.
func WriteSVG(w io.Writer, d Drawing, theme Theme) error {
	s := svg{theme: theme, id: d.ID, indent: "  ", digits: 100}
	s.open(d)
	s.items(d.Items)
	s.raw("</svg>\n")
	_, err := w.Write(s.out.Bytes())
	return err
}

// svg collects the image.
type svg struct {
	out    bytes.Buffer
	theme  Theme
	id     string
	indent string
	digits float64 // coordinates are multiples of 1/digits
	inline bool    // for a page: see WriteInline
	size   float64 // of the texts that name none, inline
}

func (s *svg) raw(text string) { s.out.WriteString(text) }

// escapes are what XML wants escaped in text and in attributes. They are listed here, as
// encoding/xml would make the engine of the report page larger by a tenth.
var escapes = strings.NewReplacer("&", "&amp;", "<", "&lt;", ">", "&gt;", `"`, "&#34;", "'", "&#39;", "\t", "&#x9;", "\n", "&#xA;", "\r", "&#xD;")

// escaped writes a text that Clean has cleaned, or one of our own.
func (s *svg) escaped(text string) { _, _ = escapes.WriteString(&s.out, text) } // a buffer takes everything

func (s *svg) attr(name, value string) {
	s.raw(" " + name + `="`)
	s.escaped(value)
	s.raw(`"`)
}

func (s *svg) number(name string, v float64) { s.raw(" " + name + `="` + s.coordinate(v) + `"`) }

// coordinate writes a number with as few decimals as its place needs.
func (s *svg) coordinate(v float64) string {
	v = math.Round(v*s.digits) / s.digits
	if v == 0 {
		return "0" // never "-0"
	}
	return strconv.FormatFloat(v, 'f', -1, 64)
}

func (s *svg) open(d Drawing) {
	s.raw(`<svg xmlns="http://www.w3.org/2000/svg"`)
	s.attr("width", s.coordinate(d.Width*millimetresPerPoint)+"mm")
	s.attr("height", s.coordinate(d.Height*millimetresPerPoint)+"mm")
	s.attr("viewBox", "0 0 "+s.coordinate(d.Width)+" "+s.coordinate(d.Height))
	s.attr("role", "img")
	s.attr("aria-labelledby", d.ID+"-title "+d.ID+"-desc")
	s.raw(` font-family="` + FontFamily + "\">\n")
	s.described("title", d.Title)
	s.described("desc", d.Description)
	s.raw(s.indent + "<rect")
	s.number("width", d.Width)
	s.number("height", d.Height)
	s.attr("fill", s.theme.Colour(Paper))
	s.raw("/>\n")
}

func (s *svg) described(element, text string) {
	s.raw(s.indent + "<" + element)
	s.attr("id", s.id+"-"+element)
	s.raw(">")
	s.escaped(Clean(text))
	s.raw("</" + element + ">\n")
}

func (s *svg) items(items []Item) {
	for i := 0; i < len(items); i++ {
		switch it := items[i].(type) {
		case Line:
			if s.inline {
				run := alike(items[i:])
				s.path(run)
				i += len(run) - 1
				continue
			}
			s.line(it)
		case Rect:
			s.rect(it)
		case Polygon:
			s.polygon(it)
		case Disc:
			s.disc(it)
		case Text:
			s.text(it)
		case Group:
			s.group(it)
		}
	}
}

func (s *svg) group(g Group) {
	s.raw(s.indent + "<g")
	if g.ID != "" {
		s.attr("id", s.id+"-"+g.ID)
	}
	s.raw(">\n")
	outer := s.indent
	s.indent += "  "
	if g.Title != "" {
		s.raw(s.indent + "<title>")
		s.escaped(Clean(g.Title))
		s.raw("</title>\n")
	}
	s.items(g.Items)
	s.indent = outer
	s.raw(s.indent + "</g>\n")
}

func (s *svg) line(l Line) {
	s.raw(s.indent + "<line")
	s.number("x1", l.X1)
	s.number("y1", l.Y1)
	s.number("x2", l.X2)
	s.number("y2", l.Y2)
	s.stroke(l)
}

func (s *svg) stroke(l Line) {
	s.attr("stroke", s.theme.Colour(l.Ink))
	s.number("stroke-width", l.Width)
	if len(l.Dash) > 0 {
		dash := ""
		for i, v := range l.Dash {
			if i > 0 {
				dash += " "
			}
			dash += s.coordinate(v)
		}
		s.attr("stroke-dasharray", dash)
	}
	if l.Round {
		s.attr("stroke-linecap", "round")
	}
	s.raw("/>\n")
}

func (s *svg) rect(r Rect) {
	s.raw(s.indent + "<rect")
	s.number("x", r.X)
	s.number("y", r.Y)
	s.number("width", r.Width)
	s.number("height", r.Height)
	s.paint(r.Paint)
}

func (s *svg) polygon(p Polygon) {
	s.raw(s.indent + `<polygon points="`)
	for i, pt := range p.Points {
		if i > 0 {
			s.raw(" ")
		}
		s.raw(s.coordinate(pt.X) + "," + s.coordinate(pt.Y))
	}
	s.raw(`"`)
	s.paint(p.Paint)
}

func (s *svg) disc(d Disc) {
	s.raw(s.indent + "<circle")
	s.number("cx", d.X)
	s.number("cy", d.Y)
	s.number("r", d.Radius)
	s.paint(d.Paint)
}

func (s *svg) paint(p Paint) {
	p = s.theme.Resolve(p)
	s.attr("fill", s.theme.Colour(p.Fill))
	if p.OutlineWidth > 0 {
		s.attr("stroke", s.theme.Colour(p.Outline))
		s.number("stroke-width", p.OutlineWidth)
	}
	s.raw("/>\n")
}

var anchorNames = [...]string{Start: "start", Middle: "middle", End: "end"}

func (s *svg) text(t Text) {
	if len(t.Spans) == 0 {
		return
	}
	first := t.Spans[0]
	s.raw(s.indent + "<text")
	if len(t.Spans) == 1 {
		s.number("x", first.X)
	}
	s.number("y", t.Y)
	if !s.inline || t.Size != s.size {
		s.number("font-size", t.Size)
	}
	if !s.inline || first.Ink != Ordinary {
		s.attr("fill", s.theme.Colour(first.Ink))
	}
	if len(t.Spans) == 1 && first.Anchor != Start {
		s.attr("text-anchor", anchorNames[first.Anchor])
	}
	s.face(first, Span{})
	s.raw(">")
	if len(t.Spans) == 1 {
		s.escaped(Clean(first.Text))
	} else {
		for i, span := range t.Spans {
			s.span(i, span, first)
		}
	}
	s.raw("</text>\n")
}

// span writes one piece of a line with what differs from the line's first piece.
func (s *svg) span(i int, span, first Span) {
	if span.Follow && len(span.Text) > 0 && span.Text[0] == ' ' {
		s.raw(" ") // between the pieces, where viewers keep it
	}
	s.raw("<tspan")
	if i == 0 || !span.Follow {
		s.number("x", span.X)
		if !s.inline || span.Anchor != Start {
			s.attr("text-anchor", anchorNames[span.Anchor])
		}
	}
	if span.Ink != first.Ink {
		s.attr("fill", s.theme.Colour(span.Ink))
	}
	s.face(span, first)
	s.raw(">")
	s.escaped(Clean(span.Text))
	s.raw("</tspan>")
}

// face writes weight and slope where they differ from the surrounding text's.
func (s *svg) face(span, around Span) {
	if span.Bold != around.Bold {
		weight := "normal"
		if span.Bold {
			weight = "bold"
		}
		s.attr("font-weight", weight)
	}
	if span.Italic != around.Italic {
		slope := "normal"
		if span.Italic {
			slope = "italic"
		}
		s.attr("font-style", slope)
	}
}
