package ingest

import (
	"strings"

	"steelyard/meta/review"
)

// guideLines introduce the guide; the columns of "studies" follow them.
var guideLines = [][2]string{
	{"studies", "One row for each study and outcome, from row 2 on. A cell that the report says nothing about stays blank: blank means not reported, 0 means none. Columns may be moved, left out or added; an added one can be used to choose rows."},
	{"plan", "How the answer is to be made, best filled in before the numbers are seen. A blank value means the default."},
	{"judgement", "The panel's ratings of certainty with their reasons. No number depends on them."},
	{"then", "steelyard pool FILE names every cell that cannot be right, and pools the rest."},
}

// writeGuide explains the sheets and each column.
func (t *templateWriter) writeGuide() {
	t.row(guideSheet, 1, t.title())
	t.do(t.f.SetCellStyle(guideSheet, "A1", "A1", t.heading))
	row := 3
	line := func(texts ...string) {
		t.row(guideSheet, row, texts...)
		row++
	}
	line("sheet", "what it is for")
	t.do(t.f.SetCellStyle(guideSheet, "A3", "B3", t.header))
	for _, l := range guideLines {
		line(l[0], l[1])
	}
	row++
	t.do(t.f.SetCellStyle(guideSheet, cellAt(1, row), cellAt(4, row), t.header))
	line("column of studies", "what to write", "example", "usual words")
	for _, f := range t.fields {
		help := helpFor(f, t.measure)
		line(f.String(), help.text, help.example, strings.Join(help.choices, ", "))
	}
	for col, width := range []float64{20, 84, 26, 44} {
		t.column(guideSheet, col+1, width, 0)
	}
	t.do(t.f.SetCellStyle(guideSheet, "A4", cellAt(4, 3+len(guideLines)), t.wrap))
	t.do(t.f.SetCellStyle(guideSheet, cellAt(1, row-len(t.fields)), cellAt(4, row-1), t.wrap))
}

// writeJudgement writes the sheet of the panel's ratings.
func (t *templateWriter) writeJudgement() {
	t.headerRow(judgementSheet, 0, "outcome", "domain", "rating", "reason", "by", "date")
	for col, width := range []float64{26, 22, 14, 60, 18, 12} {
		t.column(judgementSheet, col+1, width, t.text)
	}
	t.do(t.f.SetCellStyle(judgementSheet, "A1", "F1", t.header))
	for _, c := range [][2]string{
		{"A1", "The outcome, spelt as on the sheet studies."},
		{"B1", "What is judged. Randomised studies start high, others low; certainty is the level that results."},
		{"C1", "A level for start and certainty; for the others how far they move it. Other words may stand here too. Do not move it twice for one cause."},
		{"D1", "Why. A rating without a reason does not count."},
		{"E1", "Who judged."},
		{"F1", "When: year-month-day."},
	} {
		t.comment(judgementSheet, c[0], c[1])
	}
	rows := func(col int) string { return cellAt(col, 2) + ":" + cellAt(col, 500) }
	t.dropDown(judgementSheet, rows(2), review.DomainNames(), false)
	t.dropDown(judgementSheet, rows(3), review.RatingNames(), true)
}
