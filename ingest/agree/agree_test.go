package agree

import (
	"bytes"
	"context"
	"fmt"
	"maps"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"

	"steelyard/ingest"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

func read(t *testing.T, data []byte, name string) (*review.Extraction, *review.Plan) {
	t.Helper()
	x, plan, err := ingest.Read(context.Background(), data, name, ingest.Options{})
	if err != nil {
		t.Fatal(err)
	}
	return x, plan
}

func pooled(t *testing.T, x *review.Extraction, plan *review.Plan) *synthesis.Synthesis {
	t.Helper()
	s, err := synthesis.Run(context.Background(), x, plan, synthesis.Want{})
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// Two invented extractions of five studies: the first row is the same but for spelling,
// the second differs by rounding, the third by a digit, the fourth by a slip that
// matters, and each sheet has a row of its own.
const (
	firstSheet = "study,year,odds ratio,ci low,ci high,risk of bias,note\n" +
		"Ahlgren (2001),2001,0.71,0.49,1.02,low,x\nBecker 2004,2004,0.8,0.52,1.25,low,\nCastro 2007,2007,0.64,0.43,0.95,low,\nDubois 2010,2010,0.89,0.65,1.21,high,\nEriksen 2013,2013,0.74,0.45,1.21,low,\n"
	secondSheet = "study,year,odds ratio,ci low,ci high,risk of bias,note\n" +
		"AHLGREN 2001,2001,0.71,0.49,1.02,low,y\nBecker 2004,2004,0.81,0.52,1.25,low,\nCastro 2007,2007,0.64,0.43,0.94,low,\nDubois 2010,2010,0.69,0.50,0.94,some concerns,\nFontaine 2016,2016,0.77,0.53,1.12,low,\n"
)

func compared(t *testing.T) (*Comparison, *review.Plan) {
	t.Helper()
	x, plan := read(t, []byte(firstSheet), "first.csv")
	y, _ := read(t, []byte(secondSheet), "second.csv")
	c := Compare(x, y)
	c.Weigh(pooled(t, x, plan), pooled(t, y, plan))
	return c, plan
}

// TestCompare wants each pair to be told apart as the sheets above say.
func TestCompare(t *testing.T) {
	c, _ := compared(t)
	want := []struct {
		name  string
		cells string
		large bool
	}{
		{"Dubois 2010", "differs ci high; differs ci low; differs estimate; differs risk of bias", true},
		{"Castro 2007", "differs ci high", false},
		{"Becker 2004", "rounding estimate", false},
		{"Ahlgren (2001)", "", false},
	}
	if len(c.Pairs) != len(want) || len(c.OnlyFirst) != 1 || len(c.OnlySecond) != 1 || c.OnlyFirst[0].Name != "Eriksen 2013" || c.OnlySecond[0].Name != "Fontaine 2016" {
		t.Fatalf("%d pairs, only first %v, only second %v", len(c.Pairs), c.OnlyFirst, c.OnlySecond)
	}
	for i, w := range want {
		p := c.Pairs[i]
		seen := map[string]bool{}
		for _, cell := range p.Cells {
			seen[cell.Kind.String()+" "+cell.Header] = true
		}
		all := strings.Split(w.cells, "; ")
		if w.cells == "" {
			all = nil
		}
		for _, cell := range all {
			if !seen[cell] {
				t.Errorf("%s: no cell %q in %v", w.name, cell, p.Cells)
			}
		}
		if p.First.Name != w.name || len(p.Cells) != len(all) || p.Large != w.large {
			t.Errorf("pair %d: %s, %d cells, large %v; want %+v", i, p.First.Name, len(p.Cells), p.Large, w)
		}
	}
}

// TestSameEffect wants a row that differs in a text alone not to set its effect against
// itself.
func TestSameEffect(t *testing.T) {
	x, plan := read(t, []byte(firstSheet), "first.csv")
	y, _ := read(t, []byte(strings.Replace(firstSheet, "1.21,high", "1.21,low", 1)), "second.csv")
	c := Compare(x, y)
	c.Weigh(pooled(t, x, plan), pooled(t, y, plan))
	if all := c.Findings(); len(all) != 1 || !strings.HasSuffix(all[0].Message, "risk of bias high against low") {
		t.Errorf("findings %v, want one that ends with the judgements", all)
	}
}

// TestReadings wants the pooled answer under either extraction of a row: by the second
// it is that of the first sheet with this row's numbers typed over.
func TestReadings(t *testing.T) {
	c, plan := compared(t)
	x := *c.First
	x.Findings = append(x.Findings, c.Findings()...)
	s := pooled(t, &x, plan)
	typedOver := strings.Replace(firstSheet, "0.89,0.65,1.21,high", "0.69,0.50,0.94,high", 1)
	want := pooled(t, first(read(t, []byte(typedOver), "a.csv")), plan).Outcomes[0].Result.Fit.Mean
	found := false
	for _, r := range s.Readings {
		if s.Findings[r.Finding].Study == "Dubois 2010" && r.Label == "by the second sheet" {
			found = true
			if got := r.Outcome.Result.Fit.Mean; got.Estimate != want.Estimate || got.SE != want.SE {
				t.Errorf("by the second sheet %v (%v), want %v (%v)", got.Estimate, got.SE, want.Estimate, want.SE)
			}
		}
	}
	if !found {
		t.Errorf("no reading of Dubois by the second sheet among %d", len(s.Readings))
	}
}

func first(x *review.Extraction, _ *review.Plan) *review.Extraction { return x }

// TestWorkbook wants the workbook to read back with an error for each unsettled number
// and, once they are typed over, as the agreed sheet.
func TestWorkbook(t *testing.T) {
	c, plan := compared(t)
	data, err := c.Workbook(plan)
	if err != nil {
		t.Fatal(err)
	}
	x, _ := read(t, data, "settle.xlsx")
	open, texts := 0, 0
	for _, f := range x.Findings {
		if f.Severity == review.Error {
			open++
		} else if f.Rule == "A9" {
			texts++
		}
		if (f.Severity == review.Error || f.Rule == "A9") && !strings.Contains(f.Message, "what two extractions say") {
			t.Errorf("%s does not say what the cell holds: %s", f.Place, f.Message)
		}
	}
	if texts != 1 {
		t.Errorf("%d unsettled texts are reported, want the risk of bias of Dubois", texts)
	}
	if len(x.Studies) != 6 || open != 4 { // the limit of Castro, three numbers of Dubois
		t.Errorf("%d rows with %d errors, want 6 with 4: %v", len(x.Studies), open, x.Findings)
	}
	f, err := excelize.OpenReader(bytes.NewReader(data))
	if err != nil {
		t.Fatal(err)
	}
	rows, err := f.GetRows("studies")
	if err != nil {
		t.Fatal(err)
	}
	for i, row := range rows {
		for j, text := range row {
			if mine, _, unsettled := strings.Cut(text, " | "); unsettled {
				if err := f.SetCellValue("studies", cellName(j+1, i+1), mine); err != nil {
					t.Fatal(err)
				}
			}
		}
	}
	settled, err := f.WriteToBuffer()
	if err != nil {
		t.Fatal(err)
	}
	agreed, _ := read(t, settled.Bytes(), "settle.xlsx")
	again := Compare(c.First, agreed)
	for _, p := range again.Pairs {
		if p.Differing() {
			t.Errorf("%s: settled by the first sheet, it differs from it: %+v", p.First.Name, p.Cells)
		}
	}
	if len(again.OnlyFirst) != 0 || len(again.OnlySecond) != 1 {
		t.Errorf("only first %d, only agreed %d; want 0 and 1", len(again.OnlyFirst), len(again.OnlySecond))
	}
	list, err := f.GetRows("disagreements")
	if err != nil || len(list) != 1+4+1+1+2 {
		t.Errorf("%d lines of disagreements (%v), want 9: the head, 4 cells of Dubois, 1 of Castro, 1 of Becker and 2 rows", len(list), err)
	}
}

// TestIdentical wants nothing of a sheet compared with itself.
func TestIdentical(t *testing.T) {
	x, _ := read(t, []byte(firstSheet), "a.csv")
	y, _ := read(t, []byte(firstSheet), "b.csv")
	c := Compare(x, y)
	if f := c.Findings(); len(f) != 0 || len(c.Pairs) != 5 {
		t.Errorf("%d pairs, findings %v", len(c.Pairs), f)
	}
}

// TestWorkbookKeepsThePlan wants the settings and runs of the first sheet's plan to read
// back from the workbook as they were.
func TestWorkbookKeepsThePlan(t *testing.T) {
	f := excelize.NewFile()
	for _, sheet := range []struct {
		name string
		rows [][]any
	}{
		{"Sheet1", [][]any{{"study", "outcome", "odds ratio", "ci low", "ci high"}, {"Ahlgren 2001", "Pain (12 weeks)", 0.71, 0.49, 1.03}, {"Becker 2004", "Pain (12 weeks)", 0.8, 0.52, 1.23}}},
		{"plan", [][]any{{"setting", "value", "outcome", "reason"}, {"tau", "paule-mandel", "", "protocol"}, {"important", "0.8", "Pain (12 weeks)", "panel of May"}, {"run", "low risk: risk of bias is low", "", ""}}},
	} {
		if _, err := f.NewSheet(sheet.name); err != nil {
			t.Fatal(err)
		}
		for i, row := range sheet.rows {
			if err := f.SetSheetRow(sheet.name, fmt.Sprintf("A%d", i+1), &row); err != nil {
				t.Fatal(err)
			}
		}
	}
	book, err := f.WriteToBuffer()
	if err != nil {
		t.Fatal(err)
	}
	x, plan := read(t, book.Bytes(), "first.xlsx")
	data, err := Compare(x, x).Workbook(plan)
	if err != nil {
		t.Fatal(err)
	}
	_, agreed := read(t, data, "settle.xlsx")
	for _, setting := range []string{"tau", "important", "seed"} {
		for _, outcome := range []string{"", "Pain (12 weeks)"} {
			was, is := plan.Value(setting, outcome), agreed.Value(setting, outcome)
			if was.Text != is.Text || was.From != is.From || was.Reason != is.Reason {
				t.Errorf("%s of %q: %+v, want %+v", setting, outcome, is, was)
			}
		}
	}
	if len(plan.Runs) != 1 || len(agreed.Runs) != 1 || agreed.Runs[0].Name != plan.Runs[0].Name || !maps.Equal(agreed.Runs[0].Changes, plan.Runs[0].Changes) {
		t.Errorf("runs %+v, want %+v", agreed.Runs, plan.Runs)
	}
}
