package layout

import (
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// difficult are charts that strain the layout.
func difficult() map[string]ForestInput {
	extreme := nineTrials()
	extreme.Title = "A title that is far too long for one line of a chart, so that it has to go on to a second and perhaps to a third line"
	extreme.Pooled = &ForestPooled{Estimate: -1.2, Low: -5, High: 3, LnEvidence: 12 * lnStep, K: 9, Totals: [2]string{"12,345", "1,234,567"}}
	extreme.Prediction = &ForestPrediction{Low: -300, High: 300}
	extreme.Sides = Sides{Lower: "fewer flares of Vane syndrome within twenty-four weeks", Higher: "more flares of Vane syndrome within 24 weeks",
		Arms: [2]string{"Brindle extract 40 mg twice daily", "Unvaccinated"}}
	extreme.Rows[0].Name = "中文作者和同事"
	extreme.Rows[1].Name = strings.Repeat("Unbroken", 30)
	extreme.Rows[2].Year = ""
	extreme.Rows[4].Estimate, extreme.Rows[4].Low, extreme.Rows[4].High = 6, 3, 9
	extreme.Rows[5].LnEvidence = 1e9

	linear := nineTrials()
	linear.Scale = EffectScale{Measure: "standardised mean difference", Decimals: 3}
	linear.Pooled.LnEvidence, linear.Prediction, linear.Study = -0.5, &ForestPrediction{Reason: "needs 3 trials"}, ""

	common := nineTrials()
	common.Prediction, common.Spread = nil, nil

	bare := common
	bare.Pooled, bare.BiasOpen, bare.Notes, bare.Title, bare.Subtitle = nil, false, nil, "", ""

	far := nineTrials()
	far.Rows = slices.Clone(far.Rows)
	for i := range far.Rows {
		r := &far.Rows[i]
		r.Estimate, r.Low, r.High = r.Estimate+9, r.Low+9, r.High+9
	}
	far.Pooled.Estimate, far.Pooled.Low, far.Pooled.High = 8.5, 8.4, 8.6

	equal := nineTrials()
	for i := range equal.Rows {
		r := &equal.Rows[i]
		r.Estimate, r.Low, r.High, r.Weight = 0, 0, 0, 0
	}
	equal.Pooled.Estimate, equal.Pooled.Low, equal.Pooled.High, equal.Prediction = 0, 0, 0, nil
	flat := equal
	flat.Scale = EffectScale{Measure: "difference", Null: 5}
	return map[string]ForestInput{"extreme": extreme, "linear": linear, "common": common, "bare": bare, "far": far, "equal": equal, "flat": flat}
}

// TestForestNothingOverlaps lays out charts of 1 to 120 rows in both widths.
func TestForestNothingOverlaps(t *testing.T) {
	for k := 1; k <= 120; k++ {
		if k > 52 && k%17 != 0 && k != 120 {
			continue
		}
		for _, style := range []ForestStyle{{}, {Width: NarrowWidth}} {
			doc := mustForest(t, manyTrials(k), style)
			for i, page := range doc.Pages {
				checkPage(t, fmt.Sprintf("%d rows, width %.0f, page %d", k, page.Width, i+1), page)
				if page.Height > maxPageHeight {
					t.Errorf("%d rows: page of %.0f pt, at most %.0f (230 mm)", k, page.Height, maxPageHeight)
				}
			}
		}
	}
	for name, in := range difficult() {
		for _, style := range []ForestStyle{{}, {Width: NarrowWidth}, {Width: 400, NoTitle: true}, {Width: NarrowWidth, TypeSize: 8.3}, {TypeSize: 9}} {
			doc, err := Forest(in, style)
			if err != nil {
				t.Errorf("%s: %v", name, err)
				continue
			}
			for _, page := range doc.Pages {
				checkPage(t, fmt.Sprintf("%s, style %+v", name, style), page)
			}
		}
	}
}

func TestForestPages(t *testing.T) {
	for _, tt := range []struct {
		k    int
		rows []int // per page, by the sizes that STYLE section 8 gives
	}{{1, []int{1}}, {20, []int{20}}, {40, []int{40}}, {48, []int{48}}, {49, []int{40, 9}}, {80, []int{40, 40}}, {120, []int{40, 40, 40}}} {
		doc := mustForest(t, manyTrials(tt.k), ForestStyle{})
		var got []int
		next := 1
		for i, page := range doc.Pages {
			rows := group(t, page, "trials").Items
			got = append(got, len(rows))
			for _, it := range rows {
				if id := it.(Group).ID; id != fmt.Sprintf("row-%d", next) {
					t.Errorf("%d rows: %s where row %d was due", tt.k, id, next)
				}
				next++
			}
			pooled := false
			for _, it := range page.Items {
				if g, ok := it.(Group); ok && g.ID == "pooled" {
					pooled = true
				}
			}
			if last := i == len(doc.Pages)-1; pooled != last {
				t.Errorf("%d rows: pooled block on page %d: %v", tt.k, i+1, pooled)
			}
			if !slices.Contains(textsOf(group(t, page, "heads").Items), "Trial") {
				t.Errorf("%d rows: page %d has no heads", tt.k, i+1)
			}
		}
		if !slices.Equal(got, tt.rows) {
			t.Errorf("%d rows stand on pages of %v, want %v", tt.k, got, tt.rows)
		}
	}
	doc := mustForest(t, manyTrials(120), ForestStyle{})
	first, last := axisOf(t, doc.Pages[0], false), axisOf(t, doc.Pages[2], false)
	if !(math.Abs(first(0.3)-last(0.3)) < 0.02) || doc.Pages[1].ID != "forest-2" {
		t.Error("the pages differ in their axes, or the second has no id of its own")
	}
}

// TestForestDropsColumns narrows a chart: counts go first, then weights, then
// the rows take two lines, and at last the chart is refused.
func TestForestDropsColumns(t *testing.T) {
	has := func(width float64) (counts, weight, oneLine bool) {
		page := mustForest(t, nineTrials(), ForestStyle{Width: width}).Pages[0]
		checkPage(t, fmt.Sprintf("width %.0f", width), page)
		if axis := effectAxis(t, page); !(axis.X2-axis.X1 >= 85-1e-9) {
			t.Errorf("width %.0f: effect axis of %.1f pt, never below 85", width, axis.X2-axis.X1)
		}
		heads := textsOf(group(t, page, "heads").Items)
		return slices.Contains(heads, "Events of total"), slices.Contains(heads, "Weight"), slices.Contains(heads, "Evidence ratio, effect : none")
	}
	stage := 0
	seen := map[int]bool{}
	for width := WideWidth; width >= NarrowWidth; width -= 10 {
		counts, weight, oneLine := has(width)
		now := 0
		switch {
		case counts && weight && oneLine:
		case !counts && weight && oneLine:
			now = 1
		case !counts && !weight && oneLine:
			now = 2
		case !counts && !weight && !oneLine:
			now = 3
		default:
			t.Errorf("width %.0f: counts %v, weight %v, one line %v", width, counts, weight, oneLine)
		}
		if now < stage {
			t.Errorf("width %.0f shows more than a wider chart", width)
		}
		stage = now
		seen[now] = true
	}
	if len(seen) != 4 {
		t.Errorf("met stages %v of dropping, want all four", seen)
	}
	var narrow *TooNarrowError
	if _, err := Forest(nineTrials(), ForestStyle{Width: 150}); !errors.As(err, &narrow) {
		t.Fatalf("a width of 150 pt gave %v, want a *TooNarrowError", err)
	}
	if _, err := Forest(nineTrials(), ForestStyle{Width: narrow.Least}); err != nil {
		t.Errorf("the width said to be enough, %.1f pt, gave %v", narrow.Least, err)
	}
}

func TestForestRefuses(t *testing.T) {
	for _, bad := range []float64{math.NaN(), math.Inf(1), math.Inf(-1), 1e308, -1e308} {
		for field, set := range map[string]func(*ForestInput){
			"estimate":   func(in *ForestInput) { in.Rows[1].Estimate = bad },
			"low":        func(in *ForestInput) { in.Rows[1].Low = bad },
			"high":       func(in *ForestInput) { in.Rows[1].High = bad },
			"weight":     func(in *ForestInput) { in.Rows[1].Weight = bad },
			"evidence":   func(in *ForestInput) { in.Rows[1].LnEvidence = bad },
			"null":       func(in *ForestInput) { in.Scale.Null = bad },
			"level":      func(in *ForestInput) { in.Level = bad },
			"pooled":     func(in *ForestInput) { in.Pooled.High = bad },
			"prediction": func(in *ForestInput) { in.Prediction.Low = bad },
			"spread":     func(in *ForestInput) { in.Spread.Tau = bad },
			"spread end": func(in *ForestInput) { in.Spread.High = bad },
		} {
			for _, ratio := range []bool{true, false} {
				in := nineTrials()
				in.Scale.Ratio = ratio
				set(&in)
				if _, err := Forest(in, ForestStyle{}); err == nil {
					t.Errorf("%s of %v was drawn (ratio %v)", field, bad, ratio)
				}
			}
		}
		if _, err := Forest(nineTrials(), ForestStyle{Width: bad}); err == nil {
			t.Errorf("width of %v was taken", bad)
		}
		if _, err := Forest(nineTrials(), ForestStyle{TypeSize: bad}); err == nil {
			t.Errorf("type of %v was taken", bad)
		}
	}
	in := nineTrials()
	in.Rows[3].Low, in.Rows[3].High = 1, -1
	if _, err := Forest(in, ForestStyle{}); err == nil || !strings.Contains(err.Error(), "row 4 (Brandão)") {
		t.Errorf("crossed limits gave %v, want an error that names row 4", err)
	}
	if _, err := Forest(ForestInput{Level: 0.95}, ForestStyle{}); err == nil {
		t.Error("a chart without rows was drawn")
	}
}

func TestForestHostileNames(t *testing.T) {
	in := nineTrials()
	in.Rows[0].Name = "<script>alert(1)</script>\x00\x1b\u202e & \"q\" ]]> <!--"
	in.Title, in.Sides.Lower, in.Sides.Arms[0] = "</title><script>", "<b>&", "\u2067<i>"
	in.Notes[0].Text = "<style>*{display:none}</style>"
	for _, style := range []ForestStyle{{ID: `x" onload="y`}, {Width: NarrowWidth}} {
		svg := written(t, mustForest(t, in, style).Pages[0], Light)
		for _, element := range wellFormed(t, svg) {
			if !slices.Contains([]string{"svg", "title", "desc", "rect", "line", "polygon", "circle", "g", "text", "tspan"}, element) {
				t.Errorf("element <%s> came out of a text", element)
			}
		}
		if strings.ContainsAny(svg, "\x00\x1b\u202e\u2067") || strings.Contains(svg, `" onload="`) {
			t.Error("control characters or an attribute came through")
		}
	}
}

// TestForestLongNames cuts before the year, and keeps the whole name in the
// row's tooltip and the description.
func TestForestLongNames(t *testing.T) {
	in := manyTrials(30)
	const long = "Brindle after Mask Ventilation Study Group (multicentre, crossover period 1 only)"
	in.Rows[22].Name, in.Rows[22].Year = long, "2014"
	page := mustForest(t, in, ForestStyle{}).Pages[0]
	row := group(t, page, "row-23")
	if row.Title != long+" 2014" {
		t.Errorf("tooltip is %q", row.Title)
	}
	shown := textsOf(row.Items)[0]
	if !strings.HasPrefix(shown, "Brindle after") || !strings.HasSuffix(shown, "… 2014") {
		t.Errorf("shown as %q", shown)
	}
	if !strings.Contains(page.Description, long) {
		t.Error("the description lacks the whole name")
	}
	if got := group(t, page, "row-1").Title; got != "" {
		t.Errorf("a whole name has the tooltip %q", got)
	}
	in.Rows[0].Name = "中文 عربي"
	if got, want := string(mustForest(t, in, ForestStyle{}).Missing), "برعي中文"; got != want {
		t.Errorf("missing %q, want %q", got, want)
	}
}

// TestForestDescription holds the description to every number of the chart, as
// the design drawing prints them.
func TestForestDescription(t *testing.T) {
	got := mustForest(t, nineTrials(), ForestStyle{}).Pages[0].Description
	for _, want := range []string{
		"Pooled risk ratio 0.71 (0.58 to 0.86); evidence, effect against none, 29 : 1, firm, 2.6 steps.",
		"95% prediction interval 0.49 to 1.03.", "tau, 0.13 (0 to 0.48)", "Bias is not in this number.",
		"Okwuosa 2012, brindle 2 of 17, without 7 of 18, 0.30 (0.073 to 1.26), weight 1.3%, 1.7 : 1",
		"Dvořák 2021 †, brindle – of 131",
	} {
		if !strings.Contains(got, want) {
			t.Errorf("the description lacks %q:\n%s", want, got)
		}
	}
}

// TestForestWordsOfTheBlock checks what stands beside the pooled bar.
func TestForestWordsOfTheBlock(t *testing.T) {
	for _, tt := range []struct {
		ln    float64
		bias  bool
		width float64
		want  []string
		not   []string
	}{
		{2.5528 * lnStep, true, WideWidth, []string{"firm, 2.6 steps", "bias is not in this number"}, nil},
		{2.5528 * lnStep, false, WideWidth, []string{"firm, 2.6 steps"}, []string{"bias is not in this number"}},
		{-0.4 * lnStep, false, WideWidth, []string{"faint for none, 0.4 steps", "1.7"}, nil}, // e^(0.4·1.317) = 1.69
		{12 * lnStep, false, WideWidth, []string{"massive, 12.0 steps", "> 10,000"}, nil},
		{2.5528 * lnStep, true, NarrowWidth, []string{"29 : 1, firm", "bias is not in", "this number"}, []string{"firm, 2.6 steps"}},
	} {
		in := nineTrials()
		in.Pooled.LnEvidence, in.BiasOpen = tt.ln, tt.bias
		page := mustForest(t, in, ForestStyle{Width: tt.width}).Pages[0]
		texts := textsOf(group(t, page, "pooled").Items)
		for _, want := range tt.want {
			if !slices.Contains(texts, want) {
				t.Errorf("ln %v: no %q in %q", tt.ln, want, texts)
			}
		}
		for _, not := range tt.not {
			if slices.Contains(texts, not) {
				t.Errorf("ln %v: %q in %q", tt.ln, not, texts)
			}
		}
	}
}

func TestForestWithoutTitle(t *testing.T) {
	with := mustForest(t, nineTrials(), ForestStyle{}).Pages[0]
	without := mustForest(t, nineTrials(), ForestStyle{NoTitle: true}).Pages[0]
	if slices.Contains(textsOf(without.Items), with.Title) || without.Title != with.Title {
		t.Error("the title must leave the picture and stay in the description")
	}
	if !(without.Height < with.Height-20) {
		t.Errorf("height %v without title, %v with", without.Height, with.Height)
	}
}

// TestForestGolden pins the form of three charts that were looked at.
func TestForestGolden(t *testing.T) {
	for name, chart := range map[string]struct {
		in    ForestInput
		style ForestStyle
		theme Theme
	}{
		"nine":   {nineTrials(), ForestStyle{}, Light},
		"narrow": {nineTrials(), ForestStyle{Width: NarrowWidth, ID: "narrow"}, Mono},
		"forty":  {manyTrials(40), ForestStyle{ID: "forty"}, Dark},
	} {
		got := written(t, mustForest(t, chart.in, chart.style).Pages[0], chart.theme)
		wellFormed(t, got)
		file := filepath.Join("testdata", "forest-"+name+".svg")
		if *update {
			if err := os.MkdirAll("testdata", 0o755); err != nil {
				t.Fatal(err)
			}
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
