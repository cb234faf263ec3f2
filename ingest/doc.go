// Package ingest turns a workbook or text file of extracted results into a
// review.Extraction, every number with its place, and a review.Plan.
//
// A header is looked for under title rows, in one row or in two with grouped
// columns; plain trade words are recognised and any other header is mapped by
// Options.Columns. Cells that cannot be read, and numbers that cannot be right,
// become findings in one pass over the whole sheet; a blank cell, a missing
// column and an unreadable number stay three different things and none becomes 0.
// An error is returned only when there is nothing to work with, and then there is
// no extraction.
package ingest
