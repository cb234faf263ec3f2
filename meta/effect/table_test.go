package effect

import (
	"errors"
	"fmt"
	"math"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"steelyard/meta/choice"
)

// Source: bcg_lor.csv and bcg_lrr.csv, computed in 40-digit arithmetic from the
// counts of Colditz et al. (1994).
func TestFromTableAgainstBCG(t *testing.T) {
	tables := bcgTables(t)
	for _, set := range []struct {
		file    string
		measure Measure
	}{{"bcg_lor.csv", OddsRatio}, {"bcg_lrr.csv", RiskRatio}} {
		rows := records(t, set.file)
		if len(rows) != len(tables) {
			t.Fatalf("%s has %d rows, the counts %d", set.file, len(rows), len(tables))
		}
		// The study files are in order of year; match by the trial's number.
		for _, row := range rows {
			var trial int
			if _, err := fmt.Sscanf(row["study"][strings.Index(row["study"], "trial"):], "trial %d", &trial); err != nil {
				t.Fatal(err)
			}
			e, steps, err := FromTable(set.measure, tables[trial-1], Half)
			if err != nil {
				t.Fatal(err)
			}
			if y := number(t, row["y"]); !relative(e.Y, y, 1e-12) {
				t.Errorf("%s %s: y = %v, want %v", set.file, row["study"], e.Y, y)
			}
			if se := number(t, row["se"]); !relative(e.SE, se, 1e-12) {
				t.Errorf("%s %s: se = %v, want %v", set.file, row["study"], e.SE, se)
			}
			if len(steps) != 1 {
				t.Errorf("%s %s: %d conversions, want the computation alone", set.file, row["study"], len(steps))
			}
		}
	}
}

// Source: beta-blocker trials, Yusuf et al. (1985); y and s as printed in
// Gelman et al., Bayesian Data Analysis, Table 5.4 [memory; a recalculation
// agrees to all three decimals].
func TestFromTableAgainstBetaBlockers(t *testing.T) {
	for i, r := range [][6]float64{
		{3, 38, 3, 39, 0.028, 0.850}, {7, 114, 14, 116, -0.741, 0.483}, {5, 69, 11, 93, -0.541, 0.565},
		{102, 1533, 127, 1520, -0.246, 0.138}, {28, 355, 27, 365, 0.069, 0.281}, {4, 59, 6, 52, -0.584, 0.676},
		{98, 945, 152, 939, -0.512, 0.139}, {60, 632, 48, 471, -0.079, 0.204}, {25, 278, 37, 282, -0.424, 0.274},
		{138, 1916, 188, 1921, -0.335, 0.117}, {64, 873, 52, 583, -0.213, 0.195}, {45, 263, 47, 266, -0.039, 0.229},
		{9, 291, 16, 293, -0.593, 0.425}, {57, 858, 45, 883, 0.282, 0.205}, {25, 154, 31, 147, -0.321, 0.298},
		{33, 207, 38, 213, -0.135, 0.261}, {28, 251, 12, 122, 0.141, 0.364}, {8, 151, 6, 154, 0.322, 0.553},
		{6, 174, 3, 134, 0.444, 0.717}, {32, 209, 40, 218, -0.218, 0.260}, {27, 391, 43, 364, -0.591, 0.257},
		{22, 680, 39, 674, -0.608, 0.272},
	} {
		e, _, err := FromTable(OddsRatio, Table{r[0], r[1], r[2], r[3]}, Half)
		if err != nil {
			t.Fatal(err)
		}
		if !(math.Abs(e.Y-r[4]) <= 5e-4) || !(math.Abs(e.SE-r[5]) <= 5e-4) {
			t.Errorf("trial %d: %.4f (%.4f), want %v (%v)", i+1, e.Y, e.SE, r[4], r[5])
		}
	}
}

