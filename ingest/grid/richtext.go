package grid

import (
	"encoding/xml"
	"strconv"
	"strings"
	"unicode/utf16"
)

// richText reads the text of the current element, of which the runs are joined;
// the reading aids of East Asian text are left out.
func (x *xmlPart) richText() (string, error) {
	var text []byte
	err := x.children(func(e xml.StartElement) error {
		switch e.Name.Local {
		case "t":
			return x.appendText(&text, e)
		case "r":
			return x.children(func(e xml.StartElement) error {
				if e.Name.Local == "t" {
					return x.appendText(&text, e)
				}
				return x.skip()
			})
		}
		return x.skip()
	})
	return unescape(string(text)), err
}

// appendText adds the content of an element <t>; white space around it counts
// only where it is declared to be kept.
func (x *xmlPart) appendText(text *[]byte, e xml.StartElement) error {
	kept := preserves(e)
	content, err := x.content()
	if err != nil {
		return err
	}
	part := string(content)
	if !kept {
		part = strings.Trim(part, " \t\r\n")
	}
	*text = append(*text, part...)
	if len(*text) > MaxFieldBytes {
		return x.refuse("holds a text longer than the " + strconv.Itoa(MaxFieldBytes) + " bytes a cell can have")
	}
	return nil
}

func preserves(e xml.StartElement) bool {
	for _, a := range e.Attr {
		if a.Name.Local == "space" && a.Value == "preserve" {
			return true
		}
	}
	return false
}

// unescape decodes _xHHHH_, by which the format writes characters that XML
// cannot (ECMA-376 part 1, 22.9.2.19); _x005F_ is an underscore.
func unescape(text string) string {
	if !strings.Contains(text, "_x") {
		return text
	}
	var b strings.Builder
	for {
		i := strings.Index(text, "_x")
		if i < 0 {
			b.WriteString(text)
			return b.String()
		}
		b.WriteString(text[:i])
		text = text[i:]
		unit, ok := escapedUnit(text)
		if !ok {
			b.WriteString(text[:2])
			text = text[2:]
			continue
		}
		text = text[7:]
		r := rune(unit)
		if utf16.IsSurrogate(r) {
			low, _ := escapedUnit(text)
			if r = utf16.DecodeRune(r, rune(low)); r != 0xfffd {
				text = text[7:]
			}
		}
		b.WriteRune(r)
	}
}

// escapedUnit reads "_xHHHH_" at the start of text.
func escapedUnit(text string) (uint16, bool) {
	if len(text) < 7 || text[:2] != "_x" || text[6] != '_' {
		return 0, false
	}
	unit, err := strconv.ParseUint(text[2:6], 16, 16)
	return uint16(unit), err == nil
}
