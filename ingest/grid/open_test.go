package grid

import (
	"archive/zip"
	"bytes"
	"context"
	"crypto/sha256"
	"encoding/binary"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"testing"
)

func zipOf(t *testing.T, pairs ...string) []byte {
	t.Helper()
	var b bytes.Buffer
	z := zip.NewWriter(&b)
	for i := 0; i < len(pairs); i += 2 {
		w, err := z.Create(pairs[i])
		if err != nil {
			t.Fatal(err)
		}
		if _, err := w.Write([]byte(pairs[i+1])); err != nil {
			t.Fatal(err)
		}
	}
	if err := z.Close(); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

func TestOtherKindsOfFilesAreNamedWithRemedy(t *testing.T) {
	compound := func(names ...string) []byte {
		data := append([]byte("\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1"), make([]byte, 500)...)
		for _, name := range names {
			data = append(data, utf16Bytes(name, binary.LittleEndian)...)
		}
		return append(data, make([]byte, 100)...)
	}
	binaryBook := rows("")
	binaryBook.change(t, "_rels/.rels", "xl/workbook.xml", "xl/workbook.bin")
	for _, tt := range []struct {
		name  string
		data  []byte
		words []string
	}{
		{"empty.xlsx", nil, []string{"is empty"}},
		{"blank.csv", []byte(" \r\n\n"), []string{"is empty"}},
		{"old.xls", compound("Root Entry", "Workbook"), []string{".xls", ".xlsx or .csv"}},
		{"older.xls", compound("Root Entry", "Book"), []string{".xls", ".xlsx or .csv"}},
		{"locked.xlsx", compound("Root Entry", "EncryptionInfo", "EncryptedPackage"), []string{"password", "remove the password"}},
		{"letter.doc", compound("Root Entry", "WordDocument"), []string{".doc", ".xlsx or .csv"}},
		{"other.msi", compound("Root Entry"), []string{"old office format"}},
		{"sheet.ods", zipOf(t, "mimetype", "application/vnd.oasis.opendocument.spreadsheet", "content.xml", "<x/>"), []string{".ods", ".xlsx or .csv"}},
		{"letter.odt", zipOf(t, "mimetype", "application/vnd.oasis.opendocument.text"), []string{"no spreadsheet"}},
		{"letter.docx", zipOf(t, "[Content_Types].xml", "<x/>", "word/document.xml", "<x/>"), []string{".docx"}},
		{"talk.pptx", zipOf(t, "[Content_Types].xml", "<x/>", "ppt/presentation.xml", "<x/>"), []string{".pptx"}},
		{"sheet.numbers", zipOf(t, "Index/Document.iwa", "x"), []string{".numbers", "export"}},
		{"sheet.xlsb", binaryBook.pack(t), []string{".xlsb", ".xlsx or .csv"}},
		{"data.zip", zipOf(t, "data.csv", "a,b"), []string{"zip file", "unpack"}},
		{"none.zip", zipOf(t), []string{"empty zip"}},
		{"paper.pdf", []byte("%PDF-1.7\n"), []string{"PDF", ".xlsx or .csv"}},
		{"scan.png", []byte("\x89PNG\r\n\x1a\n"), []string{"picture"}},
		{"scan.jpg", []byte("\xff\xd8\xff\xe0"), []string{"picture"}},
		{"data.csv.gz", []byte("\x1f\x8b\x08\x00"), []string{"unpack"}},
		{"page.xls", []byte("\ufeff<html><table>"), []string{"web page"}},
		{"sheet.xml", []byte("<?xml version=\"1.0\"?><Workbook/>"), []string{"XML"}},
		{"letter.rtf", []byte("{\\rtf1"), []string{"RTF"}},
	} {
		t.Run(tt.name, func(t *testing.T) { mustRefuse(t, tt.data, "/home/me/"+tt.name, append(tt.words, tt.name+": ")...) })
	}
}

func TestContentCountsNotTheEnding(t *testing.T) {
	if book := mustRead(t, trials(t).pack(t), "trials.csv"); book.Text || len(book.Sheets[0].Rows) != 8 {
		t.Errorf("a workbook named .csv: %+v, want 8 rows of a workbook", book)
	}
	if book := mustRead(t, []byte("a,b\n1,2\n"), "trials.xlsx"); !book.Text || len(book.Sheets[0].Rows) != 2 {
		t.Errorf("a text named .xlsx: %+v, want 2 rows of text", book)
	}
}

func TestOpen(t *testing.T) {
	dir := t.TempDir()
	path := filepath.Join(dir, "a.csv")
	data := []byte("a,b\n1,2\n")
	if err := os.WriteFile(path, data, 0o600); err != nil {
		t.Fatal(err)
	}
	book, err := Open(context.Background(), path)
	if err != nil {
		t.Fatal(err)
	}
	if sum := fmt.Sprintf("%x", sha256.Sum256(data)); book.File != "a.csv" || book.SHA256 != sum {
		t.Errorf("file %q, sum %q; want a.csv, %q", book.File, book.SHA256, sum)
	}
	equal(t, "rows", texts(book.Sheets[0]), []string{"1: a|b", "2: 1|2"})

	large := filepath.Join(dir, "large.csv")
	if err := os.WriteFile(large, nil, 0o600); err != nil {
		t.Fatal(err)
	}
	if err := os.Truncate(large, MaxFileBytes+1); err != nil {
		t.Fatal(err)
	}
	for path, words := range map[string][]string{dir: {"folder"}, filepath.Join(dir, "none.csv"): {"none.csv: there is no such file"},
		large: {"large.csv: is larger than 100 MB"}} {
		refuseOpen(t, path, words...)
	}
	if _, err := Open(context.Background(), filepath.Join(dir, "none.csv")); !errors.Is(err, fs.ErrNotExist) {
		t.Errorf("error %v, want one that wraps fs.ErrNotExist", err)
	}
	if runtime.GOOS == "linux" {
		refuseOpen(t, "/dev/zero", "device")
	}
}

func refuseOpen(t *testing.T, path string, words ...string) {
	t.Helper()
	book, err := Open(context.Background(), path)
	var e *FileError
	if !errors.As(err, &e) || book != nil {
		t.Errorf("Open(%s) = %v, %v; want a *FileError alone", path, book, err)
		return
	}
	for _, word := range words {
		if !strings.Contains(err.Error(), word) || strings.Contains(err.Error(), filepath.Dir(path)+"/") {
			t.Errorf("Open(%s): %q does not say %q, or names the folder", path, err, word)
		}
	}
}

func TestSystemErrorsInWords(t *testing.T) {
	err := openError("a.csv", &fs.PathError{Op: "open", Path: "/home/me/a.csv", Err: fs.ErrPermission})
	if !errors.Is(err, fs.ErrPermission) || !strings.Contains(err.Error(), "a.csv: you have no permission to read it; ") || strings.Contains(err.Error(), "/home") {
		t.Errorf("error %q, want words on permission without the folder", err)
	}
	err = openError("a.csv", &fs.PathError{Op: "open", Path: "/home/me/a.csv", Err: errors.New("too many links")})
	if !strings.Contains(err.Error(), "a.csv: cannot be opened: too many links; ") || strings.Contains(err.Error(), "/home") {
		t.Errorf("error %q, want the cause without the folder", err)
	}
}