// Source: closed forms written out in each row.
func TestFromTableByHand(t *testing.T) {
	for _, tt := range []struct {
		name    string
		measure Measure
		table   Table
		c       Correction
		y, v    float64
		steps   int
	}{
		{"risk difference", RiskDifference, Table{10, 100, 20, 80}, Half, 0.1 - 0.25, 0.1*0.9/100 + 0.25*0.75/80, 1},
		{"odds ratio, empty arm: 0.5 to four cells", OddsRatio, Table{0, 10, 3, 12}, Half,
			math.Log(0.5 * 9.5 / (10.5 * 3.5)), 1/0.5 + 1/10.5 + 1/3.5 + 1/9.5, 2},
		{"odds ratio, full arm: 0.5 to four cells", OddsRatio, Table{10, 10, 3, 12}, Half,
			math.Log(10.5 * 9.5 / (0.5 * 3.5)), 1/10.5 + 1/0.5 + 1/3.5 + 1/9.5, 2},
		{"odds ratio, treatment-arm: 1/3 and 2/3", OddsRatio, Table{0, 10, 3, 20}, TreatmentArm,
			math.Log((1 / 3.) * (17 + 2/3.) / ((10 + 1/3.) * (3 + 2/3.))), 3 + 1/(10+1/3.) + 1/(3+2/3.) + 1/(17+2/3.), 2},
		{"risk ratio, empty arm", RiskRatio, Table{0, 10, 3, 12}, Half,
			math.Log((0.5 / 11) / (3.5 / 13)), 1/0.5 - 1/11. + 1/3.5 - 1/13., 2},
		{"risk ratio, one full arm needs none", RiskRatio, Table{10, 10, 3, 12}, NoCorrection,
			math.Log(1 / (3 / 12.)), 1/3. - 1/12., 1},
		{"risk difference, one empty arm needs none", RiskDifference, Table{0, 10, 3, 12}, NoCorrection,
			-0.25, 0.25 * 0.75 / 12, 1},
		{"risk difference, both empty: raw estimate, corrected variance", RiskDifference, Table{0, 9, 0, 19}, Half,
			0, 0.05*0.95/10 + 0.025*0.975/20, 2},
		{"risk difference, empty against full", RiskDifference, Table{0, 9, 19, 19}, Half,
			-1, 0.05*0.95/10 + 0.975*0.025/20, 2},
	} {
		t.Run(tt.name, func(t *testing.T) {
			e, steps, err := FromTable(tt.measure, tt.table, tt.c)
			if err != nil {
				t.Fatal(err)
			}
			if !near(e.Y, tt.y, 1e-13) || !relative(e.SE*e.SE, tt.v, 1e-13) {
				t.Errorf("got %v, variance %v; want %v, %v", e.Y, e.SE*e.SE, tt.y, tt.v)
			}
			if len(steps) != tt.steps {
				t.Errorf("conversions %+v, want %d", steps, tt.steps)
			}
			if last := steps[len(steps)-1].To; last[0].Value != e.Y || last[1].Value != e.SE {
				t.Errorf("last conversion ends in %v, not in %v", last, e)
			}
		})
	}
}

func TestFromTableRefuses(t *testing.T) {
	for _, tt := range []struct {
		name    string
		measure Measure
		table   Table
		c       Correction
		what    string // the number the error must name; empty: ErrNothingToCompare
	}{
		{"both empty, odds ratio", OddsRatio, Table{0, 10, 0, 12}, Half, ""},
		{"both full, odds ratio", OddsRatio, Table{10, 10, 12, 12}, Half, ""},
		{"both empty, risk ratio", RiskRatio, Table{0, 10, 0, 12}, Half, ""},
		{"treated empty, no correction", OddsRatio, Table{0, 10, 3, 12}, NoCorrection, "events treated"},
		{"control empty, no correction", RiskRatio, Table{3, 10, 0, 12}, NoCorrection, "events control"},
		{"both full, risk ratio", RiskRatio, Table{10, 10, 12, 12}, Half, ""},
		{"both empty, no correction", RiskDifference, Table{0, 10, 0, 12}, NoCorrection, "events treated"},
		{"treated full, control empty, no correction", RiskRatio, Table{10, 10, 0, 12}, NoCorrection, "events control"},
		{"control full, no correction", OddsRatio, Table{3, 10, 12, 12}, NoCorrection, "events control"},
		{"negative", OddsRatio, Table{-1, 10, 3, 12}, Half, "events treated"},
		{"more events than people", RiskRatio, Table{11, 10, 3, 12}, Half, "events treated"},
		{"more events than people", RiskRatio, Table{1, 10, 13, 12}, Half, "events control"},
		{"not whole", RiskDifference, Table{1, 10, 3, 12.5}, Half, "total control"},
		{"empty arm", RiskDifference, Table{0, 0, 3, 12}, Half, "total treated"},
		{"not a number", RiskDifference, Table{0, 1, math.NaN(), 12}, Half, "events control"},
		{"infinite", RiskDifference, Table{0, math.Inf(1), 1, 12}, Half, "total treated"},
		{"too large", RiskDifference, Table{0, 1e308, 1, 12}, Half, "total treated"},
	} {
		t.Run(tt.name+" "+tt.measure.String(), func(t *testing.T) {
			e, steps, err := FromTable(tt.measure, tt.table, tt.c)
			if (e != Estimate{}) || steps != nil {
				t.Errorf("%v and %v beside an error", e, steps)
			}
			var input *InputError
			switch {
			case tt.what == "":
				if !errors.Is(err, ErrNothingToCompare) || !strings.Contains(err.Error(), "carries no information about a ratio") {
					t.Errorf("error %v, want ErrNothingToCompare", err)
				}
			case !errors.As(err, &input) || input.What != tt.what:
				t.Errorf("error %v, want one that names %q", err, tt.what)
			}
		})
	}
	var unknown *choice.UnknownError
	if _, _, err := FromTable(OddsRatio, Table{0, 10, 3, 12}, Correction(99)); !errors.As(err, &unknown) {
		t.Errorf("correction out of range: %v", err)
	}
	var measure *MeasureError
	if _, _, err := FromTable(HazardRatio, Table{1, 10, 2, 10}, Half); !errors.As(err, &measure) || measure.Measure != HazardRatio {
		t.Errorf("hazard ratio from a table: %v", err)
	}
}

