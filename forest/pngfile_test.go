package forest

import (
	"bytes"
	"image"
	"image/png"
	"testing"

	"pgregory.net/rapid"

	"steelyard/forest/layout"
)

// TestEncodePNG: the standard library reads back every pixel of pictures with rows that
// repeat and rows that do not.
func TestEncodePNG(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		width, height := rapid.IntRange(1, 20).Draw(t, "width"), rapid.IntRange(1, 20).Draw(t, "height")
		picture := image.NewRGBA(image.Rect(0, 0, width, height))
		for y := range height {
			line := picture.Pix[y*picture.Stride:][:4*width]
			if y > 0 && rapid.Bool().Draw(t, "repeats") {
				copy(line, picture.Pix[(y-1)*picture.Stride:])
				continue
			}
			for i := range line {
				line[i] = 0xFF
				if i%4 != 3 {
					line[i] = rapid.Byte().Draw(t, "colour")
				}
			}
		}
		var file bytes.Buffer
		if err := encodePNG(&file, picture, 300); err != nil {
			t.Fatal(err)
		}
		read, err := png.Decode(&file)
		if err != nil {
			t.Fatal(err)
		}
		if read.Bounds() != picture.Rect {
			t.Fatalf("bounds %v, want %v", read.Bounds(), picture.Rect)
		}
		for y := range height {
			for x := range width {
				r, g, b, _ := read.At(x, y).RGBA()
				wantR, wantG, wantB, _ := picture.At(x, y).RGBA()
				if r != wantR || g != wantG || b != wantB {
					t.Fatalf("pixel (%d, %d) is %v, want %v", x, y, read.At(x, y), picture.At(x, y))
				}
			}
		}
	})
}

// TestSheetIsClean: a picture that takes the memory of an earlier one shows nothing of it,
// whichever is the larger.
func TestSheetIsClean(t *testing.T) {
	sizes := [][2]int{{40, 30}, {7, 5}, {50, 60}, {1, 1}}
	for _, theme := range []layout.Theme{layout.Light, layout.Mono} {
		paper := colourOf(theme, layout.Paper)
		for _, size := range sizes {
			picture := sheetOf(size[0], size[1], theme)
			if got := picture.Rect.Size(); got != (image.Point{X: size[0], Y: size[1]}) {
				t.Fatalf("size %v, want %v", got, size)
			}
			for y := range size[1] {
				for x := range size[0] {
					if picture.RGBAAt(x, y) != paper {
						t.Fatalf("%v: pixel (%d, %d) is %v, want paper", size, x, y, picture.RGBAAt(x, y))
					}
				}
			}
			for i := range picture.Pix {
				picture.Pix[i] = 7
			}
			sheets.Put(picture)
		}
	}
}
