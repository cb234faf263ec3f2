package layout

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"
)

// inBlocks shares the rows of a chart out over blocks of so many, each with the mean of
// its rows as pooled effect; the last has none.
func inBlocks(in ForestInput, sizes ...int) ForestInput {
	from := 0
	for i, n := range sizes {
		b := ForestBlock{Name: fmt.Sprintf("Setting %d, where care is given in the usual way", i+1), Rows: n}
		p := &ForestPooled{K: n, LnEvidence: float64(i) - 0.3}
		for _, r := range in.Rows[from : from+n] {
			b.Weight += r.Weight
			p.Estimate, p.Low, p.High = p.Estimate+r.Estimate/float64(n), p.Low+r.Low/float64(n), p.High+r.High/float64(n)
		}
		b.Weight = min(b.Weight, 1)
		if from += n; i < len(sizes)-1 {
			b.Pooled = p
		}
		in.Blocks = append(in.Blocks, b)
	}
	return in
}

func TestForestBlocksNothingOverlaps(t *testing.T) {
	for name, in := range map[string]ForestInput{
		"nine":   inBlocks(nineTrials(), 4, 3, 2),
		"single": inBlocks(nineTrials(), 1, 7, 1),
		"thirty": inBlocks(manyTrials(30), 10, 12, 8),
		"ninety": inBlocks(manyTrials(90), 35, 5, 1, 20, 29),
	} {
		for _, style := range []ForestStyle{{}, {Width: NarrowWidth}, {Width: 400, NoTitle: true}, {Width: NarrowWidth, TypeSize: 8.3}} {
			doc := mustForest(t, in, style)
			heads, rows, subtotals := 0, 0, 0
			for i, page := range doc.Pages {
				checkPage(t, fmt.Sprintf("%s, style %+v, page %d", name, style, i+1), page)
				if page.Height > maxPageHeight {
					t.Errorf("%s: page of %.0f pt, at most %.0f", name, page.Height, maxPageHeight)
				}
				items := group(t, page, "trials").Items
				for j, it := range items {
					switch id := it.(Group).ID; {
					case strings.HasPrefix(id, "block-"):
						heads++
						if j == len(items)-1 {
							t.Errorf("%s: page %d ends in the head of a block", name, i+1)
						}
					case strings.HasPrefix(id, "row-"):
						rows++
					default:
						subtotals++
					}
				}
			}
			if n := len(in.Blocks); heads != n || rows != len(in.Rows) || subtotals != n-1 {
				t.Errorf("%s: %d heads, %d rows and %d subtotals for %d blocks of %d rows", name, heads, rows, subtotals, n, len(in.Rows))
			}
		}
	}
}

// TestForestBlockPlaces: a block's diamond reaches from limit to limit, is 7 pt high
// (STYLE section 7), its weight is that of its rows, and its names are indented by 6.
func TestForestBlockPlaces(t *testing.T) {
	in := inBlocks(nineTrials(), 4, 3, 2)
	page := mustForest(t, in, ForestStyle{}).Pages[0]
	place := axisOf(t, page, false)
	for i, b := range in.Blocks[:2] {
		items := group(t, page, fmt.Sprintf("subtotal-%d", i+1)).Items
		shape := polygonsOf(items, Estimate)[0].Points
		left, right, top, bottom := math.Inf(1), math.Inf(-1), math.Inf(1), math.Inf(-1)
		for _, p := range shape {
			left, right, top, bottom = min(left, p.X), max(right, p.X), min(top, p.Y), max(bottom, p.Y)
		}
		if math.Abs(left-place(b.Pooled.Low)) > 0.02 || math.Abs(right-place(b.Pooled.High)) > 0.02 || math.Abs(bottom-top-7) > 1e-9 {
			t.Errorf("diamond from %.2f to %.2f, %.2f high; want %.2f to %.2f, 7 high", left, right, bottom-top, place(b.Pooled.Low), place(b.Pooled.High))
		}
		if texts := textsOf(items); !slices.Contains(texts, weightText(b.Weight)) || !slices.Contains(texts, fmt.Sprintf("Pooled, %d trials", b.Rows)) {
			t.Errorf("subtotal of %q", texts)
		}
	}
	head := group(t, page, "block-1").Items[0].(Text)
	row := group(t, page, "row-1").Items[0].(Text)
	if indent := row.Spans[0].X - head.Spans[0].X; indent != 6 || !head.Spans[0].Bold {
		t.Errorf("names are indented by %v, head bold: %v", indent, head.Spans[0].Bold)
	}
	if !strings.Contains(page.Description, "group Setting 2") {
		t.Errorf("description %q", page.Description)
	}
}

func TestForestBlocksThatDoNotHoldTheRows(t *testing.T) {
	good := inBlocks(nineTrials(), 4, 3, 2)
	for name, change := range map[string]func(*ForestInput){
		"too few": func(in *ForestInput) { in.Blocks = in.Blocks[:2] },
		"empty":   func(in *ForestInput) { in.Blocks[0].Rows, in.Blocks[1].Rows = 0, 7 },
		"weight":  func(in *ForestInput) { in.Blocks[0].Weight = math.NaN() },
		"limit":   func(in *ForestInput) { in.Blocks[0].Pooled.High = math.Inf(1) },
	} {
		in := good
		in.Blocks = slices.Clone(good.Blocks)
		p := *good.Blocks[0].Pooled
		in.Blocks[0].Pooled = &p
		change(&in)
		if _, err := Forest(in, ForestStyle{}); err == nil || !strings.Contains(err.Error(), "block") {
			t.Errorf("%s: error %v", name, err)
		}
	}
}