// table draws a legal table with margins of every size.
func table(t *rapid.T) Table {
	n1 := rapid.IntRange(1, 5000).Draw(t, "total treated")
	n2 := rapid.IntRange(1, 5000).Draw(t, "total control")
	return Table{
		Events1: float64(rapid.IntRange(0, n1).Draw(t, "events treated")), Total1: float64(n1),
		Events2: float64(rapid.IntRange(0, n2).Draw(t, "events control")), Total2: float64(n2),
	}
}

// Every legal table gives a finite estimate with se > 0 or an error that says
// why, and exchanging the arms turns the sign and nothing else. For the odds
// ratio so does exchanging events and non-events.
func TestFromTableProperties(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		m := rapid.SampledFrom([]Measure{OddsRatio, RiskRatio, RiskDifference}).Draw(t, "measure")
		c := rapid.SampledFrom([]Correction{Half, TreatmentArm}).Draw(t, "correction")
		x := table(t)
		e, _, err := FromTable(m, x, c)
		swapped, _, errSwapped := FromTable(m, Table{x.Events2, x.Total2, x.Events1, x.Total1}, c)
		if err != nil {
			if !errors.Is(err, ErrNothingToCompare) || !errors.Is(errSwapped, ErrNothingToCompare) {
				t.Fatalf("%+v: %v; swapped: %v", x, err, errSwapped)
			}
			return
		}
		if !finite(e.Y) || !(e.SE > 0) || !finite(e.SE) {
			t.Fatalf("%+v gives %+v", x, e)
		}
		if !near(swapped.Y, -e.Y, 1e-13) || !relative(swapped.SE, e.SE, 1e-13) {
			t.Fatalf("%+v gives %+v, swapped %+v", x, e, swapped)
		}
		if m == OddsRatio {
			turned, _, err := FromTable(m, Table{x.Total1 - x.Events1, x.Total1, x.Total2 - x.Events2, x.Total2}, c)
			if err != nil || !near(turned.Y, -e.Y, 1e-13) || !relative(turned.SE, e.SE, 1e-12) {
				t.Fatalf("%+v gives %+v, with events and non-events exchanged %+v", x, e, turned)
			}
		}
	})
}

// Without a zero cell, counts multiplied by a whole number leave the estimate
// as it is and divide the variance by that number.
func TestFromTableScale(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		x := table(t)
		f := float64(rapid.IntRange(2, 1000).Draw(t, "factor"))
		for _, m := range []Measure{OddsRatio, RiskRatio, RiskDifference} {
			if _, needed := needsCorrection(m, x); needed {
				continue
			}
			e, _, err := FromTable(m, x, NoCorrection)
			big, _, errBig := FromTable(m, Table{f * x.Events1, f * x.Total1, f * x.Events2, f * x.Total2}, NoCorrection)
			if errors.Is(err, ErrNothingToCompare) && errors.Is(errBig, ErrNothingToCompare) {
				continue
			}
			if err != nil || errBig != nil {
				t.Fatalf("%+v: %v, %v", x, err, errBig)
			}
			if !near(big.Y, e.Y, 1e-13) || !relative(big.SE*math.Sqrt(f), e.SE, 1e-13) {
				t.Fatalf("%+v times %v: %+v, %+v", x, f, e, big)
			}
		}
	})
}

