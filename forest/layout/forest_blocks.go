package layout

import (
	"fmt"
	"strings"

	"steelyard/forest/words"
)

// ForestBlock is a subgroup of the rows: the next Rows of them, under a head of its
// own, with their pooled result.
type ForestBlock struct {
	Name   string
	Rows   int
	Pooled *ForestPooled // nil: no subtotal, as for one study
	Weight float64       // share of the pooled result, 0 to 1
}

const (
	blockIndent = 6 // of the names in a block
	blockGap    = 6 // between blocks
	blockHalf   = 3.5
)

// entryKind says what stands on a line of a forest chart.
type entryKind int

const (
	rowEntry entryKind = iota
	headEntry
	subtotalEntry
)

// entry is a row, or the head or the subtotal of a block, by its index.
type entry struct {
	kind  entryKind
	index int
}

// entries returns what stands below one another.
func (in *ForestInput) entries() []entry {
	var all []entry
	row := 0
	for i, b := range in.Blocks {
		all = append(all, entry{headEntry, i})
		for range b.Rows {
			all = append(all, entry{rowEntry, row})
			row++
		}
		if b.Pooled != nil {
			all = append(all, entry{subtotalEntry, i})
		}
	}
	for ; row < len(in.Rows); row++ {
		all = append(all, entry{rowEntry, row})
	}
	return all
}

// validateBlocks refuses blocks that do not hold the rows, and numbers that no axis
// can hold.
func (in *ForestInput) validateBlocks() error {
	if in.Blocks == nil {
		return nil
	}
	total := 0
	for _, b := range in.Blocks {
		where := fmt.Sprintf("block %q", Clean(b.Name))
		if b.Rows < 1 || !(0 <= b.Weight && b.Weight <= 1) {
			return fmt.Errorf("forest chart: %s: %d rows of weight %v; give a row or more, and a weight from 0 to 1", where, b.Rows, b.Weight)
		}
		total += b.Rows
		if p := b.Pooled; p != nil {
			if err := in.checks().result(where, p.Estimate, p.Low, p.High, p.LnEvidence); err != nil {
				return err
			}
		}
	}
	if total != len(in.Rows) {
		return fmt.Errorf("forest chart: blocks of %d rows for %d rows", total, len(in.Rows))
	}
	return nil
}

// cleanBlocks returns a copy whose texts may stand in a drawing.
func cleanBlocks(blocks []ForestBlock) []ForestBlock {
	if blocks == nil {
		return nil
	}
	clean := make([]ForestBlock, len(blocks))
	for i, b := range blocks {
		b.Name = Clean(b.Name)
		clean[i] = b
	}
	return clean
}

// subtotalRows returns the pooled results of the blocks as rows without weight, for
// what looks at every estimate.
func (in *ForestInput) subtotalRows() []ForestRow {
	var rows []ForestRow
	for _, b := range in.Blocks {
		if p := b.Pooled; p != nil {
			rows = append(rows, ForestRow{Estimate: p.Estimate, Low: p.Low, High: p.High, LnEvidence: p.LnEvidence, Unwanted: p.Unwanted})
		}
	}
	return rows
}

// blocks adapts the sizes to blocks, whose heads and gaps group the rows.
func (m *metrics) blocks(blocks []ForestBlock) {
	if blocks != nil {
		m.grouped = false
	}
}

// subtotalTexts writes the texts of the subtotals, one for each block.
func (f *forest) subtotalTexts() {
	for _, b := range f.in.Blocks {
		t := rowText{indent: blockIndent, weight: weightText(b.Weight)}
		if p := b.Pooled; p != nil {
			t.fullName = "Pooled, " + words.Count(p.K) + " " + f.in.plural(p.K)
			t.setNumbers(f.in.Scale, p.Estimate, p.Low, p.High, p.LnEvidence)
		}
		t.name = t.fullName
		f.subtotals = append(f.subtotals, t)
	}
}

// widestName is the width of the widest name of the rows and of the blocks.
func (f *forest) widestName(rows []rowText, size float64) float64 {
	most := 0.0
	for _, r := range rows {
		most = max(most, r.indent+Width(r.fullName, size, r.bold))
	}
	for _, b := range f.in.Blocks {
		most = max(most, Width(b.Name, size, true))
	}
	return most
}

