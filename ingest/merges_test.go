package ingest

import (
	"context"
	"errors"
	"fmt"
	"strings"
	"testing"

	"steelyard/ingest/grid"
)

// TestOverlappingMerges refuses merged cells that cover the same rows again and
// again, which would take long to apply.
func TestOverlappingMerges(t *testing.T) {
	rows := table{{"study", "y", "se"}}
	for i := range 1000 {
		rows = append(rows, []any{fmt.Sprint("S", i), 1, 1})
	}
	merges := `<mergeCells count="1200">` + strings.Repeat(`<mergeCell ref="A2:A1001"/>`, 1200) + `</mergeCells>`
	data := editPart(t, rows.xlsx(t), "xl/worksheets/sheet1.xml", "</sheetData>", "</sheetData>"+merges)
	_, _, err := Read(context.Background(), data, "a.xlsx", Options{})
	var file *grid.FileError
	if !errors.As(err, &file) || !strings.Contains(err.Error(), "merged cells") {
		t.Errorf("error %v", err)
	}
}
