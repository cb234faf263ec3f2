package layout

import (
	"fmt"
	"math"
	"testing"
)

// box is the room that a piece of a drawing takes.
type box struct {
	what           string
	x1, y1, x2, y2 float64
	text           bool
}

// boxes returns the room of every item; text as its letters stand, from the
// height of a capital (0.72 of the size) to the depth of a descender (0.21).
func boxes(d Drawing) []box {
	var all []box
	d.Each(func(it Item) {
		switch it := it.(type) {
		case Text:
			for _, r := range it.Runs() {
				all = append(all, box{what: fmt.Sprintf("%q at y %.1f", r.Text, it.Y), text: true,
					x1: r.Left, x2: r.Left + r.Width, y1: it.Y - 0.72*it.Size, y2: it.Y + 0.21*it.Size})
			}
		case Line:
			all = append(all, box{what: fmt.Sprintf("line %+v", it), x1: min(it.X1, it.X2), x2: max(it.X1, it.X2), y1: min(it.Y1, it.Y2), y2: max(it.Y1, it.Y2)})
		case Rect:
			all = append(all, box{what: fmt.Sprintf("rect %+v", it), x1: it.X, x2: it.X + it.Width, y1: it.Y, y2: it.Y + it.Height})
		case Polygon:
			b := box{what: fmt.Sprintf("polygon %+v", it), x1: math.Inf(1), y1: math.Inf(1), x2: math.Inf(-1), y2: math.Inf(-1)}
			for _, p := range it.Points {
				b.x1, b.x2, b.y1, b.y2 = min(b.x1, p.X), max(b.x2, p.X), min(b.y1, p.Y), max(b.y2, p.Y)
			}
			all = append(all, b)
		case Disc:
			all = append(all, box{what: fmt.Sprintf("disc %+v", it), x1: it.X - it.Radius, x2: it.X + it.Radius, y1: it.Y - it.Radius, y2: it.Y + it.Radius})
		}
	})
	return all
}

// checkPage fails if anything lies outside the page, has no place at all, is
// smaller than print allows, or if two texts overlap.
func checkPage(t *testing.T, name string, d Drawing) {
	t.Helper()
	const slack = 0.01
	all := boxes(d)
	var texts []box
	for _, b := range all {
		if !(b.x1 >= -slack && b.x2 <= d.Width+slack && b.y1 >= -slack && b.y2 <= d.Height+slack && b.x1 <= b.x2+slack && b.y1 <= b.y2+slack) {
			t.Errorf("%s: outside the page of %.1f × %.1f: %s from (%.2f, %.2f) to (%.2f, %.2f)", name, d.Width, d.Height, b.what, b.x1, b.y1, b.x2, b.y2)
		}
		if b.text {
			texts = append(texts, b)
		}
	}
	for i, a := range texts {
		for _, b := range texts[i+1:] {
			if a.x1 < b.x2-slack && b.x1 < a.x2-slack && a.y1 < b.y2-slack && b.y1 < a.y2-slack {
				t.Errorf("%s: %s overlaps %s", name, a.what, b.what)
			}
		}
	}
	d.Each(func(it Item) {
		if text, ok := it.(Text); ok && text.Size < minType {
			t.Errorf("%s: type of %v pt, the least in print is %v", name, text.Size, minType)
		}
	})
}

// group returns a named part of a drawing.
func group(t *testing.T, d Drawing, id string) Group {
	t.Helper()
	var found *Group
	var search func([]Item)
	search = func(items []Item) {
		for _, it := range items {
			if g, ok := it.(Group); ok {
				if g.ID == id {
					found = &g
				}
				search(g.Items)
			}
		}
	}
	search(d.Items)
	if found == nil {
		t.Fatalf("no group %q", id)
	}
	return *found
}

// textsOf returns the texts of items, one string per span.
func textsOf(items []Item) []string {
	var all []string
	each(items, func(it Item) {
		if t, ok := it.(Text); ok {
			for _, s := range t.Spans {
				all = append(all, s.Text)
			}
		}
	})
	return all
}

func mustForest(t testing.TB, in ForestInput, style ForestStyle) Document {
	t.Helper()
	doc, err := Forest(in, style)
	if err != nil {
		t.Fatal(err)
	}
	return doc
}

// effectAxis returns the line of the effect axis, the first level one.
func effectAxis(t *testing.T, d Drawing) Line {
	t.Helper()
	for _, l := range linesOf(group(t, d, "axes").Items, Ordinary) {
		if l.Y1 == l.Y2 {
			return l
		}
	}
	t.Fatal("no effect axis")
	return Line{}
}

// linesOf, polygonsOf and rectsOf return the items of a kind and an ink.
func linesOf(items []Item, ink Ink) []Line {
	var all []Line
	each(items, func(it Item) {
		if l, ok := it.(Line); ok && l.Ink == ink {
			all = append(all, l)
		}
	})
	return all
}

func polygonsOf(items []Item, ink Ink) []Polygon {
	var all []Polygon
	each(items, func(it Item) {
		if p, ok := it.(Polygon); ok && p.Paint.Fill == ink {
			all = append(all, p)
		}
	})
	return all
}

func rectsOf(items []Item, paint Paint) []Rect {
	var all []Rect
	each(items, func(it Item) {
		if r, ok := it.(Rect); ok && r.Paint == paint {
			all = append(all, r)
		}
	})
	return all
}
