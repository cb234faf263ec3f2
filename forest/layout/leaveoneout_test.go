package layout

import (
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// TestLeaveOneOutNinePlaces compares places with those of the design drawing
// (design/mock/leave-one-out.svg), whose axis of effects was drawn by hand: there
// 0.7 points are allowed.
func TestLeaveOneOutNinePlaces(t *testing.T) {
	in := nineOmissions()
	in.Notes = nil
	page := mustLeaveOneOut(t, in, Style{}).Pages[0]
	near := func(what string, got, want, within float64) {
		t.Helper()
		if !(math.Abs(got-want) <= within) {
			t.Errorf("%s at %.3f, the design has %.2f", what, got, want)
		}
	}
	const exact, drawn = 0.02, 0.7
	near("height", page.Height, 252.74, exact)
	order := []string{"Obradović 2024", "Lindqvist 2017", "Dvořák 2021", "Abernethy 2019", "Brandão 2014", "Halvorsen 2009", "Zielińska 2011", "Okwuosa 2012", "Marchetti-Ruiz 2015"}
	ends := []float64{347.95, 350.52, 351.84, 352.78, 354.59, 355.37, 355.94, 360.43, 395.19}
	points := []float64{127.54, 134.27, 126.22, 127.41, 124.84, 129.13, 125.89, 128.51, 114.96}
	carried := []string{"+0.81", "+0.71", "+0.65", "+0.62", "+0.55", "+0.52", "+0.49", "+0.32", "−1.04"}
	odds := []string{"10", "11", "12", "13", "14", "15", "15", "19", "113"}
	for i, name := range order {
		row := group(t, page, fmt.Sprintf("row-%d", i+1)).Items
		texts := textsOf(row)
		if texts[0] != name || !slices.Contains(texts, carried[i]) || !slices.Contains(texts, odds[i]) {
			t.Errorf("row %d is %q, the design has %s, %s : 1, %s", i+1, texts, name, odds[i], carried[i])
		}
		end := discsOf(row, Evidence)[0]
		near(name, end.X, ends[i], exact)
		near(name+" (height)", end.Y, 83.5+13*float64(i), exact)
		near(name+" (estimate)", discsOf(row, Estimate)[0].X, points[i], drawn)
		solid, hollow := rectsOf(row, Solid(Evidence)), rectsOf(row, Hollow(Evidence, 0.9))
		if carries := i < 8; carries != (len(solid) == 1) || carries == (len(hollow) == 1) {
			t.Errorf("%s has %d solid and %d hollow bars", name, len(solid), len(hollow))
		}
	}
	all := linesOf(group(t, page, "all").Items, Evidence)[0]
	near("the line of all trials", all.X1, 368.59, exact)
	near("its end", all.Y2, 199, exact)
	band := rectsOf(group(t, page, "grid").Items, Solid(IntervalBand))[0]
	near("the band", band.X, 95.57, drawn)
	near("its width", band.Width, 62.24, drawn)
	if notes := strings.Join(textsOf(group(t, page, "notes").Items), " "); !strings.Contains(notes,
		"leaving out any one of Obradović, Lindqvist, Dvořák or Abernethy brings the evidence below 2 steps (14 : 1).") {
		t.Errorf("notes: %s", notes)
	}
}

// TestTipping words who takes the evidence across the line.
func TestTipping(t *testing.T) {
	for _, tt := range []struct {
		all   float64 // steps
		rows  []float64
		below float64
		want  string
	}{
		{2.5, []float64{2.1, 2.2, 3}, math.NaN(), "leaving out any one trial keeps the evidence at 2 steps (14 : 1) or more."},
		{2.5, []float64{1.9, 2.2, 3}, math.NaN(), "leaving out A brings the evidence below 2 steps (14 : 1)."},
		{2.5, []float64{1.9, 2.2, 1.8}, math.NaN(), "leaving out any one of C or A brings the evidence below 2 steps (14 : 1)."},
		{2.5, []float64{1.9, 1.2, 1.8}, math.NaN(), "leaving out any one trial brings the evidence below 2 steps (14 : 1)."},
		{2.5, []float64{1.9, 2.2, 3}, 1, "leaving out any one trial keeps the evidence at 1 step (3.7 : 1) or more."},
		{0.5, []float64{-0.1, 0.2, 3}, math.NaN(), "leaving out A brings the evidence below even (1 : 1)."},
		{-0.3, []float64{-0.1, -0.2, 0.1}, math.NaN(), "leaving out C brings the evidence to even (1 : 1) or more."},
		{-0.3, []float64{-0.1, -0.2, -0.1}, math.NaN(), "leaving out any one trial keeps the evidence below even (1 : 1)."},
		{2.5, []float64{1, 1, 1, 1, 1, 1, 1, 3}, math.NaN(), "leaving out any one of the first 7 rows brings the evidence below 2 steps (14 : 1)."},
		{1.5, []float64{1, 2, 2, 2, 2, 2, 2, 2}, 2, "leaving out any one of the last 7 rows brings the evidence to 2 steps (14 : 1) or more."},
	} {
		in := manyOmissions(len(tt.rows))
		in.All.LnEvidence, in.Below = tt.all*lnStep, tt.below
		for i, steps := range tt.rows {
			in.Rows[i].LnEvidence, in.Rows[i].Name = steps*lnStep+1e-9, string(rune('A'+i))
		}
		texts := textsOf(group(t, mustLeaveOneOut(t, in, Style{Width: 2000}).Pages[0], "notes").Items)
		if !slices.Contains(texts, " "+tt.want) {
			t.Errorf("all %v, without %v: %q, want %q", tt.all, tt.rows, texts, tt.want)
		}
	}
}

// TestLeaveOneOutPastTheRail: what goes past the rail ends in a head there.
func TestLeaveOneOutPastTheRail(t *testing.T) {
	in := nineOmissions()
	in.All.LnEvidence, in.Rows[0].LnEvidence = 20*lnStep, 30*lnStep
	page := mustLeaveOneOut(t, in, Style{}).Pages[0]
	if lines := linesOf(group(t, page, "all").Items, Evidence); len(lines) != 0 {
		t.Error("a line of all trials past the rail")
	}
	if heads := polygonsOf(group(t, page, "all").Items, Evidence); len(heads) != 1 {
		t.Errorf("%d heads in the row of all trials, want 1", len(heads))
	}
	last := group(t, page, "row-9") // Halvorsen's, which then held back the most
	if textsOf(last.Items)[0] != "Halvorsen 2009" || len(polygonsOf(last.Items, Evidence)) != 1 || len(discsOf(last.Items, Evidence)) != 0 {
		t.Errorf("last row %q with %d heads", textsOf(last.Items), len(polygonsOf(last.Items, Evidence)))
	}
}

func TestLeaveOneOutPages(t *testing.T) {
	for _, tt := range []struct {
		k    int
		rows []int // per page, by the sizes that STYLE section 8 gives
	}{{2, []int{2}}, {20, []int{20}}, {40, []int{40}}, {48, []int{48}}, {49, []int{40, 9}}, {120, []int{40, 40, 40}}} {
		var got []int
		for _, page := range mustLeaveOneOut(t, manyOmissions(tt.k), Style{}).Pages {
			got = append(got, len(group(t, page, "trials").Items))
			if !slices.Contains(textsOf(group(t, page, "all").Items), "No trial left out") {
				t.Errorf("%d rows: a page lacks the row of all trials", tt.k)
			}
		}
		if !slices.Equal(got, tt.rows) {
			t.Errorf("%d rows stand on pages of %v, want %v", tt.k, got, tt.rows)
		}
	}
}

// TestLeaveOneOutProblem: a row without a result stands last and says why.
func TestLeaveOneOutProblem(t *testing.T) {
	in := nineOmissions()
	in.Rows[3] = Omission{Name: "Brandão", Year: "2014", Problem: "no maximum", Estimate: math.NaN()}
	page := mustLeaveOneOut(t, in, Style{}).Pages[0]
	if texts := textsOf(group(t, page, "row-9").Items); !slices.Equal(texts, []string{"Brandão 2014", "no result: no maximum"}) {
		t.Errorf("last row: %q", texts)
	}
	if !strings.Contains(page.Description, "Without Brandão 2014: no result, no maximum.") {
		t.Errorf("description: %s", page.Description)
	}
}

// TestLeaveOneOutDescription holds the description to the numbers of the design
// drawing's description.
func TestLeaveOneOutDescription(t *testing.T) {
	got := mustLeaveOneOut(t, nineOmissions(), Style{}).Pages[0].Description
	for _, want := range []string{
		"Pooled risk ratio of all trials: 0.71 (0.58 to 0.86), evidence 29 : 1, τ 0.13",
		"Without Obradović 2024: 0.71 (0.56 to 0.91), evidence 10 : 1, τ 0.17, carries +0.81 steps.",
		"Lindqvist 2017: 0.74 (0.61 to 0.91), evidence 11 : 1", "+0.71", "Dvořák 2021: 0.71 (0.56 to 0.89), evidence 12 : 1", "+0.65",
		"Abernethy 2019: 0.71 (0.57 to 0.89), evidence 13 : 1", "+0.62", "Brandão 2014: 0.70 (0.56 to 0.88), evidence 14 : 1", "+0.55",
		"Halvorsen 2009: 0.72 (0.58 to 0.89), evidence 15 : 1", "+0.52", "Zielińska 2011: 0.71 (0.57 to 0.88), evidence 15 : 1", "+0.49",
		"Okwuosa 2012: 0.72 (0.59 to 0.88), evidence 19 : 1", "+0.32",
		"Without Marchetti-Ruiz 2015: 0.66 (0.55 to 0.79), evidence 113 : 1, τ 0.00, carries −1.04 steps.",
	} {
		if !strings.Contains(got, want) {
			t.Errorf("the description lacks %q:\n%s", want, got)
		}
	}
}

func TestLeaveOneOutRefuses(t *testing.T) {
	for _, bad := range []float64{math.NaN(), math.Inf(1), math.Inf(-1), 1e308, -1e308} {
		for field, set := range map[string]func(*LeaveOneOutInput){
			"estimate":     func(in *LeaveOneOutInput) { in.Rows[1].Estimate = bad },
			"low":          func(in *LeaveOneOutInput) { in.Rows[1].Low = bad },
			"high":         func(in *LeaveOneOutInput) { in.Rows[1].High = bad },
			"evidence":     func(in *LeaveOneOutInput) { in.Rows[1].LnEvidence = bad },
			"spread":       func(in *LeaveOneOutInput) { in.Rows[1].Tau = bad },
			"null":         func(in *LeaveOneOutInput) { in.Scale.Null = bad },
			"level":        func(in *LeaveOneOutInput) { in.Level = bad },
			"all":          func(in *LeaveOneOutInput) { in.All.High = bad },
			"all evidence": func(in *LeaveOneOutInput) { in.All.LnEvidence = bad },
		} {
			for _, ratio := range []bool{true, false} {
				in := nineOmissions()
				in.Scale.Ratio = ratio
				set(&in)
				if _, err := LeaveOneOut(in, Style{}); err == nil {
					t.Errorf("%s of %v was drawn (ratio %v)", field, bad, ratio)
				}
			}
		}
		if in := nineOmissions(); !math.IsNaN(bad) { // NaN leaves the line to the chart
			in.Below = bad
			if _, err := LeaveOneOut(in, Style{}); err == nil {
				t.Errorf("evidence below %v was told", bad)
			}
		}
		if _, err := LeaveOneOut(nineOmissions(), Style{Width: bad}); err == nil {
			t.Errorf("width of %v was taken", bad)
		}
	}
	in := nineOmissions()
	in.Rows = in.Rows[:1]
	if _, err := LeaveOneOut(in, Style{}); err == nil {
		t.Error("a single study was left out")
	}
	if _, err := LeaveOneOut(nineOmissions(), Style{Width: 120}); err == nil || !strings.Contains(err.Error(), "too narrow") {
		t.Errorf("a width of 120 pt gave %v", err)
	}
}

// TestAccrualHostileTexts: markup stays text in both charts.
func TestAccrualHostileTexts(t *testing.T) {
	const hostile = "<script>alert(1)</script>\x00\x1b\u202e & \"q\" ]]> <!--"
	points, omissions := ninePoints(), nineOmissions()
	points.Title, points.Sides.Lower, points.Scale.Measure, points.Order, points.Method = hostile, hostile, hostile, hostile, hostile
	points.Points[0].Entered[0].Name, points.Points[0].Label = hostile, hostile
	omissions.Title, omissions.Sides.Lower, omissions.Scale.Measure = hostile, hostile, hostile
	omissions.Rows[0].Name, omissions.Rows[1].Problem = hostile, hostile
	for _, style := range []Style{{ID: `x" onload="y`}, {Width: NarrowWidth}} {
		for _, page := range []Drawing{mustCumulative(t, points, style), mustLeaveOneOut(t, omissions, style).Pages[0]} {
			svg := written(t, page, Light)
			for _, element := range wellFormed(t, svg) {
				if !slices.Contains([]string{"svg", "title", "desc", "rect", "line", "polygon", "circle", "g", "text", "tspan"}, element) {
					t.Errorf("element <%s> came out of a text", element)
				}
			}
			if strings.ContainsAny(svg, "\x00\x1b\u202e") || strings.Contains(svg, `" onload="`) {
				t.Error("control characters or an attribute came through")
			}
		}
	}
}

// TestAccrualGolden pins the form of charts that were looked at.
func TestAccrualGolden(t *testing.T) {
	for name, chart := range map[string]struct {
		page  Drawing
		theme Theme
	}{
		"cumulative-nine":      {mustCumulative(t, ninePoints(), Style{}), Light},
		"cumulative-narrow":    {mustCumulative(t, ninePoints(), Style{Width: NarrowWidth, ID: "narrow"}), Mono},
		"cumulative-forty":     {mustCumulative(t, manyPoints(40), Style{ID: "forty"}), Dark},
		"leave-one-out-nine":   {mustLeaveOneOut(t, nineOmissions(), Style{}).Pages[0], Light},
		"leave-one-out-narrow": {mustLeaveOneOut(t, nineOmissions(), Style{Width: NarrowWidth, ID: "narrow"}).Pages[0], Mono},
	} {
		got := written(t, chart.page, chart.theme)
		wellFormed(t, got)
		file := filepath.Join("testdata", name+".svg")
		if *update {
			if err := os.WriteFile(file, []byte(got), 0o644); err != nil {
				t.Fatal(err)
			}
			continue
		}
		want, err := os.ReadFile(file)
		if err != nil {
			t.Fatalf("%v; run with -update, look at the file, and commit it", err)
		}
		if diff := cmp.Diff(strings.Split(string(want), "\n"), strings.Split(got, "\n")); diff != "" {
			t.Errorf("%s differs (-want +got):\n%s", file, diff)
		}
	}
}

func BenchmarkCumulative(b *testing.B) {
	for _, k := range []int{9, 200} {
		b.Run(fmt.Sprintf("points=%d", k), func(b *testing.B) {
			in := manyPoints(k)
			b.ReportAllocs()
			for b.Loop() {
				if _, err := Cumulative(in, Style{}); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}

func BenchmarkLeaveOneOut(b *testing.B) {
	for _, k := range []int{9, 120} {
		b.Run(fmt.Sprintf("rows=%d", k), func(b *testing.B) {
			in := manyOmissions(k)
			b.ReportAllocs()
			for b.Loop() {
				if _, err := LeaveOneOut(in, Style{}); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
