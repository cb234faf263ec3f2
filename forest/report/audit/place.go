package audit

import (
	"fmt"
	"strings"
	"unicode/utf16"

	"steelyard/meta/review"
)

func letters(col int) string { return review.ColumnLetters(col) }

// columnNumber is the number of a column's letters.
func columnNumber(letters string) int {
	n := 0
	for _, r := range letters {
		n = 26*n + int(r-'A') + 1
	}
	return n
}

// rows is the reference of whole rows.
func (r block) rows() string {
	return fmt.Sprintf("%s$%d:$%d", r.from.sheet.quoted(), r.from.row, r.to.row)
}

// longestName is how many units of UTF-16 a sheet's name may have.
const longestName = 31

// sheetName names the sheet of one part of the i-th outcome. With several outcomes the
// number comes before the outcome's name, which is cut where it is too long, so that no
// two names are the same.
func sheetName(part string, i, outcomes int, outcome string) string {
	if outcomes == 1 {
		return part
	}
	name := fmt.Sprintf("%s %d", part, i+1)
	outcome = strings.Join(strings.Fields(strings.Map(func(r rune) rune {
		if strings.ContainsRune(`:\/?*[]'`, r) {
			return ' '
		}
		return r
	}, clean(outcome))), " ")
	for _, r := range " " + outcome {
		if len(utf16.Encode([]rune(name+string(r)))) > longestName {
			break
		}
		name += string(r)
	}
	return strings.TrimSpace(name)
}
