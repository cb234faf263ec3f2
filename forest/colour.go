package forest

import (
	"image/color"
	"strconv"

	"steelyard/forest/layout"
)

// colourOf returns the theme's colour of a role.
func colourOf(theme layout.Theme, ink layout.Ink) color.RGBA {
	text := theme.Colour(ink)
	if len(text) == len("#RRGGBB") && text[0] == '#' {
		if v, err := strconv.ParseUint(text[1:], 16, 32); err == nil {
			return color.RGBA{R: uint8(v >> 16), G: uint8(v >> 8), B: uint8(v), A: 0xFF}
		}
	}
	panic("forest: the palette holds " + text + ", which is no #RRGGBB colour")
}
