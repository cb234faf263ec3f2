package audit

import (
	"slices"
	"strings"
	"testing"

	"steelyard/meta/review"
)

// TestWrappedRows: a row is as high as its tallest text, in whichever column that
// stands. A text of three columns' widths in digits takes three lines or more where
// letters take at most a tenth less room than digits, as in the faces of the workbook.
func TestWrappedRows(t *testing.T) {
	x := sheetFrom(t, checks+"/bcg_lor.csv")
	x.Findings = []review.Finding{
		{Severity: review.Note, Rule: "C1", Message: strings.Repeat("seven w ", 3*80/8)},
		{Severity: review.Note, Rule: "C2", Message: "short"},
	}
	data, _ := written(t, x, map[string]string{"measure": "odds ratio"})
	f := opened(t, data)
	rows, err := f.GetRows("findings")
	if err != nil {
		t.Fatal(err)
	}
	for i, row := range rows {
		height, err := f.GetRowHeight("findings", i+1)
		if err != nil {
			t.Fatal(err)
		}
		switch {
		case slices.Contains(row, "C1") && height < 3*lineHeight:
			t.Errorf("the row of a long message is %v points high", height)
		case slices.Contains(row, "C2") && height > 2*lineHeight:
			t.Errorf("the row of a short message is %v points high", height)
		}
	}
}

// TestPlanDates: the date beside a setting stands in the sheet of the plan.
func TestPlanDates(t *testing.T) {
	x, plan := sheetFrom(t, checks+"/bcg_lor.csv"), &review.Plan{}
	value := review.Value{Text: "0.8", From: review.FromSheet, Reason: "agreed", Date: review.Date{Year: 2024, Month: 9, Day: 16}}
	if err := plan.Set("important", "", value); err != nil {
		t.Fatal(err)
	}
	data, _ := planned(t, x, plan)
	rows, err := opened(t, data).GetRows("plan")
	if err != nil {
		t.Fatal(err)
	}
	for _, row := range rows {
		if len(row) > 1 && row[1] == "important" {
			if row[len(row)-1] != "2024-09-16" {
				t.Errorf("%q", row)
			}
			return
		}
	}
	t.Error("the plan does not list the important difference")
}
