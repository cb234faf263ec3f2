package layout

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"
)

func mustInfluence(t testing.TB, in InfluenceInput, style Style) Document {
	t.Helper()
	doc, err := Influence(in, style)
	if err != nil {
		t.Fatal(err)
	}
	return doc
}

// difficultInfluences are charts that strain the layout.
func difficultInfluences() map[string]InfluenceInput {
	extreme := nineInfluence()
	extreme.Title = "A title that is far too long for one line of a chart, so that it has to go on to a second and perhaps to a third line"
	extreme.Sides = Sides{Lower: "fewer flares of Vane syndrome within twenty-four weeks", Higher: "more flares of Vane syndrome within 24 weeks"}
	extreme.Rows[0].Name, extreme.Rows[1].Name, extreme.Rows[2].Year = "中文作者和同事", strings.Repeat("Unbroken", 30), ""
	extreme.Rows[3].Pull, extreme.Rows[4].Pull = -1e9, 1e12
	extreme.Rows[5].Weights = &InfluenceWeight{Residual: 4e5, Leverage: 1}
	extreme.Rows[6].Carried, extreme.Rows[7].Carried = -1e6, 1e6
	extreme.Pooled.LnEvidence = 1e6

	linear := nineInfluence()
	linear.Scale = EffectScale{Measure: "standardised mean difference of a long name", Decimals: 3}
	linear.Study, linear.Title, linear.Subtitle, linear.Notes = "", "", "", nil
	linear.Pooled.LnEvidence = -0.5

	plain := nineInfluence() // of a method without weights
	for i := range plain.Rows {
		plain.Rows[i].Weights = nil
	}

	failed := nineInfluence()
	failed.Rows[2].Problem, failed.Rows[5].Problem = "no finite estimate", "no finite estimate"
	failed.Rows[2].Weights = nil

	still := nineInfluence()
	for i := range still.Rows {
		still.Rows[i].Pull, still.Rows[i].Carried = 0, 0
		still.Rows[i].Weights = &InfluenceWeight{Leverage: 1.0 / 9}
	}
	return map[string]InfluenceInput{"extreme": extreme, "linear": linear, "plain": plain, "failed": failed, "still": still}
}

