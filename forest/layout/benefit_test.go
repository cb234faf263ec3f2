package layout

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

// threeBaselines are the numbers of the design drawing
// (design/mock/benefit-trivial-harm.svg), computed for it independently: invented data.
func threeBaselines() BenefitInput {
	row := func(name, below string, estimate, low, high float64, value, interval string, benefit, harm float64, settings string) BenefitRow {
		return BenefitRow{Name: name, Below: below, Estimate: estimate, Low: low, High: high, From: -40, To: 40, Value: value, Interval: interval,
			Benefit: benefit, Harm: harm, Settings: settings}
	}
	return BenefitInput{
		Title: "Is the benefit large enough to matter?", Subtitle: "Flares per 1000 people at 24 hours, Brindle against none",
		PerThousand: true, Scale: EffectScale{Measure: "difference per 1000"}, Sides: Sides{Lower: "fewer", Higher: "more"},
		Zones: [2]string{"important benefit", "important harm"}, Heads: [2]string{"Important benefit : trivial", "Trivial : harm"},
		Under: "without brindle", Level: 0.95, Notes: []Note{{"Data", "invented."}},
		Rows: []BenefitRow{
			row("Low", "150 per 1000", -43.5, -62.4, -20.53, "44 fewer", "21 to 62 fewer", 0.1957, math.Log(1700), "58% of settings"),
			row("Middle", "300 per 1000", -87, -124.8, -41.06, "87 fewer", "41 to 125 fewer", 1.9301, math.Log(61), "87% of settings"),
			row("High", "450 per 1000", -130.5, -187.19, -61.59, "131 fewer", "62 to 187 fewer", 2.603, math.Log(18), "92% of settings"),
		},
	}
}

func mustBenefit(t testing.TB, in BenefitInput, style Style) Drawing {
	t.Helper()
	document, err := Benefit(in, style)
	if err != nil {
		t.Fatal(err)
	}
	if len(document.Pages) != 1 {
		t.Fatalf("%d pages", len(document.Pages))
	}
	return document.Pages[0]
}

// TestGoldenBenefit holds both widths to files that were looked at.
func TestGoldenBenefit(t *testing.T) {
	checkGolden(t, "benefit", mustBenefit(t, threeBaselines(), Style{}), Light)
	checkGolden(t, "benefit-narrow", mustBenefit(t, threeBaselines(), Style{Width: NarrowWidth}), Mono)
}

// TestBenefitPlaces compares places with those of the design drawing: heights, rail and
// texts to 0.02 points; along the axis of effects, whose ends were chosen by hand there,
// by its own two labelled points.
func TestBenefitPlaces(t *testing.T) {
	page := mustBenefit(t, threeBaselines(), Style{})
	near := func(what string, got, want float64) {
		t.Helper()
		if math.Abs(got-want) > 0.02 {
			t.Errorf("%s at %.3f, the design has %.2f", what, got, want)
		}
	}
	ends := []float64{315.25, 342.12, 352.54}
	for i := range 3 {
		items := group(t, page, fmt.Sprintf("row-%d", i+1)).Items
		bar := rectsOf(items, Solid(Evidence))[0]
		near("a bar", bar.X, 312.22)
		if got := bar.X + bar.Width; math.Abs(got-ends[i]) > 0.2 { // the ratios are given to two digits
			t.Errorf("bar %d ends at %.2f, the design has %.2f", i+1, got, ends[i])
		}
		near("its height", bar.Y, []float64{79.5, 101.5, 123.5}[i])
		shape := polygonsOf(items, Estimate)[0]
		near("a diamond", shape.Points[0].Y, []float64{83, 105, 127}[i])
	}
	grid := group(t, page, "grid").Items
	zone := rectsOf(grid, Solid(TrivialZone))
	if len(zone) != 1 {
		t.Fatalf("%d trivial zones, want one for all rows", len(zone))
	}
	near("the trivial zone", zone[0].Y, 69)
	near("its end", zone[0].Y+zone[0].Height, 141)
	place := axisPlaces(t, page)
	near("the lower threshold", zone[0].X, place(-40))
	near("the upper threshold", zone[0].X+zone[0].Width, place(40))
	for i, r := range threeBaselines().Rows {
		shape := polygonsOf(group(t, page, fmt.Sprintf("row-%d", i+1)).Items, Estimate)[0]
		near("a lower limit", shape.Points[0].X, place(r.Low))
		near("an estimate", shape.Points[1].X, place(r.Estimate))
		near("an upper limit", shape.Points[2].X, place(r.High))
	}
}

