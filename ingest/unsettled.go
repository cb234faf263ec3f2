package ingest

import (
	"regexp"
	"strings"

	"steelyard/meta/review"
)

// settlingSheet is the sheet of a workbook in which two extractions are settled that
// lists what they differ in, and settlingBar what parts their texts in a cell.
const (
	settlingSheet = "disagreements"
	settlingBar   = " | "
)

// twoNumbers is what a cell to be settled holds where a number belongs.
var twoNumbers = regexp.MustCompile(`^([-+−]?[\d.,]+|nothing) \| ([-+−]?[\d.,]+|nothing)$`)

// settle says what to do with a text of two extractions.
const settle = " holds what two extractions say; settle which is right, and write that alone"

// warnUnsettled reports a text of context that two extractions still differ in: read
// as it stands, no filter or subgroup would see either of the two.
func (r *rowReader) warnUnsettled(col int, text string) {
	if !strings.Contains(text, settlingBar) {
		return
	}
	for i := range r.t.book.Sheets {
		if r.t.book.Sheets[i].Name == settlingSheet {
			r.find(review.Warning, "A9", col, quote(text)+settle)
			return
		}
	}
}
