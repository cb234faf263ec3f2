package grid

import (
	"bytes"
	"encoding/xml"
	"fmt"
	"io"
	"slices"
	"strings"
)

// mainNamespaces are those of the transitional and of the strict form of the
// workbook format (ISO/IEC 29500).
var mainNamespaces = []string{
	"http://schemas.openxmlformats.org/spreadsheetml/2006/main",
	"http://purl.oclc.org/ooxml/spreadsheetml/main",
}

// maxDepth is how deep elements may nest; workbooks need less than ten.
const maxDepth = 64

// xmlPart reads one XML part strictly: well formed, one root, no document type.
type xmlPart struct {
	archive *archive
	part    string
	sheet   string
	place   string // where reading stands, for messages; blank where row and col say it
	row     int    // of the cell being read, 0 for none
	col     int
	r       *partReader
	d       *xmlScanner
	spaces  []string // namespaces whose elements are read
	depth   int
	text    []byte // scratch of content
}

// where names the place where reading stands.
func (x *xmlPart) where() string {
	switch {
	case x.place != "" || x.row == 0:
		return x.place
	case x.col == 0:
		return fmt.Sprintf("row %d", x.row)
	}
	return reference(x.row, x.col)
}

// read opens a part, demands its root element, has body read the root's content
// and reads on to the very end, where the checksum is.
func (a *archive) read(part, sheet string, spaces []string, root string, body func(*xmlPart) error) error {
	r, err := a.open(part)
	if err != nil {
		err.(*FileError).Sheet = sheet
		return err
	}
	defer r.close()
	x := &xmlPart{archive: a, part: part, sheet: sheet, r: r, d: newXMLScanner(r), spaces: spaces}
	if err := x.document(root, body); err != nil {
		e := a.explain(part, err)
		if e.Sheet == "" {
			e.Sheet = sheet
		}
		if place := x.where(); place != "" && (e.Place == "" || strings.HasPrefix(e.Place, "line ")) {
			e.Place = place
		}
		return e
	}
	return nil
}

func (x *xmlPart) document(root string, body func(*xmlPart) error) error {
	e, err := x.root()
	if err != nil {
		return err
	}
	if !x.knows(e) || e.Name.Local != root {
		return x.refuse("does not begin with the element <" + root + "> of a workbook")
	}
	if err := body(x); err != nil {
		return err
	}
	for {
		kind, err := x.token()
		switch {
		case err == io.EOF:
			return nil
		case err != nil:
			return err
		case kind == startToken, kind == textToken && len(bytes.TrimSpace(x.d.text)) > 0:
			return x.refuse("goes on after its end")
		}
	}
}

// root returns the root element.
func (x *xmlPart) root() (xml.StartElement, error) {
	for {
		kind, err := x.token()
		switch {
		case err == io.EOF:
			return xml.StartElement{}, x.refuse("is empty")
		case err != nil:
			return xml.StartElement{}, err
		case kind == startToken:
			return x.d.element, nil
		case len(bytes.TrimLeft(x.d.text, "\ufeff \t\r\n")) > 0:
			return xml.StartElement{}, x.refuse("does not begin as XML")
		}
	}
}

func (x *xmlPart) refuse(problem string) *FileError {
	e := x.archive.refuse(x.part, problem)
	e.Sheet, e.Place = x.sheet, x.where()
	return e
}

// token returns the next token, of which the scanner holds the content; it refuses
// document types and deep nesting.
func (x *xmlPart) token() (tokenKind, error) {
	kind, err := x.d.next()
	switch {
	case err == errDocumentType || err == errTokenTooLong:
		return noToken, x.refuse(err.Error())
	case err != nil:
		return noToken, err
	case kind == startToken:
		if x.depth++; x.depth > maxDepth {
			return noToken, x.refuse("nests elements too deep")
		}
	case kind == endToken:
		x.depth--
	}
	return kind, nil
}

// inside returns the next token within an open element, where the part may not end.
func (x *xmlPart) inside() (tokenKind, error) {
	kind, err := x.token()
	if err == io.EOF {
		err = io.ErrUnexpectedEOF
	}
	return kind, err
}

// knows reports whether an element belongs to a namespace that is read.
func (x *xmlPart) knows(e xml.StartElement) bool { return slices.Contains(x.spaces, e.Name.Space) }

// children calls visit for every child element of the current element, up to
// and with its end; visit must read to the child's end, and have looked at its
// attributes before. Elements of other namespaces are passed over.
func (x *xmlPart) children(visit func(xml.StartElement) error) error {
	for {
		kind, err := x.inside()
		switch {
		case err != nil:
			return err
		case kind == endToken:
			return nil
		case kind == textToken:
			continue
		case x.knows(x.d.element):
			err = visit(x.d.element)
		default:
			err = x.skip()
		}
		if err != nil {
			return err
		}
	}
}

// skip passes over the current element.
func (x *xmlPart) skip() error {
	for end := x.depth - 1; x.depth > end; {
		if _, err := x.inside(); err != nil {
			return err
		}
	}
	return nil
}

// content returns the text of the current element without that of its children;
// it is valid until the next call.
func (x *xmlPart) content() ([]byte, error) {
	x.text = x.text[:0]
	for end := x.depth - 1; x.depth > end; {
		kind, err := x.inside()
		if err != nil {
			return nil, err
		}
		if kind == textToken && x.depth == end+1 {
			x.text = append(x.text, x.d.text...)
		}
	}
	return x.text, nil
}

// attribute returns an attribute without namespace, blank if there is none.
func attribute(e xml.StartElement, name string) string {
	for i := range e.Attr {
		if e.Attr[i].Name.Local == name && e.Attr[i].Name.Space == "" {
			return e.Attr[i].Value
		}
	}
	return ""
}

// truth reads an XML boolean; absent is false.
func truth(text string) bool { return text == "1" || text == "true" }