// Source: evidence_extra.csv, sums over bcg_counts in 40-digit arithmetic.
func TestPetoAgainstBCG(t *testing.T) {
	var difference, variance float64
	for _, x := range bcgTables(t) {
		d, v, err := Peto(x)
		if err != nil {
			t.Fatal(err)
		}
		difference += d
		variance += v
	}
	got := map[string]float64{
		"peto_observed_minus_expected": difference,
		"peto_variance":                variance,
		"peto_log_odds_ratio":          difference / variance,
		"peto_log_odds_ratio_se":       1 / math.Sqrt(variance),
	}
	checked := 0
	for _, r := range records(t, "evidence_extra.csv") {
		have, ok := got[r["form"]]
		if !ok {
			continue
		}
		checked++
		if want := number(t, r["value"]); !relative(have, want, 1e-12) {
			t.Errorf("%s = %v, want %v", r["form"], have, want)
		}
	}
	if checked != len(got) {
		t.Errorf("%d of %d values found in the check file", checked, len(got))
	}
}

// Source: magnesium trials (BUGS Examples, "Magnesium" data [seen]); O−E and V
// recalculated on a general numerical library to 4 decimals [recalc]; the
// pooled odds ratio of the first seven as printed by Teo et al., BMJ
// 1991;303:1499-1503 [seen]: deaths 25/657 against 53/644, odds reduced by 55%.
func TestPetoAgainstMagnesium(t *testing.T) {
	var sum, variance float64
	for i, r := range [][6]float64{
		{1, 40, 2, 36, -0.5789, 0.7280}, {9, 135, 23, 135, -7, 7.0781}, {2, 200, 7, 200, -2.5, 2.2049},
		{1, 48, 1, 46, -0.0213, 0.4944}, {10, 150, 8, 148, 0.9396, 4.2422}, {1, 59, 9, 56, -4.1304, 2.3011},
		{1, 25, 3, 23, -1.0833, 0.9345}, {90, 1159, 118, 1157, -14.0898, 47.3503},
	} {
		d, v, err := Peto(Table{r[0], r[1], r[2], r[3]})
		if err != nil {
			t.Fatal(err)
		}
		if !(math.Abs(d-r[4]) <= 5.1e-5) || !(math.Abs(v-r[5]) <= 5.1e-5) {
			t.Errorf("trial %d: O−E %.5f, V %.5f, want %v, %v", i+1, d, v, r[4], r[5])
		}
		if i < 7 {
			sum, variance = sum+d, variance+v
		}
	}
	if reduction := 100 * (1 - math.Exp(sum/variance)); !(math.Abs(reduction-55) <= 0.5) {
		t.Errorf("odds reduced by %.2f%%, want 55%%", reduction)
	}
}

func TestPetoRefuses(t *testing.T) {
	for _, x := range []Table{{0, 10, 0, 12}, {10, 10, 12, 12}} {
		if _, _, err := Peto(x); !errors.Is(err, ErrNothingToCompare) {
			t.Errorf("%+v: %v, want ErrNothingToCompare", x, err)
		}
	}
	var input *InputError
	if _, _, err := Peto(Table{1, 10, 2, math.Inf(1)}); !errors.As(err, &input) || input.What != "total control" {
		t.Errorf("infinite total: %v", err)
	}
}

// One arm's gain is the other's loss, and a table of one person per arm, the
// smallest with information, has V = 1·1·1·1/(2²·1) = 1/4.
func TestPetoProperties(t *testing.T) {
	if d, v, err := Peto(Table{1, 1, 0, 1}); d != 0.5 || v != 0.25 || err != nil {
		t.Errorf("one event in two people: %v, %v, %v; want 0.5, 0.25", d, v, err)
	}
	rapid.Check(t, func(t *rapid.T) {
		x := table(t)
		d, v, err := Peto(x)
		if err != nil {
			if !errors.Is(err, ErrNothingToCompare) {
				t.Fatal(err)
			}
			return
		}
		back, same, _ := Peto(Table{x.Events2, x.Total2, x.Events1, x.Total1})
		if !(v > 0) || !near(back, -d, 1e-13) || !relative(same, v, 1e-13) {
			t.Fatalf("%+v: %v, %v; swapped %v, %v", x, d, v, back, same)
		}
	})
}

func TestCorrectionNames(t *testing.T) {
	for i, name := range CorrectionNames() {
		var c Correction
		if err := c.UnmarshalText([]byte(name)); err != nil || c != Correction(i) {
			t.Errorf("%q reads as %v, %v", name, c, err)
		}
		if text, err := c.MarshalText(); err != nil || string(text) != name {
			t.Errorf("%v writes as %q, %v", c, text, err)
		}
	}
	if got := strings.Join(CorrectionNames(), " "); got != "half treatment-arm none" {
		t.Errorf("names %q", got)
	}
	if _, err := ParseCorrection("0.5"); err == nil || !strings.Contains(err.Error(), "treatment-arm") {
		t.Errorf("unknown name: %v, want an error that lists the names", err)
	}
}
