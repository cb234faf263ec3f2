package forest

import (
	"io"

	"steelyard/forest/layout"
)

// WriteSVG writes one page as an SVG image; see layout.WriteSVG.
func WriteSVG(w io.Writer, page layout.Drawing, theme layout.Theme) error {
	return layout.WriteSVG(w, page, theme)
}