// axisPlaces reads the axis of effects off its labels: "200", fewer, at its left end and
// "0".
func axisPlaces(t *testing.T, page Drawing) func(float64) float64 {
	t.Helper()
	at := map[string]float64{}
	for _, it := range group(t, page, "axes").Items {
		text, ok := it.(Text)
		if !ok {
			continue
		}
		if _, seen := at[text.Spans[0].Text]; !seen {
			at[text.Spans[0].Text] = text.Spans[0].X
		}
	}
	left, zero := at["200"], at["0"]
	if !(left < zero) {
		t.Fatalf("labels at %v", at)
	}
	return func(v float64) float64 { return zero + v/200*(zero-left) }
}

// TestBenefitTexts: names, numbers, settings and odds stand as the design has them, and
// the description carries them.
func TestBenefitTexts(t *testing.T) {
	page := mustBenefit(t, threeBaselines(), Style{})
	texts := textsOf(page.Items)
	for _, want := range []string{"Baseline risk", "without brindle", "Difference per 1000 (95% interval)", "Important benefit : trivial", "Trivial : harm",
		"important benefit", "trivial", "important", "harm", "faint", "fair", "firm", "heavy", "44 fewer", "21 to 62 fewer", "58% of settings", "1,700", "6.9", "18"} {
		if !slices.Contains(texts, want) {
			t.Errorf("%q is missing from %q", want, texts)
		}
	}
	for _, want := range []string{"40 fewer per 1000 is an important benefit, 40 more per 1000 is an important harm",
		"Low 150 per 1000: 44 fewer (21 to 62 fewer); important benefit : trivial 1.2 : 1, 58% of settings beyond the threshold; trivial : harm 1,700 : 1."} {
		if !strings.Contains(page.Description, want) {
			t.Errorf("the description lacks %q: %s", want, page.Description)
		}
	}
	narrow := textsOf(mustBenefit(t, threeBaselines(), Style{Width: NarrowWidth}).Items)
	if text := strings.Join(narrow, " "); !strings.Contains(text, "44 fewer (21 to 62 fewer)") || !strings.Contains(text, "1,700 : 1; 61 : 1; 18 : 1, in the order of the rows.") {
		t.Errorf("the narrow form says %q", narrow)
	} else if strings.Contains(text, "Settings:") {
		t.Errorf("the narrow form explains what it does not show: %q", narrow)
	}
	in := threeBaselines()
	for i := range in.Rows {
		in.Rows[i].Harm = math.Log(61)
	}
	for rows, want := range map[int]string{3: "61 : 1 in every row.", 1: "61 : 1."} {
		in.Rows = in.Rows[:rows]
		if text := strings.Join(textsOf(mustBenefit(t, in, Style{Width: NarrowWidth}).Items), " "); !strings.Contains(text, " "+want) || strings.Contains(text, "in the order") {
			t.Errorf("%d rows alike: %q", rows, text)
		}
	}
}

// TestBenefitNarrowRows: the name of a row of the narrow form, descenders and all (a
// quarter of the size), stands clear above the trivial zone, the numbers below it.
func TestBenefitNarrowRows(t *testing.T) {
	page := mustBenefit(t, threeBaselines(), Style{Width: NarrowWidth})
	zones := rectsOf(group(t, page, "grid").Items, Solid(TrivialZone))
	for i, zone := range zones {
		for _, item := range group(t, page, rowID(i)).Items {
			text, ok := item.(Text)
			if !ok {
				continue
			}
			if text.Y < zone.Y+zone.Height/2 && text.Y+text.Size/4 > zone.Y || text.Y > zone.Y+zone.Height/2 && text.Y-0.75*text.Size < zone.Y+zone.Height {
				t.Errorf("row %d: a text at %v meets the zone from %v to %v", i, text.Y, zone.Y, zone.Y+zone.Height)
			}
		}
	}
	if len(zones) != 3 {
		t.Errorf("%d zones", len(zones))
	}
}

