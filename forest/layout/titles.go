package layout

import "fmt"

// pageMark is the width kept free at the right of the subtitle for "page 2 of 3".
const pageMark = 50

// titleBlock is a chart's title and subtitle, wrapped.
type titleBlock struct {
	title, subtitle []string
	size, subSize   float64
	lead            float64 // from baseline to baseline
	left, right     float64
	bottom          float64 // last baseline, scaled by the type; below 0 without a title
}

// placeTitles wraps title and subtitle for a chart; without them the chart moves
// up. The subtitle keeps a width free at its right.
func placeTitles(title, subtitle string, free float64, style Style, m metrics) titleBlock {
	b := titleBlock{size: 9, subSize: 7, lead: 11, left: m.margin, right: style.Width - m.margin, bottom: -5}
	u := max(1, m.row/7.5)
	if m.twoLine {
		u = m.row / 7.25
		b.size, b.subSize, b.lead = 8.5*u, max(minType, 6.75*u), 10*u
	}
	if style.NoTitle {
		return b
	}
	room := b.right - b.left
	b.title = wrapPlain(title, room, b.size, true)
	b.subtitle = wrapPlain(subtitle, room-free, b.subSize, false)
	lead := b.lead
	if !m.twoLine {
		lead *= u
	}
	b.bottom = lead * float64(len(b.title)+len(b.subtitle))
	return b
}

// items draws title and subtitle, and which page this is of several.
func (b titleBlock) items(page, pages int) []Item {
	y := 0.0
	var items []Item
	for _, line := range b.title {
		y += b.lead
		items = append(items, boldLabel(b.left, y, b.size, Start, line))
	}
	for i, line := range b.subtitle {
		y += b.lead
		items = append(items, label(b.left, y, b.subSize, Start, Soft, line))
		if i == 0 && pages > 1 {
			items = append(items, label(b.right, y, b.subSize, End, Soft, fmt.Sprintf("page %d of %d", page, pages)))
		}
	}
	return items
}
