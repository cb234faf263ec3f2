package layout

import "fmt"

// influence is a chart of influence while it is laid out.
type influence struct {
	in        InfluenceInput // cleaned
	style     Style
	metrics   metrics
	titles    titleBlock
	columns   []gauge
	nameWidth float64
	heads     influenceHeads
	pages     int
}

// influenceHeads are the baselines and rules above the rows.
type influenceHeads struct {
	first, spanRule, second, rule float64
	bandEnd                       float64 // under the pooled row
	rowsTop                       float64
}

// Sizes of a chart of influence in points.
const (
	gaugeLeast       = 46 // least width of an axis in rows of one line
	gaugeLeastNarrow = 30 // and of two
	gaugeNumber      = 5  // from an axis to its numbers
	gaugeBetween     = 17 // from the numbers to the next axis
	gaugeNarrow      = 9  // from axis to axis in rows of two lines
	leverageShare    = 0.62
	residualDisc     = 2.5
)

// Influence lays out what each study does to the pooled result, a row for each:
// its pull on the estimate, its distance from the others, its leverage, and the
// evidence it carries, each as a mark on an axis of its own and as a number. A
// pooled row stands above them.
//
// Narrow charts have rows of two lines, with the leverage under the name. More
// than 48 rows, or a height over 230 mm, go on to further pages with the same
// axes. Marks beyond their axes end in arrows; the numbers tell.
//
// It returns an error naming the row if a number is not finite or beyond what an
// axis can show, if there are fewer than two rows, and a *TooNarrowError if the
// width cannot hold them.
func Influence(in InfluenceInput, style Style) (Document, error) {
	if err := in.validate(); err != nil {
		return Document{}, err
	}
	style, err := style.settled("influence", "influence chart")
	if err != nil {
		return Document{}, err
	}
	c := &influence{in: in.cleaned(), style: style}
	if err := c.arrange(); err != nil {
		return Document{}, err
	}
	doc := Document{Pages: c.paginate()}
	doc.Missing = missing(doc.Pages)
	return doc, nil
}

// arrange chooses sizes and places columns and heads.
func (c *influence) arrange() error {
	c.metrics = wideMetrics(len(c.in.Rows), c.style.TypeSize)
	if !c.placeWide(true) && !c.placeWide(false) {
		c.metrics = narrowMetrics(c.style.TypeSize)
		if lack := c.placeNarrow(); lack > 0 {
			return &TooNarrowError{Chart: "influence chart", Width: c.style.Width, Least: c.style.Width + lack/(1-nameShare)}
		}
	}
	for i := range c.columns {
		g := &c.columns[i]
		g.setTicks(c.metrics.second)
		if g.kind == residualGauge {
			g.under = fittingText(residualNames, g.numberEnd-g.place.low+4, c.metrics.second)
		}
	}
	c.titles = placeTitles(c.in.Title, c.in.Subtitle, pageMark, c.style, c.metrics)
	c.heads = c.placeHeads()
	return nil
}

// fittingText returns the first text that is no wider than a width, or the last.
func fittingText(texts []string, width, size float64) string {
	for _, text := range texts {
		if Width(text, size, false) <= width {
			return text
		}
	}
	return texts[len(texts)-1]
}

// widestName is the width that the names would take.
func (c *influence) widestName() float64 {
	most := Width(c.pooledName(), c.metrics.row, true)
	for _, r := range c.in.Rows {
		most = max(most, Width(joinName(r.Name, r.tail()), c.metrics.row, false))
	}
	return most
}

func (c *influence) pooledName() string {
	k := len(c.in.Rows)
	return fmt.Sprintf("All %d %s", k, c.in.plural(k))
}

// placeWide places rows of one line, with or without the leverage; it reports
// false if an axis finds too little room.
func (c *influence) placeWide(leverage bool) bool {
	columns := c.gauges(leverage)
	right := c.style.Width - c.metrics.margin
	c.nameWidth = min(c.widestName(), nameShare*c.style.Width-zoneBefore)
	at := c.metrics.margin + c.nameWidth + zoneBefore + 3
	room, shares := right-at-gaugeBetween*float64(len(columns)-1), 0.0
	for _, g := range columns {
		room -= g.numbers + gaugeNumber
		shares += g.share()
	}
	for i := range columns {
		g := &columns[i]
		width := room * g.share() / shares
		if width < gaugeLeast*g.share() {
			return false
		}
		g.place = span{at, at + width}
		g.numberEnd = g.place.high + gaugeNumber + g.numbers
		at = g.numberEnd + gaugeBetween
	}
	c.columns = columns
	return true
}

// share is the width of an axis as a share of the widest.
func (g gauge) share() float64 {
	if g.kind == leverageGauge {
		return leverageShare
	}
	return 1
}

