package forest

import (
	"image"
	"image/color"
	"image/draw"
	"math"
	"sync"

	"codeberg.org/go-fonts/liberation/liberationsansbold"
	"codeberg.org/go-fonts/liberation/liberationsansbolditalic"
	"codeberg.org/go-fonts/liberation/liberationsansitalic"
	"codeberg.org/go-fonts/liberation/liberationsansregular"
	"golang.org/x/image/font"
	"golang.org/x/image/font/opentype"
	"golang.org/x/image/font/sfnt"
	"golang.org/x/image/math/fixed"
)

// letterStyle is a style and size of type, in points.
type letterStyle struct {
	bold, italic bool
	size         float64
}

// typesetter sets single characters on a picture.
type typesetter struct {
	picture *image.RGBA
	dpi     int
	faces   map[letterStyle]font.Face
	face    font.Face // chosen
}

// choose takes up a style and size of type, in points.
func (t *typesetter) choose(bold, italic bool, size float64) {
	style := letterStyle{bold, italic, size}
	face, known := t.faces[style]
	if !known {
		var err error
		face, err = opentype.NewFace(typeface(bold, italic)(), &opentype.FaceOptions{Size: size, DPI: float64(t.dpi)})
		if err != nil {
			panic("forest: the embedded type face cannot be used: " + err.Error())
		}
		if t.faces == nil {
			t.faces = make(map[letterStyle]font.Face)
		}
		t.faces[style] = face
	}
	t.face = face
}

// set draws a character with its base line's left end at a pixel position.
func (t *typesetter) set(r rune, x, y float64, ink color.RGBA) {
	dot := fixed.Point26_6{X: sixtyFourths(x), Y: sixtyFourths(y)}
	where, mask, from, _, ok := t.face.Glyph(dot, r)
	if ok {
		draw.DrawMask(t.picture, where, image.NewUniform(ink), image.Point{}, mask, from, draw.Over)
	}
}

// sixtyFourths rounds a length to the 64ths of a pixel at which characters are placed.
func sixtyFourths(x float64) fixed.Int26_6 { return fixed.Int26_6(math.Round(x * 64)) }

// The faces are read at their first use; they may be used side by side.
var (
	regularFace    = readFace(liberationsansregular.TTF)
	boldFace       = readFace(liberationsansbold.TTF)
	italicFace     = readFace(liberationsansitalic.TTF)
	boldItalicFace = readFace(liberationsansbolditalic.TTF)
)

func readFace(file []byte) func() *sfnt.Font {
	return sync.OnceValue(func() *sfnt.Font {
		face, err := sfnt.Parse(file)
		if err != nil {
			panic("forest: the embedded type face cannot be read: " + err.Error())
		}
		return face
	})
}

func typeface(bold, italic bool) func() *sfnt.Font {
	switch {
	case bold && italic:
		return boldItalicFace
	case bold:
		return boldFace
	case italic:
		return italicFace
	}
	return regularFace
}
