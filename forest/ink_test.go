package forest

import (
	"bytes"
	"compress/zlib"
	"encoding/binary"
	"errors"
	"image/png"
	"io"
	"strings"
	"testing"
	"unicode/utf16"

	"steelyard/forest/layout"
)

// sample is a page with one item of each kind; text stands at both corners.
func sample() layout.Drawing {
	return layout.Drawing{ID: "sample", Width: 144, Height: 72, Title: "Sample", Description: "One of each", Items: []layout.Item{
		layout.Line{X1: 10, Y1: 60, X2: 134, Y2: 60, Width: 2, Ink: layout.Ordinary},
		layout.Line{X1: 10, Y1: 64, X2: 134, Y2: 64, Width: 1, Ink: layout.EvidenceNone, Dash: []float64{0.6, 1.8}, Round: true},
		layout.Line{X1: 10, Y1: 68, X2: 134, Y2: 68, Width: 1, Ink: layout.Estimate, Dash: []float64{2, 2}},
		layout.Group{Items: []layout.Item{
			layout.Rect{X: 10, Y: 20, Width: 20, Height: 20, Paint: layout.Solid(layout.Evidence)},
			layout.Rect{X: 40, Y: 20, Width: 20, Height: 20, Paint: layout.Hollow(layout.Evidence, 2)},
			layout.Polygon{Points: []layout.Point{{X: 70, Y: 20}, {X: 90, Y: 20}, {X: 80, Y: 40}}, Paint: layout.Solid(layout.Estimate)},
			layout.Disc{X: 110, Y: 30, Radius: 10, Paint: layout.Solid(layout.Probability)},
		}},
		layout.Text{Y: 10, Size: 7.5, Spans: []layout.Span{{X: 2, Text: "Zielińska τ 中"}, {Text: " bold", Follow: true, Bold: true}}},
		layout.Text{Y: 50, Size: 7.5, Spans: []layout.Span{{X: 142, Anchor: layout.End, Text: "right", Italic: true, Bold: true}}},
		layout.Text{Y: 50, Size: 7.5, Spans: []layout.Span{{X: 72, Anchor: layout.Middle, Text: "middle", Italic: true}}},
	}}
}

// streams returns the inflated streams of a PDF.
func streams(t *testing.T, pdf []byte) []byte {
	t.Helper()
	var all []byte
	for {
		_, rest, ok := bytes.Cut(pdf, []byte("stream\n"))
		if !ok {
			return all
		}
		data, after, ok := bytes.Cut(rest, []byte("\nendstream"))
		if !ok {
			return all
		}
		pdf = after
		z, err := zlib.NewReader(bytes.NewReader(data))
		if err != nil {
			continue
		}
		plain, err := io.ReadAll(z)
		if err != nil {
			t.Fatal(err)
		}
		all = append(all, plain...)
	}
}

// utf16Text is how a PDF with Unicode fonts writes a text.
func utf16Text(text string) []byte {
	var b []byte
	for _, u := range utf16.Encode([]rune(text)) {
		b = binary.BigEndian.AppendUint16(b, u)
	}
	return b
}

func TestWritePDF(t *testing.T) {
	doc := layout.Document{Pages: []layout.Drawing{sample(), sample()}}
	doc.Pages[1].Height = 100
	var first, second bytes.Buffer
	for _, b := range []*bytes.Buffer{&first, &second} {
		if err := WritePDF(b, doc, layout.Light); err != nil {
			t.Fatal(err)
		}
	}
	if !bytes.Equal(first.Bytes(), second.Bytes()) {
		t.Error("two runs gave different bytes")
	}
	if n := strings.Count(first.String(), "/Type /Page\n"); n != 2 {
		t.Errorf("%d pages, want 2", n)
	}
	if !strings.Contains(first.String(), "144.00 100.00]") {
		t.Error("the second page does not have its own height")
	}
	plain := streams(t, first.Bytes())
	for _, want := range []string{"Zieli", "ńska τ □", "middle", " bold"} {
		if !bytes.Contains(plain, utf16Text(want)) {
			t.Errorf("PDF lacks the text %q", want)
		}
	}
	if err := WritePDF(io.Discard, layout.Document{}, layout.Light); !errors.Is(err, errNoPages) {
		t.Errorf("error of an empty document is %v", err)
	}
}

func TestWritePNG(t *testing.T) {
	var b bytes.Buffer
	if err := WritePNG(&b, sample(), layout.Light, 144); err != nil {
		t.Fatal(err)
	}
	data := bytes.Clone(b.Bytes())
	img, err := png.Decode(&b)
	if err != nil {
		t.Fatal(err)
	}
	if got := img.Bounds().Size(); got.X != 288 || got.Y != 144 {
		t.Errorf("size %v, want 288 × 144: twice 144 × 72 pt at 72 dpi", got)
	}
	at := bytes.Index(data, []byte("pHYs"))
	if at < 0 || binary.BigEndian.Uint32(data[at+4:]) != 5669 {
		t.Error("pHYs does not say 5669 pixels per metre, which is 144 / 0.0254")
	}
	for _, tt := range []struct {
		x, y int // points
		ink  layout.Ink
	}{
		{20, 30, layout.Evidence}, {50, 30, layout.Paper}, {40, 30, layout.Evidence}, {80, 25, layout.Estimate},
		{110, 30, layout.Probability}, {100, 60, layout.Ordinary}, {2, 70, layout.Paper},
	} {
		want := colourOf(layout.Light, tt.ink)
		r, g, blue, _ := img.At(2*tt.x, 2*tt.y).RGBA()
		if uint8(r>>8) != want.R || uint8(g>>8) != want.G || uint8(blue>>8) != want.B {
			t.Errorf("pixel at (%d, %d) pt is %v, want %v", tt.x, tt.y, img.At(2*tt.x, 2*tt.y), want)
		}
	}
}

func TestPNGTooLarge(t *testing.T) {
	page := sample()
	page.Width, page.Height = 500, 2000
	var large *TooLargeError
	if err := WritePNG(io.Discard, page, layout.Light, 600); !errors.As(err, &large) {
		t.Fatalf("error is %v, want a *TooLargeError", err)
	}
	if large.MostDPI != 455 { // 72 √(40e6 / 1e6) = 455.37
		t.Errorf("most dpi %d, want 455", large.MostDPI)
	}
	for _, dpi := range []int{0, -300, 1e9} {
		if err := WritePNG(io.Discard, sample(), layout.Light, dpi); err == nil {
			t.Errorf("%d dpi was taken", dpi)
		}
	}
}
