package rules_test

import (
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"steelyard/meta/review"
)

// explained are the warnings about published data, and about the invented demo
// review, each with why it is right to give it. Sources of the data: testdata/README.md.
var explained = map[string]map[string]string{
	"bcg_counts.csv": {"A4": "the large trials of BCG vaccine found less protection than the small ones: common 0.65, random 0.49"},
	"aspirin_lor.csv": {
		"A3": "one large trial of aspirin stands against six small ones: whether there is spread at all depends on the estimator",
		"A4": "likewise: −0.11 leaves out no effect under a common effect, −0.14 does not under random ones",
	},
	"demo.xlsx": {"C8": "3 of 9 invented trials have no serious harm in an arm"},
	"magnesium.csv": {
		"A3": "the small trials of magnesium disagree so little that maximum likelihood finds no spread and the other estimators do",
		"A4": "the known case of small studies that show more than a large one: common 0.69, random 0.57",
	},
	"isis2.csv": {"C6": "one trial of four arms: its outcomes are comparisons of other arms"},
}

// TestPublished wants no error in any published data set, and only warnings that are
// explained here.
func TestPublished(t *testing.T) {
	var files []string
	for _, pattern := range []string{"checks/*_counts.csv", "checks/*_lor.csv", "checks/*_lrr.csv", "checks/eight_schools.csv", "published/*.csv", "demo.xlsx"} {
		some, err := filepath.Glob("../../testdata/" + pattern)
		if err != nil {
			t.Fatal(err)
		}
		files = append(files, some...)
	}
	if len(files) < 7 {
		t.Fatalf("only %d data sets: %q", len(files), files)
	}
	for _, file := range files {
		if strings.HasSuffix(file, ".plan.csv") {
			continue
		}
		reasons := explained[filepath.Base(file)]
		for _, f := range found(t, file) {
			switch {
			case f.Severity == review.Error:
				t.Errorf("%s: error %s at %s: %s", file, f.Rule, f.Place, f.Message)
			case f.Severity == review.Warning && reasons[f.Rule] == "":
				t.Errorf("%s: the warning %s at %s is not explained here: %s", file, f.Rule, f.Place, f.Message)
			}
		}
	}
}

// TestPublishedRatios looks at ratios with limits as published reports print them:
// rows typed from worked examples whose sources stand beside them. None may be taken
// for a slip.
func TestPublishedRatios(t *testing.T) {
	c := &clean{header: []string{"study", "hazard ratio", "ci low", "ci high"}, rows: [][]string{
		{"RALES 1999", "0.70", "0.60", "0.82"},         // death, spironolactone: Pitt et al., N Engl J Med 1999;341:709-717 (from memory)
		{"MERIT-HF 1999", "0.66", "0.53", "0.81"},      // death, metoprolol: Lancet 1999;353:2001-2007 (from memory)
		{"PARADIGM-HF 2014", "0.80", "0.73", "0.87"},   // primary outcome: McMurray et al., N Engl J Med 2014;371:993-1004 (from memory)
		{"EMPA-REG 2015", "0.62", "0.49", "0.77"},      // cardiovascular death: Zinman et al., N Engl J Med 2015;373:2117-2128 (from memory)
		{"SPRINT 2015", "0.75", "0.64", "0.89"},        // primary outcome: N Engl J Med 2015;373:2103-2116 (from memory)
		{"JUPITER 2008", "0.56", "0.46", "0.69"},       // primary outcome: Ridker et al., N Engl J Med 2008;359:2195-2207 (from memory)
		{"HOPE 2000", "0.78", "0.70", "0.86"},          // primary outcome, a relative risk: Yusuf et al., N Engl J Med 2000;342:145-153 (from memory)
		{"DAPA-HF 2019", "0.74", "0.65", "0.85"},       // primary outcome: McMurray et al., N Engl J Med 2019;381:1995-2008 (from memory)
		{"LEADER 2016", "0.87", "0.78", "0.97"},        // primary outcome: Marso et al., N Engl J Med 2016;375:311-322 (from memory)
		{"CANTOS 150 mg 2017", "0.85", "0.74", "0.98"}, // primary outcome: Ridker et al., N Engl J Med 2017;377:1119-1131 (from memory)
	}}
	for _, f := range c.read(t) {
		if slices.Contains([]string{"I1", "I2", "I3", "I4", "I6", "I17"}, f.Rule) {
			t.Errorf("%s at %s, %s: %s", f.Rule, f.Place, f.Study, f.Message)
		}
	}
}
