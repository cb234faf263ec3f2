package ingest

import (
	"fmt"

	"steelyard/ingest/grid"
	"steelyard/meta/choice"
	"steelyard/meta/review"
)

// armHeaders head a column that says which arm a row is about, as choice.Fold
// writes them.
var armHeaders = map[string]bool{"group": true, "arm": true, "treatment": true, "treatment-group": true, "treatment-arm": true, "study-group": true, "study-arm": true,
	"intervention": true, "allocation": true, "gruppe": true, "groupe": true, "grupo": true}

// mostArmRows is how many rows are looked at to tell a layout.
const mostArmRows = 1000

// armRows explains a table with one row for each arm of a study, which is not the
// layout that is read; blank for any other table. Such a table has a column that
// names the arm, and in every study two rows or more with different arms.
func armRows(s *grid.Sheet, h *header) string {
	arm, name := 0, h.column(review.StudyName)
	for i, c := range h.columns {
		if arm == 0 && armHeaders[choice.Fold(c.Header)] {
			arm = i + 1
		}
	}
	if arm == 0 || name == 0 || h.speaksOfArms() {
		return ""
	}
	arms := map[string]map[string]bool{}
	var first []string // arms of the first study
	study := ""
	rows := s.Rows[h.bottom+1:]
	for i := range rows[:min(mostArmRows, len(rows))] {
		if text := tidy(rows[i].Cell(name).Text); text != "" {
			study = review.FoldName(text)
		}
		text := tidy(rows[i].Cell(arm).Text)
		if text == "" || study == "" {
			continue
		}
		if arms[study] == nil {
			arms[study] = map[string]bool{}
		}
		if len(arms) == 1 && !arms[study][choice.Fold(text)] {
			first = append(first, text)
		}
		arms[study][choice.Fold(text)] = true
	}
	for _, of := range arms {
		if len(of) < 2 {
			return ""
		}
	}
	if len(first) < 2 {
		return ""
	}
	return fmt.Sprintf("the sheet seems to have one row for each arm (%s: %s), while one row for each study is read: put the arms of a study side by side, with columns such as events treated, total treated, events control and total control",
		quote(h.columns[arm-1].Header), quoteList(first))
}

// speaksOfArms reports whether a column is that of one arm or of a comparison.
func (h *header) speaksOfArms() bool {
	for field := range h.fields() {
		if fieldSide(field) != noSide || field == review.Estimate || field == review.AnalysisEstimate {
			return true
		}
	}
	return false
}

// warnOfArmRows warns of rows of single arms that can be read, as results of one
// arm.
func (t *tableReader) warnOfArmRows() {
	if message := armRows(t.sheet, t.header); message != "" {
		t.find(review.Warning, "F9", t.place(0, 0, ""), "", message+"; as it stands each row is read as a result of one arm")
		t.armRows = true
	}
}
