package grid

import (
	"strconv"
	"strings"
)

// formatColumns is the number of columns the workbook format knows.
const formatColumns = 16_384

// parseReference reads a cell reference such as "C7" to its 1-based row and
// column; ok is false for anything else and beyond the format's last cell.
func parseReference(ref string) (row, col int, ok bool) {
	i := 0
	for ; i < len(ref) && 'A' <= ref[i] && ref[i] <= 'Z' && i < 3; i++ {
		col = col*26 + int(ref[i]-'A') + 1
	}
	digits := ref[i:]
	if i == 0 || digits == "" || digits[0] == '0' || len(digits) > 7 || !allDigits(digits) {
		return 0, 0, false
	}
	row, err := strconv.Atoi(digits)
	return row, col, err == nil && row <= MaxRows && col <= formatColumns
}

// parseRange reads a range such as "A1:C2", or a single cell.
func parseRange(ref string) (m Merge, ok bool) {
	from, to, two := strings.Cut(ref, ":")
	if !two {
		to = from
	}
	var ok1, ok2 bool
	m.FirstRow, m.FirstCol, ok1 = parseReference(from)
	m.LastRow, m.LastCol, ok2 = parseReference(to)
	return m, ok1 && ok2 && m.FirstRow <= m.LastRow && m.FirstCol <= m.LastCol
}

// reference spells a 1-based row and column as a spreadsheet does.
func reference(row, col int) string {
	letters := ""
	for ; col > 0; col = (col - 1) / 26 {
		letters = string(rune('A'+(col-1)%26)) + letters
	}
	return letters + strconv.Itoa(row)
}
