package layout

import (
	"io"
	"slices"
)

// WriteInline writes a drawing as an SVG element for a page of HTML, in the colours of
// the light theme, which the page recolours by attribute selectors. It has a class, no
// size of its own, no background and no blanks between elements; coordinates have one
// decimal. The page's style must fill text in the ordinary ink and no path at all.
// Described names the drawing whose title and description stand for this one's
// too, such as the wide form of the same chart; blank writes its own.
func WriteInline(w io.Writer, d Drawing, class, described string) error {
	s := svg{theme: Light, id: d.ID, digits: 10, inline: true, size: commonSize(d)}
	s.raw("<svg")
	s.attr("class", class)
	s.attr("viewBox", "0 0 "+s.coordinate(d.Width)+" "+s.coordinate(d.Height))
	s.attr("role", "img")
	if described == "" {
		s.attr("aria-labelledby", d.ID+"-title "+d.ID+"-desc")
	} else {
		s.attr("aria-labelledby", described+"-title "+described+"-desc")
	}
	s.number("font-size", s.size)
	s.raw(` font-family="` + FontFamily + "\">")
	if described == "" {
		s.described("title", d.Title)
		s.described("desc", d.Description)
	}
	s.items(d.Items)
	s.raw("</svg>")
	_, err := w.Write(joined(s.out.Bytes()))
	return err
}

// joined takes the line ends between elements out, with the blanks behind them; text
// holds none, since it is escaped.
func joined(image []byte) []byte {
	kept := image[:0]
	for i := 0; i < len(image); i++ {
		if image[i] != '\n' {
			kept = append(kept, image[i])
			continue
		}
		for i+1 < len(image) && image[i+1] == ' ' {
			i++
		}
	}
	return kept
}

// commonSize returns the size of most texts of a drawing.
func commonSize(d Drawing) float64 {
	counts := map[float64]int{}
	best := 0.0
	d.Each(func(it Item) {
		if t, ok := it.(Text); ok {
			counts[t.Size]++
			if counts[t.Size] > counts[best] {
				best = t.Size
			}
		}
	})
	return best
}

// alike returns the lines at the start of a list that look the same.
func alike(items []Item) []Line {
	var run []Line
	for _, it := range items {
		l, ok := it.(Line)
		if !ok || len(run) > 0 && (l.Ink != run[0].Ink || l.Width != run[0].Width || l.Round != run[0].Round || !slices.Equal(l.Dash, run[0].Dash)) {
			break
		}
		run = append(run, l)
	}
	return run
}

// path draws lines of one look; one that begins where the other ends goes on from it.
func (s *svg) path(run []Line) {
	s.raw(s.indent + `<path d="`)
	for i, l := range run {
		if i == 0 || l.X1 != run[i-1].X2 || l.Y1 != run[i-1].Y2 {
			s.raw("M" + s.coordinate(l.X1) + " " + s.coordinate(l.Y1))
		}
		switch {
		case l.Y1 == l.Y2:
			s.raw("H" + s.coordinate(l.X2))
		case l.X1 == l.X2:
			s.raw("V" + s.coordinate(l.Y2))
		default:
			s.raw("L" + s.coordinate(l.X2) + " " + s.coordinate(l.Y2))
		}
	}
	s.raw(`"`)
	s.stroke(run[0])
}
