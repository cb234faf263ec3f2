package grid

import (
	"encoding/xml"
	"fmt"
	"strconv"
)

// sharedString is an entry of the string table.
type sharedString struct {
	text    string
	removed bool // characters were taken out
}

// readStrings reads the string table.
func (w *workbook) readStrings(part string) error {
	return w.archive.read(part, "", mainNamespaces, "sst", func(x *xmlPart) error {
		return x.children(func(e xml.StartElement) error {
			if e.Name.Local != "si" {
				return x.skip()
			}
			if len(w.strings) >= MaxStrings {
				return x.refuse(fmt.Sprintf("holds more than %d texts, the limit", MaxStrings))
			}
			x.place = fmt.Sprintf("text %d", len(w.strings))
			text, err := x.richText()
			if err != nil {
				return err
			}
			var s sharedString
			s.text, s.removed = cleanText(text)
			w.strings = append(w.strings, s)
			return nil
		})
	})
}

// readStyles learns for every cell style whether it shows dates.
func (w *workbook) readStyles(part string) error {
	custom := map[int]dateFormat{}
	var formats []int
	err := w.archive.read(part, "", mainNamespaces, "styleSheet", func(x *xmlPart) error {
		return x.children(func(e xml.StartElement) error {
			switch e.Name.Local {
			case "numFmts":
				return x.children(func(e xml.StartElement) error {
					if e.Name.Local == "numFmt" {
						id, err := x.formatID(e, len(custom))
						if err != nil {
							return err
						}
						custom[id] = customDate(attribute(e, "formatCode"))
					}
					return x.skip()
				})
			case "cellXfs":
				return x.children(func(e xml.StartElement) error {
					if e.Name.Local == "xf" {
						id, err := x.formatID(e, len(formats))
						if err != nil {
							return err
						}
						formats = append(formats, id)
					}
					return x.skip()
				})
			}
			return x.skip()
		})
	})
	for _, id := range formats {
		format, ok := custom[id]
		if !ok {
			format = builtInDate(id)
		}
		w.styles = append(w.styles, format)
	}
	return err
}

// formatID reads the number of a number format; absent is 0, the general one.
func (x *xmlPart) formatID(e xml.StartElement, count int) (int, error) {
	if count >= MaxStyles {
		return 0, x.refuse(fmt.Sprintf("holds more than %d styles, the limit", MaxStyles))
	}
	text := attribute(e, "numFmtId")
	if text == "" {
		return 0, nil
	}
	id, err := strconv.Atoi(text)
	if err != nil || id < 0 {
		return 0, x.refuse(fmt.Sprintf("has the number format %q, which is no number", text))
	}
	return id, nil
}