// placeNarrow places rows of two lines; it returns the width that is missing, 0
// if none.
func (c *influence) placeNarrow() (lack float64) {
	columns := c.gauges(false)
	right := c.style.Width - c.metrics.margin
	under := max(Width(c.pooledText(), c.metrics.second, true), Width(leverageText(1), c.metrics.second, false))
	c.nameWidth = max(min(c.widestName(), nameShare*c.style.Width), under)
	at := c.metrics.margin + c.nameWidth + 5
	n := float64(len(columns))
	width := (right - 3 - at - gaugeNarrow*(n-1)) / n
	if lack := n * (gaugeLeastNarrow - width); lack > 0 {
		return lack
	}
	for i := range columns {
		columns[i].place = span{at, at + width}
		columns[i].numberEnd = columns[i].place.high
		at += width + gaugeNarrow
	}
	c.columns = columns
	return 0
}

// placeHeads places everything above the rows.
func (c *influence) placeHeads() influenceHeads {
	m := c.metrics
	h := influenceHeads{}
	u := max(1, m.row/7.5)
	if m.twoLine {
		u = m.row / 7.25
	}
	h.first = c.titles.bottom + 18.5*u
	h.spanRule = h.first + 3.2
	h.second = h.first + 12*u
	if m.twoLine {
		h.second = h.first + 8.6*u
	}
	h.rule = h.second + 4.5*u
	h.bandEnd = h.rule + 15*u
	if m.twoLine {
		h.bandEnd = h.rule + m.pitch + u
	}
	h.rowsTop = h.bandEnd + 5*u
	if m.twoLine {
		h.rowsTop = h.bandEnd + 3*u
	}
	return h
}

// paginate draws all rows on one page if they fit, or else pages of at most 40
// rows.
func (c *influence) paginate() []Drawing {
	k := len(c.in.Rows)
	per := k
	if k > 48 && !c.metrics.twoLine {
		per = 40
	}
	c.pages = 1
	for ; per > 5; per = (per - 1) / 5 * 5 {
		page := c.page(pageRange{number: 1, from: 0, to: per, last: true})
		if page.Height <= maxPageHeight && per == k {
			return []Drawing{page}
		}
		if page.Height <= maxPageHeight {
			break
		}
	}
	c.pages = (k + per - 1) / per
	var pages []Drawing
	for from := 0; from < k; from += per {
		to := min(from+per, k)
		pages = append(pages, c.page(pageRange{number: len(pages) + 1, from: from, to: to, last: to == k}))
	}
	return pages
}

// page draws one page.
func (c *influence) page(p pageRange) Drawing {
	d := Drawing{ID: c.style.ID, Width: c.style.Width, Title: c.in.Title, Description: c.description(p)}
	if p.number > 1 {
		d.ID += fmt.Sprintf("-%d", p.number)
	}
	if d.Title == "" {
		d.Title = "Influence of each " + c.in.plural(1)
	}
	rowsEnd := c.rowsEnd(p.to - p.from)
	foot, bottom := c.footItems(rowsEnd + 5)
	d.Items = append(d.Items, c.titles.items(p.number, c.pages)...)
	d.Items = append(d.Items,
		Group{ID: "heads", Items: c.headItems()},
		Group{ID: "grid", Items: c.gridItems(p, rowsEnd+5)},
		Group{ID: "pooled", Items: c.pooledItems()},
		Group{ID: c.in.plural(2), Items: c.rowItems(p)},
		Group{ID: "axes", Items: foot})
	notes := c.notes()
	if !p.last {
		notes = []Note{{Text: "Continued on the next page."}}
	}
	texts, height := placeNotes(notes, c.metrics, c.style.Width, bottom+c.metrics.note+7)
	d.Items = append(d.Items, Group{ID: "notes", Items: texts})
	d.Height = height
	return d
}

// rowTop is the upper edge of the i-th row of a page.
func (c *influence) rowTop(i int) float64 {
	y := c.heads.rowsTop + float64(i)*c.metrics.pitch
	if c.metrics.grouped {
		y += groupGap * float64(i/5)
	}
	return y
}

// rowsEnd is the lower edge of the last of n rows.
func (c *influence) rowsEnd(n int) float64 { return c.rowTop(n-1) + c.metrics.pitch }

// centre is the middle of the first line of a row with this upper edge.
func (c *influence) centre(top float64) float64 {
	if c.metrics.twoLine {
		return top + 5.65*c.metrics.row/7.25
	}
	return top + c.metrics.pitch/2
}

// secondLine is the baseline of the second line of a row with this centre.
func (c *influence) secondLine(centre float64) float64 {
	return centre + baseline(c.metrics.row) + 1.08*c.metrics.row
}
