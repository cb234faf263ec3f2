//go:build office

// The tests of this file need LibreOffice Calc on the path as "soffice"; run them
// by "make office". They fail without it.

package ingest

import (
	"context"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"github.com/xuri/excelize/v2"

	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// throughOffice opens a workbook in another spreadsheet program and saves it.
func throughOffice(t *testing.T, data []byte) []byte {
	t.Helper()
	folder := t.TempDir()
	before := filepath.Join(folder, "template.xlsx")
	if err := os.WriteFile(before, data, 0o600); err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithTimeout(context.Background(), 3*time.Minute)
	defer cancel()
	// A profile of its own keeps the run apart from any other.
	command := exec.CommandContext(ctx, "soffice", "-env:UserInstallation=file://"+filepath.ToSlash(filepath.Join(folder, "profile")),
		"--headless", "--convert-to", "xlsx", "--outdir", filepath.Join(folder, "saved"), before)
	command.Env = append(os.Environ(), "HOME="+folder)
	if out, err := command.CombinedOutput(); err != nil {
		t.Fatalf("soffice: %v\n%s", err, out)
	}
	after, err := os.ReadFile(filepath.Join(folder, "saved", "template.xlsx"))
	if err != nil {
		t.Fatal(err)
	}
	return after
}

// TestOfficeKeepsTheTemplate: saved by another spreadsheet program, a filled
// template keeps its lists, limits, comments and numbers, and reads without a
// finding.
func TestOfficeKeepsTheTemplate(t *testing.T) {
	kinds := []Kind{Counts, Estimates}
	data, err := Template(effect.RiskRatio, kinds...)
	if err != nil {
		t.Fatal(err)
	}
	saved := throughOffice(t, fill(t, data, effect.RiskRatio, kinds, 2, 3, 7))
	f := opened(t, saved)
	checkDropDowns(t, f)
	comments, err := f.GetComments(studiesSheet)
	if err != nil {
		t.Fatal(err)
	}
	fields, err := templateFields(effect.RiskRatio, kinds)
	if err != nil {
		t.Fatal(err)
	}
	for i, field := range fields {
		at := slices.IndexFunc(comments, func(c excelize.Comment) bool { return c.Cell == cellAt(i+1, 1) })
		if at < 0 || !strings.Contains(commentText(comments[at]), helpFor(field, effect.RiskRatio).text) {
			t.Errorf("the comment on %s is lost", field)
		}
	}
	x, plan, err := Read(context.Background(), saved, "saved.xlsx", Options{})
	if err != nil {
		t.Fatal(err)
	}
	for _, finding := range x.Findings {
		t.Errorf("%s at %s: %s", finding.Rule, finding.Place, finding.Message)
	}
	if len(x.Studies) != 3 || x.Studies[2].Row.Row != 7 {
		t.Fatalf("%d studies, want those of rows 2, 3 and 7", len(x.Studies))
	}
	checkFilled(t, &x.Studies[1], effect.RiskRatio, kinds)
	if v := plan.Value(review.SettingMeasure, ""); v.Text != "risk ratio" || len(plan.Runs) != 0 {
		t.Errorf("the plan's measure is %q, its runs %+v", v.Text, plan.Runs)
	}
}

// commentText joins the runs of a comment.
func commentText(c excelize.Comment) string {
	text := c.Text
	for _, run := range c.Paragraph {
		text += run.Text
	}
	return text
}

// TestOfficeKeepsOtherMeasures: so do the numbers of templates with every column
// that other measures have.
func TestOfficeKeepsOtherMeasures(t *testing.T) {
	for _, m := range []effect.Measure{effect.StandardisedMeanDifference, effect.HazardRatio, effect.Proportion} {
		kinds := KindsOf(m)
		data, err := Template(m, kinds...)
		if err != nil {
			t.Fatal(err)
		}
		x, _, err := Read(context.Background(), throughOffice(t, fill(t, data, m, kinds, 2, 3)), "saved.xlsx", Options{})
		if err != nil || len(x.Findings) != 0 || len(x.Studies) != 2 {
			t.Fatalf("%s: %v, %+v", m, err, x)
		}
		checkFilled(t, &x.Studies[1], m, kinds)
	}
}
