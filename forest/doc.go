// Package forest puts ink on the drawings of package layout: SVG, PDF and PNG.
// All three place each piece of text by the same width table, so that the
// images agree; the type face is Liberation Sans, which PDF and PNG embed.
//
// SVG and PNG hold one page each. A Document of several pages is one PDF file,
// or one SVG or PNG file per page.
package forest
