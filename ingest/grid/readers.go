package grid

import (
	"bytes"
	"context"
)

func isZip(data []byte) bool { return bytes.HasPrefix(data, []byte("PK")) }

func refuseForeign(data []byte, name string) error {
	if len(data) == 0 {
		return &FileError{File: name, Problem: "is empty", Remedy: "save the sheet again"}
	}
	return nil
}

func readWorkbook(ctx context.Context, data []byte, book *Book) error {
	return &FileError{File: book.File, Problem: "is a workbook, which is not read", Remedy: "save it as .csv"}
}