func TestInfluenceNothingOverlaps(t *testing.T) {
	for k := 2; k <= 120; k++ {
		if k > 52 && k%17 != 0 && k != 120 {
			continue
		}
		for _, style := range []Style{{}, {Width: NarrowWidth}} {
			for i, page := range mustInfluence(t, manyInfluences(k), style).Pages {
				checkPage(t, fmt.Sprintf("%d rows, width %.0f, page %d", k, page.Width, i+1), page)
				if page.Height > maxPageHeight {
					t.Errorf("%d rows: page of %.0f pt, at most %.0f (230 mm)", k, page.Height, maxPageHeight)
				}
			}
		}
	}
	for name, in := range difficultInfluences() {
		for _, style := range []Style{{}, {Width: NarrowWidth}, {Width: 400, NoTitle: true}, {Width: NarrowWidth, TypeSize: 8.3}, {TypeSize: 9}} {
			doc, err := Influence(in, style)
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

// axisLines returns the level lines of the axes, in the order of the gauges.
func axisLines(t *testing.T, d Drawing) []Line {
	t.Helper()
	var all []Line
	for _, l := range linesOf(group(t, d, "axes").Items, Ordinary) {
		if l.Y1 == l.Y2 {
			all = append(all, l)
		}
	}
	return all
}

// TestInfluenceMarks holds every mark to its value by the ends of its axis:
// pull −1 to 1, residual −3 to 3, leverage 0 to 20%, evidence −1.5 to 1 steps.
func TestInfluenceMarks(t *testing.T) {
	page := mustInfluence(t, nineInfluence(), Style{}).Pages[0]
	axes := axisLines(t, page)
	if len(axes) != 4 {
		t.Fatalf("%d axes, want 4", len(axes))
	}
	place := func(axis int, low, high, v float64) float64 {
		return axes[axis].X1 + (v-low)/(high-low)*(axes[axis].X2-axes[axis].X1)
	}
	near := func(a, b float64) bool { return math.Abs(a-b) < 1e-9 }
	for i, want := range nineInfluences {
		row := group(t, page, fmt.Sprintf("row-%d", i+1)).Items
		bars := rectsOf(row, Solid(Estimate))
		zero, end := place(0, -1, 1, 0), place(0, -1, 1, want.pull)
		if b := bars[0]; !near(b.X, min(zero, end)) || !near(b.X+b.Width, max(zero, end)) {
			t.Errorf("%s: pull from %.2f to %.2f, want %.2f and %.2f", want.name, b.X, b.X+b.Width, zero, end)
		}
		if b := bars[1]; !near(b.X, axes[2].X1) || !near(b.X+b.Width, place(2, 0, 0.2, want.leverage)) {
			t.Errorf("%s: leverage ends at %.2f, want %.2f", want.name, b.X+b.Width, place(2, 0, 0.2, want.leverage))
		}
		discs := 0
		each(row, func(it Item) {
			if d, ok := it.(Disc); ok {
				if discs++; !near(d.X, place(1, -3, 3, want.residual)) {
					t.Errorf("%s: residual at %.2f, want %.2f", want.name, d.X, place(1, -3, 3, want.residual))
				}
			}
		})
		if discs != 1 {
			t.Errorf("%s: %d discs, want 1", want.name, discs)
		}
		if want.carried > 0 {
			b := rectsOf(row, Solid(Evidence))[0]
			if !near(b.X, place(3, -1.5, 1, 0)) || !near(b.X+b.Width, place(3, -1.5, 1, want.carried)) {
				t.Errorf("%s: carries to %.2f, want %.2f", want.name, b.X+b.Width, place(3, -1.5, 1, want.carried))
			}
			continue
		}
		hollow := rectsOf(row, Hollow(Evidence, 0.9))
		if len(hollow) != 1 || !near(hollow[0].X-0.45, place(3, -1.5, 1, want.carried)) {
			t.Errorf("%s: holds evidence back, want a hollow bar from %.2f", want.name, place(3, -1.5, 1, want.carried))
		}
	}
	guides := linesOf(group(t, page, "grid").Items, Soft)
	if len(guides) != 3 || !near(guides[0].X1, place(1, -3, 3, -2)) || !near(guides[1].X1, place(1, -3, 3, 2)) || !near(guides[2].X1, place(2, 0, 0.2, 1.0/9)) {
		t.Errorf("guides at %v, want ±2 and the even share", guides)
	}
}

// TestInfluenceNumbers holds the printed numbers to the values rounded by hand.
func TestInfluenceNumbers(t *testing.T) {
	for _, width := range []float64{WideWidth, NarrowWidth} {
		page := mustInfluence(t, nineInfluence(), Style{Width: width}).Pages[0]
		row := group(t, page, "row-5")
		texts := textsOf(row.Items)
		want := []string{"Marchetti-Ruiz 2015", "+0.99", "+2.76", "14.2", "−1.04"}
		if width == NarrowWidth {
			want[3] = "leverage 14.2%"
		}
		for _, w := range want {
			if !slices.Contains(texts, w) {
				t.Errorf("width %.0f: no %q in %q", width, w, texts)
			}
		}
		bold := map[string]bool{}
		each(page.Items, func(it Item) {
			if text, ok := it.(Text); ok {
				for _, s := range text.Spans {
					bold[s.Text] = s.Bold
				}
			}
		})
		if !bold["+2.76"] || bold["−1.37"] {
			t.Errorf("width %.0f: residuals beyond ±2 are bold, others not", width)
		}
	}
	pooled := textsOf(group(t, mustInfluence(t, nineInfluence(), Style{}).Pages[0], "pooled").Items)
	for _, want := range []string{"All 9 trials", "0.71 (0.58 to 0.86)", "1 beyond ±2", "even 11.1", "29 : 1, firm, 2.6 steps"} {
		if !slices.Contains(pooled, want) {
			t.Errorf("the pooled row lacks %q: %q", want, pooled)
		}
	}
}

func TestInfluenceOrderAndPages(t *testing.T) {
	in := nineInfluence()
	in.ByPull = true
	page := mustInfluence(t, in, Style{}).Pages[0]
	for i, want := range []string{"Marchetti-Ruiz 2015", "Lindqvist 2017", "Halvorsen 2009"} { // 0.99, 0.56, 0.17
		if got := textsOf(group(t, page, fmt.Sprintf("row-%d", i+1)).Items)[0]; got != want {
			t.Errorf("row %d by pull is %q, want %q", i+1, got, want)
		}
	}
	doc := mustInfluence(t, manyInfluences(120), Style{})
	if len(doc.Pages) != 3 || doc.Pages[1].ID != "influence-2" {
		t.Fatalf("%d pages, want 3 of 40 rows", len(doc.Pages))
	}
	for i, page := range doc.Pages {
		if rows := group(t, page, "trials").Items; len(rows) != 40 {
			t.Errorf("page %d has %d rows, want 40", i+1, len(rows))
		}
		if a, b := axisLines(t, page)[0], axisLines(t, doc.Pages[0])[0]; a.X1 != b.X1 || a.X2 != b.X2 {
			t.Errorf("page %d has axes of its own", i+1)
		}
	}
}

// TestInfluenceClips ends what lies past an axis in a head, and tells the number.
func TestInfluenceClips(t *testing.T) {
	page := mustInfluence(t, difficultInfluences()["extreme"], Style{}).Pages[0]
	for row, want := range map[int]string{4: "< −9,999", 5: "> +9,999", 7: "< −9,999", 8: "> +9,999"} {
		items := group(t, page, fmt.Sprintf("row-%d", row)).Items
		if heads := len(polygonsOf(items, Estimate)) + len(polygonsOf(items, Evidence)); heads != 1 || !slices.Contains(textsOf(items), want) {
			t.Errorf("row %d: %d heads and %q, want 1 and %s", row, heads, textsOf(items), want)
		}
	}
	bar, end := rectsOf(group(t, page, "row-5").Items, Solid(Estimate))[0], axisLines(t, page)[0].X2
	if math.Abs(bar.X+bar.Width-(end-3.75)) > 1e-9 {
		t.Errorf("a clipped bar ends at %.2f, want 3.75 pt before the end of the axis at %.2f, where its head begins", bar.X+bar.Width, end)
	}
	if heads := polygonsOf(group(t, page, "row-6").Items, Estimate); len(heads) != 1 {
		t.Errorf("a residual of 400,000 has %d heads, want 1", len(heads))
	}
}

func TestInfluenceWithoutWeightsOrResult(t *testing.T) {
	plain := mustInfluence(t, difficultInfluences()["plain"], Style{}).Pages[0]
	if n := len(axisLines(t, plain)); n != 2 {
		t.Errorf("%d axes without weights, want those of pull and evidence", n)
	}
	if strings.Contains(plain.Description, "residual") || strings.Contains(plain.Description, "leverage") {
		t.Error("the description tells of weights that are not there")
	}
	failed := mustInfluence(t, difficultInfluences()["failed"], Style{}).Pages[0]
	if got := textsOf(group(t, failed, "row-3").Items); !slices.Equal(got, []string{"Okwuosa 2012", "—", "—", "—", "—"}) {
		t.Errorf("a row without a result shows %q", got)
	}
	if notes := strings.Join(textsOf(group(t, failed, "notes").Items), " "); !strings.Contains(notes, "without Okwuosa 2012, without Lindqvist 2017 the rest could not be pooled (no finite estimate)") {
		t.Errorf("the notes do not say what failed: %s", notes)
	}
}

func TestInfluenceDescription(t *testing.T) {
	got := mustInfluence(t, nineInfluence(), Style{}).Pages[0].Description
	for _, want := range []string{
		"All 9 trials: pooled risk ratio 0.71 (0.58 to 0.86); evidence, effect against none, 29 : 1, firm, 2.6 steps.",
		"Residuals: 1 beyond ±2. An even leverage is 11.1%.",
		"Marchetti-Ruiz 2015, pull +0.99 standard errors, residual +2.76, leverage 14.2%, carries −1.04 steps",
		"Dvořák 2021 †, pull +0.03 standard errors, residual +0.01, leverage 13.5%, carries +0.65 steps",
	} {
		if !strings.Contains(got, want) {
			t.Errorf("the description lacks %q:\n%s", want, got)
		}
	}
}

func TestInfluenceRefuses(t *testing.T) {
	for _, bad := range []float64{math.NaN(), math.Inf(1), math.Inf(-1), 1e308, -1e308} {
		for field, set := range map[string]func(*InfluenceInput){
			"pull":     func(in *InfluenceInput) { in.Rows[1].Pull = bad },
			"carried":  func(in *InfluenceInput) { in.Rows[1].Carried = bad },
			"residual": func(in *InfluenceInput) { in.Rows[1].Weights.Residual = bad },
			"leverage": func(in *InfluenceInput) { in.Rows[1].Weights.Leverage = bad },
			"pooled":   func(in *InfluenceInput) { in.Pooled.High = bad },
			"evidence": func(in *InfluenceInput) { in.Pooled.LnEvidence = bad },
			"level":    func(in *InfluenceInput) { in.Level = bad },
		} {
			in := nineInfluence()
			set(&in)
			if _, err := Influence(in, Style{}); err == nil {
				t.Errorf("%s of %v was drawn", field, bad)
			}
		}
	}
	in := nineInfluence()
	in.Rows[3].Weights.Leverage = 1.5
	if _, err := Influence(in, Style{}); err == nil || !strings.Contains(err.Error(), "row 4 (Brandão): leverage 1.5") {
		t.Errorf("a leverage of 1.5 gave %v, want an error that names row 4", err)
	}
	in.Rows = in.Rows[:1]
	if _, err := Influence(in, Style{}); err == nil {
		t.Error("a chart of one row was drawn")
	}
	var narrow *TooNarrowError
	if _, err := Influence(nineInfluence(), Style{Width: 120}); !errors.As(err, &narrow) {
		t.Fatalf("a width of 120 pt gave %v, want a *TooNarrowError", err)
	}
	if _, err := Influence(nineInfluence(), Style{Width: narrow.Least}); err != nil {
		t.Errorf("the width said to be enough, %.1f pt, gave %v", narrow.Least, err)
	}
}

func TestInfluenceHostileNames(t *testing.T) {
	in := nineInfluence()
	in.Rows[0].Name = "<script>alert(1)</script>\x00\x1b\u202e & \"q\" ]]> <!--"
	in.Title, in.Sides.Lower = "</title><script>", "<b>&"
	in.Notes[0].Text = "<style>*{display:none}</style>"
	in.Rows[1].Problem = "<i>\x07"
	for _, style := range []Style{{ID: `x" onload="y`}, {Width: NarrowWidth}} {
		checkHostile(t, mustInfluence(t, in, style).Pages[0])
	}
}

// checkHostile fails if markup, control characters or an attribute came out of a
// text.
func checkHostile(t *testing.T, page Drawing) {
	t.Helper()
	svg := written(t, page, Light)
	for _, element := range wellFormed(t, svg) {
		if !slices.Contains([]string{"svg", "title", "desc", "rect", "line", "polygon", "circle", "g", "text", "tspan"}, element) {
			t.Errorf("element <%s> came out of a text", element)
		}
	}
	page.Each(func(it Item) {
		if text, ok := it.(Text); ok && strings.ContainsAny(text.Spans[0].Text, "\x00\x07\x1b\u202e\u2067") {
			t.Errorf("control characters stand in %q", text.Spans[0].Text)
		}
	})
	if strings.ContainsAny(svg, "\x00\x07\x1b\u202e\u2067") || strings.Contains(svg, `" onload="`) {
		t.Error("control characters or an attribute came through")
	}
}

func TestInfluenceGolden(t *testing.T) {
	checkGolden(t, "influence-nine", mustInfluence(t, nineInfluence(), Style{}).Pages[0], Light)
	checkGolden(t, "influence-narrow", mustInfluence(t, nineInfluence(), Style{Width: NarrowWidth, ID: "narrow"}).Pages[0], Mono)
	checkGolden(t, "influence-forty", mustInfluence(t, manyInfluences(40), Style{ID: "forty"}).Pages[0], Dark)
}

func BenchmarkInfluence(b *testing.B) {
	for _, k := range []int{13, 120} {
		b.Run(fmt.Sprintf("rows=%d", k), func(b *testing.B) {
			in := manyInfluences(k)
			b.ReportAllocs()
			for b.Loop() {
				if _, err := Influence(in, Style{}); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
