package layout

import (
	"bytes"
	"encoding/xml"
	"errors"
	"io"
	"math"
	"slices"
	"strings"
	"testing"
)

// sample is a drawing with one item of each kind.
func sample() Drawing {
	return Drawing{ID: "sample", Width: 100, Height: 50, Title: "A <b> & c", Description: "Numbers", Items: []Item{
		Line{X1: 1, Y1: 2, X2: 3.14159, Y2: -0.001, Width: 0.5, Ink: Grid, Dash: []float64{0.6, 1.8}, Round: true},
		Group{ID: "marks", Title: "tip", Items: []Item{
			Rect{X: 1, Y: 1, Width: 2, Height: 2, Paint: Hollow(Evidence, 0.9)},
			Polygon{Points: []Point{{1, 1}, {2, 2}, {3, 1}}, Paint: Solid(Estimate)},
			Disc{X: 5, Y: 5, Radius: 2, Paint: Solid(EvidenceNone)},
		}},
		Text{Y: 20, Size: 7.5, Spans: []Span{{X: 50, Anchor: End, Text: "x", Bold: true, Italic: true}}},
		Text{Y: 30, Size: 7.5, Spans: []Span{
			{X: 50, Anchor: End, Text: "11"}, {X: 60, Anchor: Middle, Text: "of", Ink: Soft}, {Text: " more", Follow: true, Bold: true}}},
	}}
}

func written(t *testing.T, d Drawing, theme Theme) string {
	t.Helper()
	var b bytes.Buffer
	if err := WriteSVG(&b, d, theme); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

// wellFormed fails unless the text is one well-formed XML element; it returns
// the names of the elements met.
func wellFormed(t *testing.T, text string) []string {
	t.Helper()
	var names []string
	dec := xml.NewDecoder(strings.NewReader(text))
	for {
		tok, err := dec.Token()
		if errors.Is(err, io.EOF) {
			return names
		}
		if err != nil {
			t.Fatalf("SVG is not well-formed: %v", err)
		}
		if e, ok := tok.(xml.StartElement); ok {
			names = append(names, e.Name.Local)
		}
	}
}

func TestWriteSVG(t *testing.T) {
	got := written(t, sample(), Light)
	wellFormed(t, got)
	for _, want := range []string{
		`width="35.28mm" height="17.64mm" viewBox="0 0 100 50" role="img" aria-labelledby="sample-title sample-desc"`,
		`<title id="sample-title">A &lt;b&gt; &amp; c</title>`,
		`<line x1="1" y1="2" x2="3.14" y2="0" stroke="#D9D9D9" stroke-width="0.5" stroke-dasharray="0.6 1.8" stroke-linecap="round"/>`,
		"<g id=\"sample-marks\">\n    <title>tip</title>",
		`<rect x="1" y="1" width="2" height="2" fill="#FFFFFF" stroke="#D55E00" stroke-width="0.9"/>`,
		`<polygon points="1,1 2,2 3,1" fill="#0072B2"/>`,
		`<text x="50" y="20" font-size="7.5" fill="#1A1A1A" text-anchor="end" font-weight="bold" font-style="italic">x</text>`,
		`<tspan x="50" text-anchor="end">11</tspan><tspan x="60" text-anchor="middle" fill="#595959">of</tspan> <tspan font-weight="bold">more</tspan></text>`,
	} {
		if !strings.Contains(got, want) {
			t.Errorf("SVG lacks %s\n%s", want, got)
		}
	}
	if again := written(t, sample(), Light); again != got {
		t.Error("two runs gave different bytes")
	}
}

// TestThemeColours holds STYLE's demand that a page can recolour a drawing by
// its colours: within a theme no two roles of one chart share a colour.
func TestThemeColours(t *testing.T) {
	for theme, colours := range palette {
		for ink, c := range colours {
			if len(c) != 7 || c[0] != '#' || strings.Trim(c[1:], "0123456789ABCDEF") != "" {
				t.Errorf("%v: role %d has colour %q, want #RRGGBB", Theme(theme), ink, c)
			}
		}
	}
	seen := map[string]Ink{}
	for ink, c := range palette[Light] {
		if other, ok := seen[c]; ok {
			if Ink(ink) != FunnelFair || other != PooledBand {
				t.Errorf("roles %d and %d share %s in the light theme", other, ink, c)
			}
		}
		seen[c] = Ink(ink)
	}
	if got := written(t, sample(), Mono); !strings.Contains(got, `fill="#BDBDBD" stroke="#1A1A1A" stroke-width="0.5"`) {
		t.Error("in greys a bar for no effect has no outline")
	}
}

func TestClean(t *testing.T) {
	for _, tt := range []struct{ in, want string }{
		{"a\x00b\x1b[31mc\x7f", "ab[31mc"},
		{"one\ntwo\tthree", "one two three"},
		{"\u202eabc\u2066d\u200fe\ufeff", "abcde"},
		{"e\u0301", "é"},
		{"bad \xff byte", "bad \uFFFD byte"},
		{"<script>alert(1)</script>", "<script>alert(1)</script>"},
		{"  مرحبا 中文 ", "مرحبا 中文"},
	} {
		if got := Clean(tt.in); got != tt.want {
			t.Errorf("Clean(%q) = %q, want %q", tt.in, got, tt.want)
		}
	}
}

func TestRuns(t *testing.T) {
	text := Text{Size: 2048, Spans: []Span{ // one unit of the font is one point
		{X: 5000, Text: "00", Anchor: End}, {X: 5000, Text: "00", Anchor: Middle}, {Text: "0", Follow: true}}}
	want := []float64{5000 - 2278, 5000 - 1139, 5000 + 1139} // a digit is 1139 units wide in hmtx
	for i, run := range text.Runs() {
		if !(math.Abs(run.Left-want[i]) < 1e-9) {
			t.Errorf("run %d starts at %v, want %v", i, run.Left, want[i])
		}
	}
}

func TestMissingGlyphs(t *testing.T) {
	d := Drawing{Items: []Item{Group{Items: []Item{Text{Spans: []Span{{Text: "τ 中é"}, {Text: "ع中"}}}}}}}
	if got, want := missing([]Drawing{d}), []rune{'ع', '中'}; !slices.Equal(got, want) {
		t.Errorf("missing = %q, want %q", got, want)
	}
	if got := Printable("τ 中"); got != "τ □" {
		t.Errorf("Printable = %q", got)
	}
}

func TestThemeNames(t *testing.T) {
	var theme Theme
	if err := theme.UnmarshalText([]byte("Mono")); err != nil || theme != Mono {
		t.Errorf("Mono read as %v, %v", theme, err)
	}
	if err := theme.UnmarshalText([]byte("sepia")); err == nil {
		t.Error("an unknown theme was taken")
	}
	if got := Theme(9).Colour(Grid); got != "#1A1A1A" {
		t.Errorf("colour of an unknown theme %q, want the ordinary ink", got)
	}
}
