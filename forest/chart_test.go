package forest

import (
	"bytes"
	"fmt"
	"image/png"
	"io"
	"math"
	"testing"

	"steelyard/forest/layout"
)

// chart is a forest chart of k invented trials.
func chart(tb testing.TB, k int) layout.Document {
	tb.Helper()
	in := layout.ForestInput{
		Title: "Flare within 24 weeks, Vane syndrome (invented)", Study: "trial", Level: 0.95, BiasOpen: true,
		Scale: layout.EffectScale{Measure: "risk ratio", Ratio: true},
		ForestSummary: layout.ForestSummary{
			Pooled:     &layout.ForestPooled{Estimate: -0.35, Low: -0.54, High: -0.15, LnEvidence: 3.4, K: k},
			Prediction: &layout.ForestPrediction{Low: -0.72, High: 0.03},
			Spread:     &layout.ForestSpread{Tau: 0.13},
		},
	}
	for i := range k {
		y := 0.3 * math.Sin(float64(i))
		in.Rows = append(in.Rows, layout.ForestRow{Name: fmt.Sprintf("Zielińska-%d", i+1), Year: "2011", Estimate: y, Low: y - 0.5, High: y + 0.5,
			Weight: 1 / float64(k), LnEvidence: y * 5, Unwanted: y > 0, Dagger: i == 0})
	}
	doc, err := layout.Forest(in, layout.ForestStyle{})
	if err != nil {
		tb.Fatal(err)
	}
	return doc
}

// TestChartTextInPDF finds every text of a chart of two pages in the PDF.
func TestChartTextInPDF(t *testing.T) {
	doc := chart(t, 60)
	var first, second bytes.Buffer
	for _, b := range []*bytes.Buffer{&first, &second} {
		if err := WritePDF(b, doc, layout.Light); err != nil {
			t.Fatal(err)
		}
	}
	if !bytes.Equal(first.Bytes(), second.Bytes()) {
		t.Error("two runs gave different bytes")
	}
	plain := streams(t, first.Bytes())
	// Brackets stand with a backslash before them in a PDF string.
	plain = bytes.ReplaceAll(bytes.ReplaceAll(plain, []byte(`\(`), []byte("(")), []byte(`\)`), []byte(")"))
	texts := 0
	for _, page := range doc.Pages {
		page.Each(func(it layout.Item) {
			text, ok := it.(layout.Text)
			if !ok {
				return
			}
			for _, s := range text.Spans {
				texts++
				if !bytes.Contains(plain, utf16Text(s.Text)) {
					t.Errorf("the PDF lacks %q", s.Text)
				}
			}
		})
	}
	if len(doc.Pages) != 2 || texts < 400 {
		t.Errorf("%d pages with %d texts, want 2 with at least 60 rows of 7", len(doc.Pages), texts)
	}
}

// TestChartPNG draws a chart and finds ink where the layout has it: the paper's
// corner, and the middle of the first square.
func TestChartPNG(t *testing.T) {
	page := chart(t, 13).Pages[0]
	var first, second bytes.Buffer
	for _, b := range []*bytes.Buffer{&first, &second} {
		if err := WritePNG(b, page, layout.Light, 144); err != nil {
			t.Fatal(err)
		}
	}
	if !bytes.Equal(first.Bytes(), second.Bytes()) {
		t.Error("two runs gave different bytes")
	}
	img, err := png.Decode(&first)
	if err != nil {
		t.Fatal(err)
	}
	if size := img.Bounds().Size(); math.Abs(float64(size.X)-2*page.Width) > 1 || math.Abs(float64(size.Y)-2*page.Height) > 1 {
		t.Errorf("size %v, want twice %.1f × %.1f", size, page.Width, page.Height)
	}
	squares := 0
	page.Each(func(it layout.Item) {
		r, ok := it.(layout.Rect)
		if !ok || r.Paint != layout.Solid(layout.Estimate) {
			return
		}
		squares++
		want := colourOf(layout.Light, layout.Estimate)
		got, green, blue, _ := img.At(int(2*(r.X+r.Width/2)), int(2*(r.Y+r.Height/2))).RGBA()
		if uint8(got>>8) != want.R || uint8(green>>8) != want.G || uint8(blue>>8) != want.B {
			t.Errorf("no ink in the square at (%.1f, %.1f)", r.X, r.Y)
		}
	})
	if squares != 13 {
		t.Errorf("%d squares, want 13", squares)
	}
}

func BenchmarkWritePDF(b *testing.B) {
	doc := chart(b, 13)
	b.ReportAllocs()
	for b.Loop() {
		if err := WritePDF(io.Discard, doc, layout.Light); err != nil {
			b.Fatal(err)
		}
	}
}

func BenchmarkWritePNG(b *testing.B) {
	for _, dpi := range []int{96, 300} {
		b.Run(fmt.Sprintf("dpi=%d", dpi), func(b *testing.B) {
			page := chart(b, 13).Pages[0]
			b.ReportAllocs()
			for b.Loop() {
				if err := WritePNG(io.Discard, page, layout.Light, dpi); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