// TestBenefitOutOfReach: a row whose baseline cannot have so large an effect says so and
// has no bar; thresholds that differ by row have zones of their own.
func TestBenefitOutOfReach(t *testing.T) {
	in := threeBaselines()
	in.Rows[0].From, in.Rows[0].Benefit, in.Rows[1].To, in.Rows[1].Harm = math.NaN(), math.NaN(), math.NaN(), math.NaN()
	page := mustBenefit(t, in, Style{})
	first := group(t, page, "row-1").Items
	if len(rectsOf(first, Solid(Evidence))) != 0 || !slices.Contains(textsOf(first), outOfReach) {
		t.Errorf("row 1 has %q", textsOf(first))
	}
	if texts := textsOf(group(t, page, "row-2").Items); !slices.Contains(texts, outOfReach) {
		t.Errorf("row 2 has %q", texts)
	}
	if zones := rectsOf(group(t, page, "grid").Items, Solid(TrivialZone)); len(zones) != 3 {
		t.Errorf("%d zones", len(zones))
	}
	if !strings.Contains(page.Description, "important benefit is out of reach") {
		t.Errorf("description: %s", page.Description)
	}
}

// TestBenefitTrivialFavoured: evidence for a trivial effect runs to the left in grey.
func TestBenefitTrivialFavoured(t *testing.T) {
	in := threeBaselines()
	in.Rows[0].Benefit = -3 * lnStep
	page := mustBenefit(t, in, Style{})
	bar := rectsOf(group(t, page, "row-1").Items, Solid(EvidenceNone))
	if len(bar) != 1 || math.Abs(bar[0].Width-3.0*benefitRail/7) > 0.01 { // from -3 to 4 steps
		t.Errorf("bars %+v", bar)
	}
}

// TestBenefitNothingOverlaps: whatever the numbers, texts stand apart and on the page.
func TestBenefitNothingOverlaps(t *testing.T) {
	long := threeBaselines()
	long.Under = "without a treatment whose name goes on for very much longer than any column"
	long.Rows[1].Name = "People in long-term residential care with two earlier episodes, Łódź"
	long.Rows[2].Name = strings.Repeat("Unbroken", 12)
	ratio := threeBaselines()
	ratio.PerThousand, ratio.Scale = false, EffectScale{Measure: "ratio of means", Ratio: true}
	ratio.Rows = []BenefitRow{{Name: "Ratio of means", Estimate: 0.1, Low: -300, High: 300, From: -0.2, To: 0.2, Value: "1.11", Interval: "< 0.001 to > 1,000,000", Benefit: -2, Harm: 1}}
	for name, in := range map[string]BenefitInput{"design": threeBaselines(), "long": long, "ratio": ratio} {
		for _, style := range []Style{{}, {Width: NarrowWidth}, {Width: 400}, {NoTitle: true}, {TypeSize: 9}} {
			checkPage(t, fmt.Sprintf("%s %+v", name, style), mustBenefit(t, in, style))
		}
	}
	rapid.Check(t, func(r *rapid.T) {
		in := threeBaselines()
		for i := range in.Rows {
			row := &in.Rows[i]
			row.Low = rapid.Float64Range(-900, 900).Draw(r, "low")
			row.High = rapid.Float64Range(row.Low, 950).Draw(r, "high")
			row.Estimate = (row.Low + row.High) / 2
			row.From, row.To = -rapid.Float64Range(0.5, 300).Draw(r, "from"), rapid.Float64Range(0.5, 300).Draw(r, "to")
			row.Benefit, row.Harm = rapid.Float64Range(-40, 40).Draw(r, "benefit"), rapid.Float64Range(-40, 40).Draw(r, "harm")
		}
		for _, style := range []Style{{}, {Width: NarrowWidth}} {
			checkPage(t, "drawn", mustBenefit(t, in, style))
		}
	})
}

// TestBenefitRefused: what no axis can hold is refused by row.
func TestBenefitRefused(t *testing.T) {
	for says, change := range map[string]func(*BenefitInput){
		"no row with an important difference": func(in *BenefitInput) { in.Rows = nil },
		"row 2 (Middle 300 per 1000)":         func(in *BenefitInput) { in.Rows[1].High = math.Inf(1) },
		"both sides of no effect":             func(in *BenefitInput) { in.Rows[0].From = 5 },
		"ln of the evidence":                  func(in *BenefitInput) { in.Rows[0].Harm = math.Inf(1) },
		"level 95":                            func(in *BenefitInput) { in.Level = 95 },
	} {
		in := threeBaselines()
		change(&in)
		if _, err := Benefit(in, Style{}); err == nil || !strings.Contains(err.Error(), says) {
			t.Errorf("%s: %v", says, err)
		}
	}
	var narrow *TooNarrowError
	if _, err := Benefit(threeBaselines(), Style{Width: 90}); !errors.As(err, &narrow) {
		t.Errorf("a narrow chart: %v", err)
	}
}
