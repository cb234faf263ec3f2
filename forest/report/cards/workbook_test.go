package cards

import (
	"bytes"
	"context"
	"math"
	"strconv"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"

	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// carded pools two invented studies of one outcome, whose name a spreadsheet could take
// for a formula, and judges it.
func carded(t *testing.T) *synthesis.Synthesis {
	t.Helper()
	const outcome = "=1+1"
	x := &review.Extraction{Source: review.Source{File: "t.csv"}}
	for i, c := range [][4]float64{{10, 100, 20, 100}, {15, 120, 22, 110}} {
		study := review.Study{Name: "A", Outcome: outcome, Row: review.Place{File: "t.csv", Row: i + 2}}
		for j, field := range []review.Field{review.EventsTreated, review.TotalTreated, review.EventsControl, review.TotalControl} {
			study.Numbers = append(study.Numbers, review.Number{Field: field, Value: c[j], Place: review.Spot{Row: i + 2, Col: j + 1}})
		}
		x.Studies = append(x.Studies, study)
	}
	x.Judgements = []review.Judgement{{Outcome: outcome, Domain: review.DomainCertainty, Rating: "+moderate", Reason: "@reason", By: "=cmd", Date: review.Date{Year: 2024}}}
	plan := &review.Plan{}
	for setting, value := range map[string]string{"measure": "risk ratio", "baseline": "low 0.2", "better": "lower", "important-per-1000": "20"} {
		if err := plan.Set(setting, "", review.Value{Text: value, From: review.FromSheet}); err != nil {
			t.Fatal(err)
		}
	}
	s, err := synthesis.Run(context.Background(), x, plan, synthesis.Want{Further: synthesis.Further{Panel: &synthesis.PanelWanted{}}})
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// TestWorkbook reads the workbook back: the card's words, the panel's rating as typed,
// numbers as numbers, and nothing that is a formula.
func TestWorkbook(t *testing.T) {
	s := carded(t)
	data, err := Workbook(s)
	if err != nil {
		t.Fatal(err)
	}
	again, err := Workbook(s)
	if err != nil || !bytes.Equal(data, again) {
		t.Errorf("the same cards give other bytes, %v", err)
	}
	f, err := excelize.OpenReader(bytes.NewReader(data))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := f.GetRows(cardsSheet)
	if err != nil {
		t.Fatal(err)
	}
	var all []string
	for i, row := range rows {
		all = append(all, strings.Join(row, "|"))
		for j := range row {
			if formula, err := f.GetCellFormula(cardsSheet, cell(j+1, i+1)); err != nil || formula != "" {
				t.Errorf("%s holds the formula %q, %v", cell(j+1, i+1), formula, err)
			}
		}
	}
	text := strings.Join(all, "\n")
	for _, want := range []string{"=1+1", "certainty||+moderate|@reason (=cmd, 2024)", "domain|numbers|panel's rating|panel's reason", "not yet rated", "low, 200 per 1000|", "Cautions"} {
		if !strings.Contains(text, want) {
			t.Errorf("%q is missing from:\n%s", want, text)
		}
	}
	r := s.Outcomes[0].Panel.Rows[0]
	for at, want := range map[string]float64{"C2": 0.2, "D2": r.Absolute.Treated.Value, "H2": 1000 * r.Absolute.Difference.Low, "J2": r.Needed.Value, "K2": -20, "P2": r.Information.Total()} {
		var got float64
		value, err := f.GetCellValue(numbersSheet, at, excelize.Options{RawCellValue: true})
		if kind, _ := f.GetCellType(numbersSheet, at); err == nil && kind != excelize.CellTypeSharedString {
			got, err = strconv.ParseFloat(value, 64)
		}
		if err != nil || math.Abs(got-want) > 1e-12*math.Abs(want) {
			t.Errorf("%s is %q, want %v, %v", at, value, want, err)
		}
	}
	if name, err := f.GetCellValue(numbersSheet, "A2"); err != nil || name != "=1+1" {
		t.Errorf("the outcome is %q, %v", name, err)
	}
}

// TestRowHeights: each row of a card is high enough for its texts. A column holds no
// more than a tenth more letters than its width in digits, and a line of ten points
// takes twelve or more.
func TestRowHeights(t *testing.T) {
	data, err := Workbook(carded(t))
	if err != nil {
		t.Fatal(err)
	}
	f, err := excelize.OpenReader(bytes.NewReader(data))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := f.GetRows(cardsSheet)
	if err != nil {
		t.Fatal(err)
	}
	tall := 0
	for i, row := range rows {
		height, err := f.GetRowHeight(cardsSheet, i+1)
		if err != nil {
			t.Fatal(err)
		}
		for j, text := range row {
			width, err := f.GetColWidth(cardsSheet, review.ColumnLetters(j+1))
			if err != nil {
				t.Fatal(err)
			}
			need := 0.
			for _, paragraph := range strings.Split(text, "\n") {
				need += math.Ceil(float64(len([]rune(paragraph))) / (1.1 * width))
			}
			if need > 1 {
				tall++
			}
			if height < 12*need {
				t.Errorf("row %d is %v points high for %v lines: %q", i+1, height, need, text)
			}
		}
	}
	if tall < 10 {
		t.Errorf("only %d texts are longer than a line", tall)
	}
}
