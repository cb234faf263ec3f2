package main

import (
	"slices"
	"strings"

	"github.com/rivo/uniseg"
)

// column is a column of a text table: its head, whether its cells stand at the
// right, and whether they are names that may be cut where the table is too wide.
type column struct {
	head  string
	right bool
	names bool
}

// The first column of a table holds names: it is cut to widestName, and further,
// down to narrowestName, where the table is wider than an answer.
const (
	widestName    = 28
	narrowestName = 12
)

// table writes rows under their heads, each column as wide as its widest cell.
// Names in the first column are cut to fit.
func (p *page) table(columns []column, rows [][]string) {
	p.tableNamed(columns, rows, narrowestName, widestName)
}

// tableNamed is table with the first column cut to widest, and further, down to
// narrowest, where that is needed.
func (p *page) tableNamed(columns []column, rows [][]string, narrowest, widest int) {
	p.record(block{kind: tableBlock, columns: columns, rows: slices.Clone(rows)})
	for i, row := range rows {
		rows[i] = slices.Clone(row)
	}
	widths := make([]int, len(columns))
	for i, c := range columns {
		widths[i] = width(c.head)
	}
	total := 0
	for i := range columns {
		for _, row := range rows {
			widths[i] = max(widths[i], width(row[i]))
		}
		total += widths[i] + 2
	}
	name := min(widest, max(narrowest, widths[0]-max(0, total-answerWidth)))
	widths[0] = max(width(columns[0].head), min(widths[0], name))
	cutNames(columns, widths)
	for _, row := range rows {
		for i := range row {
			if i == 0 || columns[i].names {
				row[i] = cut(row[i], widths[i])
			}
		}
	}
	heads := make([]string, len(columns))
	for i, c := range columns {
		heads[i] = c.head
	}
	for _, row := range append([][]string{heads}, rows...) {
		line := "  "
		for i, cell := range row {
			space := strings.Repeat(" ", widths[i]-width(cell))
			if columns[i].right {
				cell = space + cell
			} else {
				cell += space
			}
			line += cell + "  "
		}
		p.write(line)
	}
}

// cutNames narrows the columns of names, the widest first, until the table is no wider
// than an answer, none below its head or narrowestName.
func cutNames(columns []column, widths []int) {
	total := 0
	for _, w := range widths {
		total += w + 2
	}
	for ; total > answerWidth; total-- {
		widest := -1
		for i, c := range columns {
			if c.names && widths[i] > max(narrowestName, width(c.head)) && (widest < 0 || widths[i] > widths[widest]) {
				widest = i
			}
		}
		if widest < 0 {
			return
		}
		widths[widest]--
	}
}

// width is the number of columns that text takes on a terminal.
func width(text string) int { return uniseg.StringWidth(text) }

// cut shortens text to a width, with "…" in place of what is lost.
func cut(text string, most int) string {
	if width(text) <= most {
		return text
	}
	var kept strings.Builder
	used := 0
	for graphemes := uniseg.NewGraphemes(text); graphemes.Next(); {
		used += graphemes.Width()
		if used > most-1 {
			break
		}
		kept.WriteString(graphemes.Str())
	}
	return strings.TrimRight(kept.String(), " ") + "…"
}
