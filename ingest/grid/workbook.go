package grid

import (
	"context"
	"encoding/xml"
	"fmt"
	"strings"
)

// workbook gathers what the sheets refer to.
type workbook struct {
	archive  *archive
	from1904 bool
	restless bool // the file asks to be recalculated when opened
	strings  []sharedString
	styles   []dateFormat // by cell style
	cells    cellStore
	text     int // bytes of the texts of all cells
	remarks  remarker
}

// sheetEntry is a sheet as the workbook lists it.
type sheetEntry struct {
	name, id string
	hidden   bool
}

// readWorkbook reads all sheets of a workbook. It is the one place where a panic
// is caught: what reads foreign bytes must not end the program.
func readWorkbook(ctx context.Context, data []byte, book *Book) (err error) {
	defer func() {
		if p := recover(); p != nil {
			err = &FileError{File: book.File, Problem: fmt.Sprintf("cannot be read, by a fault of this program (%v)", p),
				Remedy: "save it as .csv, and report the fault with the file"}
		}
	}()
	a, err := openArchive(ctx, data, book.File)
	if err != nil {
		return err
	}
	main, err := a.mainPart()
	if err != nil {
		return err
	}
	w := &workbook{archive: a, cells: cellStore{limit: MaxWorkbookCells}}
	entries, err := w.readEntries(main)
	if err != nil {
		return err
	}
	relations, err := a.relations(main)
	if err != nil {
		return err
	}
	if err := w.readShared(relations); err != nil {
		return err
	}
	sheets, err := w.readSheets(main, entries, relations)
	if err != nil {
		return err
	}
	book.Sheets, book.Remarks = sheets, w.remarks.all()
	return nil
}

// mainPart returns the name of the workbook part.
func (a *archive) mainPart() (string, error) {
	if err := a.refuseOtherPackage(""); err != nil {
		return "", err
	}
	relations, err := a.relations("")
	if err != nil {
		return "", err
	}
	main := ""
	for _, r := range relations {
		if r.kind == "officeDocument" && !r.external {
			main = r.target
		}
	}
	if err := a.refuseOtherPackage(main); err != nil {
		return "", err
	}
	if main == "" {
		return "", a.refuse("_rels/.rels", "is missing or does not name the workbook")
	}
	return main, nil
}

// readEntries reads the list of sheets and the settings of the workbook part.
func (w *workbook) readEntries(main string) ([]sheetEntry, error) {
	var entries []sheetEntry
	err := w.archive.read(main, "", mainNamespaces, "workbook", func(x *xmlPart) error {
		return x.children(func(e xml.StartElement) error {
			switch e.Name.Local {
			case "workbookPr":
				w.from1904 = truth(attribute(e, "date1904"))
			case "calcPr":
				w.restless = truth(attribute(e, "fullCalcOnLoad"))
			case "sheets":
				return x.children(func(e xml.StartElement) error {
					if e.Name.Local != "sheet" {
						return x.skip()
					}
					entry, err := x.sheetEntry(e, entries)
					if err != nil {
						return err
					}
					entries = append(entries, entry)
					return x.skip()
				})
			}
			return x.skip()
		})
	})
	if err == nil && len(entries) == 0 {
		err = w.archive.refuse(main, "lists no sheets")
	}
	return entries, err
}

// sheetEntry reads one line of the list; names must differ, as messages use them.
func (x *xmlPart) sheetEntry(e xml.StartElement, before []sheetEntry) (sheetEntry, error) {
	name, _ := cleanText(attribute(e, "name"))
	entry := sheetEntry{name: name, hidden: strings.HasSuffix(strings.ToLower(attribute(e, "state")), "hidden")}
	for _, a := range e.Attr {
		if a.Name.Local == "id" && a.Name.Space != "" {
			entry.id = a.Value
		}
	}
	switch {
	case len(before) >= MaxSheets:
		return entry, x.refuse(fmt.Sprintf("lists more than %d sheets, the limit", MaxSheets))
	case isBlank(name) || entry.id == "":
		return entry, x.refuse(fmt.Sprintf("lists a sheet without name or reference, number %d", len(before)+1))
	}
	for _, other := range before {
		if strings.EqualFold(other.name, name) {
			return entry, x.refuse(fmt.Sprintf("lists two sheets of the name %q", name))
		}
	}
	return entry, nil
}

// readShared reads the string table and the styles, if the workbook has them.
func (w *workbook) readShared(relations []relation) error {
	for _, r := range relations {
		var err error
		switch {
		case r.external:
		case r.kind == "sharedStrings":
			err = w.readStrings(r.target)
		case r.kind == "styles":
			err = w.readStyles(r.target)
		}
		if err != nil {
			return err
		}
	}
	return nil
}

// readSheets reads the listed sheets in their order.
func (w *workbook) readSheets(main string, entries []sheetEntry, relations []relation) ([]Sheet, error) {
	var sheets []Sheet
	taken := map[string]bool{}
	for _, entry := range entries {
		r, ok := find(relations, entry.id)
		switch {
		case !ok || r.external:
			e := w.archive.refuse(main, fmt.Sprintf("refers to a sheet (%s) that is not in the file", entry.id))
			e.Sheet = entry.name
			return nil, e
		case r.kind != "worksheet":
			w.remarks.add(entry.name, 0, 0, fmt.Sprintf("is not a sheet of cells (%s) and was not read", r.kind), "")
			continue
		case taken[partKey(r.target)]:
			e := w.archive.refuse(r.target, "belongs to two sheets")
			e.Sheet = entry.name
			return nil, e
		}
		taken[partKey(r.target)] = true
		sheet, err := w.readSheet(r.target, entry)
		if err != nil {
			return nil, err
		}
		sheets = append(sheets, *sheet)
	}
	if len(sheets) == 0 {
		return nil, &FileError{File: w.archive.file, Problem: "has no sheet of cells", Remedy: "put the studies into a worksheet, one row each"}
	}
	return sheets, nil
}

func find(relations []relation, id string) (relation, bool) {
	for _, r := range relations {
		if r.id == id {
			return r, true
		}
	}
	return relation{}, false
}
