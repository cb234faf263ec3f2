package grid

import (
	"bytes"
	"strings"
	"unicode/utf16"
)

// isZip reports whether data begins like a zip package, as workbooks do.
func isZip(data []byte) bool { return bytes.HasPrefix(data, []byte("PK\x03\x04")) || isEmptyZip(data) }

func isEmptyZip(data []byte) bool { return bytes.HasPrefix(data, []byte("PK\x05\x06")) }

// foreignKinds are the files that people take for a table of studies, by how
// they begin.
var foreignKinds = []struct{ magic, problem, remedy string }{
	{"%PDF-", "is a PDF, from which no table can be read safely", "copy its table into a workbook and " + saveAsWorkbook},
	{"\x89PNG", "is a picture", "type its numbers into a workbook and " + saveAsWorkbook},
	{"\xff\xd8\xff", "is a picture", "type its numbers into a workbook and " + saveAsWorkbook},
	{"GIF8", "is a picture", "type its numbers into a workbook and " + saveAsWorkbook},
	{"II*\x00", "is a picture", "type its numbers into a workbook and " + saveAsWorkbook},
	{"MM\x00*", "is a picture", "type its numbers into a workbook and " + saveAsWorkbook},
	{"\x1f\x8b", "is a packed file (gzip)", "unpack it and name the workbook or text file in it"},
	{"7z\xbc\xaf", "is a packed file (7z)", "unpack it and name the workbook or text file in it"},
	{"Rar!", "is a packed file (rar)", "unpack it and name the workbook or text file in it"},
	{"{\\rtf", "is a word processor's document (RTF)", "copy its table into a workbook and " + saveAsWorkbook},
}

// refuseForeign refuses what is neither a workbook nor text, and names the way
// to one.
func refuseForeign(data []byte, name string) error {
	refuse := func(problem, remedy string) error {
		return &FileError{File: name, Problem: problem, Remedy: remedy}
	}
	if len(bytes.TrimSpace(data)) == 0 {
		return refuse("is empty", "save the sheet of studies again, as .xlsx or .csv")
	}
	if bytes.HasPrefix(data, []byte("\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1")) {
		return refuseCompound(data, name)
	}
	if isEmptyZip(data) {
		return refuse("is an empty zip package, not a workbook", saveAsWorkbook)
	}
	for _, kind := range foreignKinds {
		if bytes.HasPrefix(data, []byte(kind.magic)) {
			return refuse(kind.problem, kind.remedy)
		}
	}
	head := strings.ToLower(string(data[:min(len(data), 1024)]))
	head = strings.TrimSpace(strings.TrimPrefix(head, "\ufeff"))
	switch {
	case strings.HasPrefix(head, "<!doctype html"), strings.HasPrefix(head, "<html"), strings.HasPrefix(head, "<table"), strings.HasPrefix(head, "<meta"):
		return refuse("is a web page, whatever its name says", "open it in a spreadsheet program and "+saveAsWorkbook)
	case strings.HasPrefix(head, "<?xml"):
		return refuse("is an XML document, not a workbook or a table of text", "open it in a spreadsheet program and "+saveAsWorkbook)
	}
	return nil
}

// refuseCompound tells a workbook behind a password from one of the old format:
// both lie in the same kind of container, of which the names are UTF-16.
func refuseCompound(data []byte, name string) error {
	e := &FileError{File: name, Problem: "is a file of an old office format, not a workbook", Remedy: "open it in the program that made it and " + saveAsWorkbook}
	switch {
	case bytes.Contains(data, utf16Name("EncryptedPackage")):
		e.Problem, e.Remedy = "is a workbook protected by a password", "open it, remove the password and save it again"
	case bytes.Contains(data, utf16Name("Workbook")), bytes.Contains(data, utf16Name("Book")):
		e.Problem, e.Remedy = "is a workbook of the old format .xls, which is not read", "open it in a spreadsheet program and "+saveAsWorkbook
	case bytes.Contains(data, utf16Name("WordDocument")):
		e.Problem = "is a word processor's document (.doc)"
	}
	return e
}

// utf16Name spells an ASCII name as the directory of the old container does.
func utf16Name(name string) []byte {
	var b []byte
	for _, unit := range utf16.Encode([]rune(name)) {
		b = append(b, byte(unit), byte(unit>>8))
	}
	return b
}

// refuseOtherPackage refuses zip packages that are no workbook of the readable
// kind; main is the part that the package declares as its document, blank if none.
func (a *archive) refuseOtherPackage(main string) error {
	refuse := func(problem, remedy string) error {
		return &FileError{File: a.file, Problem: problem, Remedy: remedy}
	}
	inSpreadsheet := "open it in a spreadsheet program and " + saveAsWorkbook
	switch {
	case strings.HasSuffix(main, ".bin"), a.has("xl/workbook.bin"):
		return refuse("is a binary workbook (.xlsb), which is not read", inSpreadsheet)
	case strings.HasPrefix(main, "word/"), a.has("word/document.xml"):
		return refuse("is a word processor's document (.docx)", "copy its table into a workbook and "+saveAsWorkbook)
	case strings.HasPrefix(main, "ppt/"), a.has("ppt/presentation.xml"):
		return refuse("is a presentation (.pptx)", "copy its table into a workbook and "+saveAsWorkbook)
	case a.mimetype("opendocument.spreadsheet"):
		return refuse("is an OpenDocument spreadsheet (.ods), which is not read", inSpreadsheet)
	case a.mimetype("opendocument"):
		return refuse("is an OpenDocument file, but no spreadsheet", "copy its table into a workbook and "+saveAsWorkbook)
	case a.has("index/document.iwa"), a.has("index.zip"):
		return refuse("is a document of an Apple office program (.numbers or the like), which is not read", "export it as .xlsx or .csv")
	case main != "", a.has("xl/workbook.xml"), a.has("[Content_Types].xml"):
		return nil
	}
	return refuse("is a zip file, but not a workbook", "unpack it and name the workbook or text file in it")
}

// mimetype looks for words in the entry by which OpenDocument files name their kind.
func (a *archive) mimetype(words string) bool {
	if !a.has("mimetype") {
		return false
	}
	r, err := a.open("mimetype")
	if err != nil {
		return false
	}
	defer r.close()
	head := make([]byte, 200)
	n, _ := r.Read(head)
	return strings.Contains(string(head[:n]), words)
}
