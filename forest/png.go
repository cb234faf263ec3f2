package forest

import (
	"fmt"
	"image"
	"io"
	"math"
	"sync"

	"git.sr.ht/~sbinet/gg"

	"steelyard/forest/layout"
)

// maxPixels is the largest PNG that is drawn; beyond it memory and time run
// away (500 rows at 300 dpi took 0.7 GB).
const maxPixels = 40e6

const pointsPerInch = 72

// TooLargeError reports a PNG that would have more than 40 million pixels.
type TooLargeError struct {
	Width, Height float64 // pixels asked for
	DPI, MostDPI  int     // asked for, and the most that this page allows
}

func (e *TooLargeError) Error() string {
	return fmt.Sprintf("PNG of %.0f × %.0f pixels at %d dpi: more than 40 million pixels; ask for at most %d dpi, or write PDF or SVG, which have no pixels",
		e.Width, e.Height, e.DPI, e.MostDPI)
}

// WritePNG writes one page as a PNG image with dpi pixels per inch, which the
// file states, so that it prints at the size of the drawing. dpi must lie from
// 36 to 2400; an image of more than 40 million pixels is refused with a
// *TooLargeError. Characters without a glyph are drawn as hollow boxes.
func WritePNG(w io.Writer, page layout.Drawing, theme layout.Theme, dpi int) error {
	if dpi < 36 || dpi > 2400 {
		return fmt.Errorf("resolution of %d dpi: must be from 36 to 2400; 300 suits print, 150 a screen", dpi)
	}
	scale := float64(dpi) / pointsPerInch
	width, height := page.Width*scale, page.Height*scale
	if !(width*height <= maxPixels) {
		most := math.Sqrt(maxPixels/(page.Width*page.Height)) * pointsPerInch
		return &TooLargeError{Width: width, Height: height, DPI: dpi, MostDPI: int(most)}
	}
	picture := sheetOf(int(width+0.5), int(height+0.5), theme)
	defer sheets.Put(picture)
	canvas := gg.NewContextForRGBA(picture)
	canvas.SetLineCapButt()
	ink := pngInk{canvas: canvas, letters: typesetter{picture: picture, dpi: dpi}, theme: theme, scale: scale, foot: float64(picture.Rect.Dy()) - height}
	page.Each(ink.draw)
	if err := encodePNG(w, picture, dpi); err != nil {
		return fmt.Errorf("writing the PNG: %w", err)
	}
	return nil
}

// sheets keeps pictures that are no longer needed, whose memory the next one takes.
var sheets sync.Pool

// sheetOf returns a picture of the given size in pixels, all in the colour of paper.
func sheetOf(width, height int, theme layout.Theme) *image.RGBA {
	picture, _ := sheets.Get().(*image.RGBA)
	size := 4 * width * height
	if picture == nil || cap(picture.Pix) < size {
		picture = &image.RGBA{Pix: make([]uint8, size)}
	}
	picture.Pix, picture.Stride, picture.Rect = picture.Pix[:size], 4*width, image.Rect(0, 0, width, height)
	paper := colourOf(theme, layout.Paper)
	if size == 0 {
		return picture
	}
	filled := copy(picture.Pix, []uint8{paper.R, paper.G, paper.B, paper.A})
	for filled < size { // each copy doubles what is filled
		filled += copy(picture.Pix[filled:], picture.Pix[:filled])
	}
	return picture
}
