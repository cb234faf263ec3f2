package forest

import (
	"fmt"
	"image/color"

	"steelyard/forest/layout"
)

// colourOf returns the theme's colour of a role.
func colourOf(theme layout.Theme, ink layout.Ink) color.RGBA {
	c := color.RGBA{A: 0xFF}
	if _, err := fmt.Sscanf(theme.Colour(ink), "#%02x%02x%02x", &c.R, &c.G, &c.B); err != nil {
		panic("forest: the palette holds " + theme.Colour(ink) + ", which is no #RRGGBB colour")
	}
	return c
}
