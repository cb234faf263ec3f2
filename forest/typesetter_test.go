package forest

import (
	"bytes"
	"image"
	"image/png"
	"testing"

	"golang.org/x/image/font"
	"golang.org/x/image/font/sfnt"
	"golang.org/x/image/math/fixed"

	"steelyard/forest/layout"
)

// TestLettersStandWhereTheFontSays sets single letters at 72 pixels per inch, where a
// point is a pixel, and finds their ink within the box that the font file states for them,
// and no smaller, in each of the four styles.
func TestLettersStandWhereTheFontSays(t *testing.T) {
	const left, base, size = 20, 70, 48
	for _, style := range []struct{ bold, italic bool }{{}, {bold: true}, {italic: true}, {bold: true, italic: true}} {
		for _, letter := range "Hgż.≤" {
			page := layout.Drawing{ID: "letter", Width: 100, Height: 100, Items: []layout.Item{layout.Text{Y: base, Size: size,
				Spans: []layout.Span{{X: left, Text: string(letter), Bold: style.bold, Italic: style.italic}}}}}
			var file bytes.Buffer
			if err := WritePNG(&file, page, layout.Light, 72); err != nil {
				t.Fatal(err)
			}
			picture, err := png.Decode(&file)
			if err != nil {
				t.Fatal(err)
			}
			got, want := inked(picture), stated(t, letter, style.bold, style.italic, size).Add(image.Pt(left, base))
			// A pixel that the outline merely grazes may stay paper.
			if !got.In(want) || got.Empty() || !want.Inset(1).In(got) {
				t.Errorf("%c, %+v: ink in %v, the font says %v", letter, style, got, want)
			}
		}
	}
}

// inked is the smallest rectangle that holds all pixels other than white.
func inked(picture image.Image) image.Rectangle {
	var all image.Rectangle
	for y := picture.Bounds().Min.Y; y < picture.Bounds().Max.Y; y++ {
		for x := picture.Bounds().Min.X; x < picture.Bounds().Max.X; x++ {
			if r, g, b, _ := picture.At(x, y).RGBA(); r+g+b < 3*0xFFFF {
				all = all.Union(image.Rect(x, y, x+1, y+1))
			}
		}
	}
	return all
}

// stated is the box that the font file gives for a letter at the origin.
func stated(t *testing.T, letter rune, bold, italic bool, size int) image.Rectangle {
	t.Helper()
	style := ""
	if bold {
		style += "B"
	}
	if italic {
		style += "I"
	}
	face, err := sfnt.Parse(pdfFonts[style])
	if err != nil {
		t.Fatal(err)
	}
	var buffer sfnt.Buffer
	index, err := face.GlyphIndex(&buffer, letter)
	if err != nil || index == 0 {
		t.Fatalf("%c: glyph %d, %v", letter, index, err)
	}
	box, _, err := face.GlyphBounds(&buffer, index, fixed.I(size), font.HintingNone)
	if err != nil {
		t.Fatal(err)
	}
	return image.Rect(box.Min.X.Floor(), box.Min.Y.Floor(), box.Max.X.Ceil(), box.Max.Y.Ceil())
}
