package grid

import (
	"encoding/xml"
	"fmt"
	"slices"
)

// readNotes reads the comments of a sheet, if it has any.
func (w *workbook) readNotes(part string, sheet *Sheet) error {
	relations, err := w.archive.relations(part)
	if err != nil {
		err.(*FileError).Sheet = sheet.Name
		return err
	}
	for _, r := range relations {
		if r.kind != "comments" || r.external {
			continue
		}
		err := w.archive.read(r.target, sheet.Name, mainNamespaces, "comments", func(x *xmlPart) error {
			return x.children(func(e xml.StartElement) error {
				if e.Name.Local != "commentList" {
					return x.skip()
				}
				return x.children(func(e xml.StartElement) error { return x.note(e, sheet) })
			})
		})
		if err != nil {
			return err
		}
	}
	slices.SortStableFunc(sheet.Notes, func(a, b CellNote) int {
		if a.Row != b.Row {
			return a.Row - b.Row
		}
		return a.Col - b.Col
	})
	return nil
}

// note reads one comment.
func (x *xmlPart) note(e xml.StartElement, sheet *Sheet) error {
	if e.Name.Local != "comment" {
		return x.skip()
	}
	ref := attribute(e, "ref")
	row, col, ok := parseReference(ref)
	switch {
	case !ok:
		return x.refuse(fmt.Sprintf("has a comment at %q, which is no cell", ref))
	case len(sheet.Notes) >= MaxNotes:
		return x.refuse(fmt.Sprintf("holds more than %d comments, the limit", MaxNotes))
	}
	x.place = ref
	return x.children(func(e xml.StartElement) error {
		if e.Name.Local != "text" {
			return x.skip()
		}
		text, err := x.richText()
		if err != nil {
			return err
		}
		if text, _ = cleanText(text); !isBlank(text) {
			sheet.Notes = append(sheet.Notes, CellNote{Row: row, Col: col, Text: text})
		}
		return nil
	})
}