// tops returns the upper ends of the entries of a page and the lower end of the last.
func (f *forest) tops(p pageRange) (tops []float64, end float64) {
	m := f.metrics
	full, short, gaps := 0, 0, 0.0 // entries so far by their height, and what lies between
	at := func() float64 {
		return f.heads.rowsTop + float64(full)*m.pitch + gaps + float64(short)*f.entryHeight(entry{kind: headEntry})
	}
	for i, e := range f.entries[p.from:p.to] {
		switch {
		case m.grouped:
			gaps = groupGap * float64(i/5)
		case i > 0 && e.kind == headEntry:
			gaps += blockGap
		}
		tops = append(tops, at())
		if e.kind == headEntry {
			short++
		} else {
			full++
		}
	}
	return tops, at()
}

// entryHeight is the height of an entry: of two lines, but for heads.
func (f *forest) entryHeight(e entry) float64 {
	if f.metrics.twoLine && e.kind == headEntry {
		return 1.5 * f.metrics.row
	}
	return f.metrics.pitch
}

// centre returns the middle of an entry from its upper end on; of two lines the middle
// of the first.
func (f *forest) centre(e entry, top float64) float64 {
	if f.metrics.twoLine && e.kind != headEntry {
		return top + 5.65*f.metrics.row/7.25
	}
	return top + f.entryHeight(e)/2
}

// pageRanges shares the entries out over pages of so many at most; no page ends in
// the head of a block.
func (f *forest) pageRanges(per int) []pageRange {
	var ranges []pageRange
	k := len(f.entries)
	for from := 0; from < k; {
		to := min(from+per, k)
		for to < k && to > from+1 && f.entries[to-1].kind == headEntry {
			to--
		}
		ranges = append(ranges, pageRange{number: len(ranges) + 1, from: from, to: to, last: to == k})
		from = to
	}
	return ranges
}

// blockHead draws the name of a block.
func (f *forest) blockHead(i int, y float64) Item {
	m := f.metrics
	full := f.in.Blocks[i].Name
	name := fitWord(full, f.columns.zone.low-m.margin-2, m.row, true)
	g := Group{ID: fmt.Sprintf("block-%d", i+1), Items: []Item{boldLabel(m.margin, y+baseline(m.row), m.row, Start, name)}}
	if name != full {
		g.Title = full
	}
	return g
}

// subtotal draws the pooled result of a block.
func (f *forest) subtotal(i int, y float64) Item {
	p, t := f.in.Blocks[i].Pooled, f.subtotals[i]
	g := Group{ID: fmt.Sprintf("subtotal-%d", i+1)}
	g.Items = append(g.Items, f.rowTexts(t, y, Paper)...)
	g.Items = append(g.Items, diamond(f.axis, p.Estimate, p.Low, p.High, y, blockHalf)...)
	g.Items = append(g.Items, f.rail.bar(p.LnEvidence, y, f.metrics.bar, p.Unwanted)...)
	return g
}

// diamondKey says what the diamonds are.
func (f *forest) diamondKey() string {
	if len(f.subtotals) > 0 {
		return "diamonds, pooled effect of each group and of all " + f.in.plural(2)
	}
	return "diamond, pooled effect"
}

// describeEntry tells an entry's numbers in words.
func (f *forest) describeEntry(e entry) string {
	if e.kind == headEntry {
		return "group " + f.in.Blocks[e.index].Name
	}
	var b strings.Builder
	r, t := ForestRow{}, rowText{}
	if e.kind == subtotalEntry {
		block := f.in.Blocks[e.index]
		p := block.Pooled
		r, t = ForestRow{Estimate: p.Estimate, Low: p.Low, High: p.High, LnEvidence: p.LnEvidence, Weight: block.Weight}, f.subtotals[e.index]
	} else {
		r, t = f.in.Rows[e.index], f.rows[e.index]
	}
	b.WriteString(t.fullName)
	for arm, c := range t.counts {
		if c.Total != "" {
			fmt.Fprintf(&b, ", %s %s of %s", f.armName(arm), c.Events, c.Total)
		}
	}
	fmt.Fprintf(&b, ", %s, weight %s, %s", f.in.estimate(r.Estimate, r.Low, r.High), words.PercentFine(r.Weight), words.Odds(r.LnEvidence))
	return b.String()
}
