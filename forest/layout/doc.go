// Package layout turns results into drawings made of lines, rectangles,
// polygons, discs and text, each with its place and size in points (1/72 inch).
// It owns no canvas and no font file: a table of glyph widths of Liberation
// Sans says how long a text is, and colours are roles (Ink) that a Theme maps.
//
// The one writer here is for SVG, which is text; package forest puts the same
// drawings on PDF and PNG.
package layout
