package grid

import "strings"

// Decimal decides which mark separates decimals in a column of texts: ',' or
// '.'. Texts that are no numbers do not matter. Proof of a decimal mark is a
// mark that cannot part thousands ("1,5", "0,123", "1.234,5"); proof of a
// thousands mark is repetition or the other mark after it ("1,234,567",
// "1,234.5"). A single comma before exactly three digits ("1,234") proves
// nothing: with nothing else in the column to prove what a comma means the
// column is refused with an *AmbiguousDecimalError. A column that uses both
// marks for decimals is refused with a *MixedDecimalError; so is one with
// decimal commas in which a single point stands before three digits ("1.234").
// Without any mark the answer is '.'. On an error the rune is 0.
func Decimal(column []string) (rune, error) {
	var points, commas, unclearPoints, unclearCommas []int
	grouped := map[marking]bool{}
	for i, text := range column {
		switch m := markingOf(text); m {
		case decimalPoint, groupedCommas:
			points = append(points, i)
			grouped[m] = true
		case decimalComma, groupedPoints:
			commas = append(commas, i)
			grouped[m] = true
		case unclearPoint:
			unclearPoints = append(unclearPoints, i)
		case unclearComma:
			unclearCommas = append(unclearCommas, i)
		}
	}
	if len(commas) > 0 && !grouped[groupedPoints] {
		points = append(points, unclearPoints...)
	}
	switch {
	case len(points) > 0 && len(commas) > 0:
		return 0, &MixedDecimalError{Points: points, Commas: commas,
			PointExample: column[points[0]], CommaExample: column[commas[0]]}
	case len(commas) > 0:
		return ',', nil
	case len(unclearCommas) > 0 && !grouped[groupedCommas]:
		i := unclearCommas[0]
		number, _ := strippedNumber(column[i])
		e := &AmbiguousDecimalError{Index: i, Text: column[i]}
		e.AsDecimal, _, _ = ParseNumber(number, ',')
		e.AsThousands, _, _ = ParseNumber(number, '.')
		return 0, e
	}
	return '.', nil
}

// marking is what the marks of one text say about the decimal mark.
type marking int

const (
	unmarked      marking = iota // no number, or no mark
	decimalPoint                 // 1.5 0.123
	decimalComma                 // 1,5 0,123
	unclearPoint                 // 1.234
	unclearComma                 // 1,234
	groupedPoints                // 1.234.567 1.234,5
	groupedCommas                // 1,234,567 1,234.5
)

// markingOf looks at one text.
func markingOf(text string) marking {
	number, ok := strippedNumber(text)
	if !ok {
		return unmarked
	}
	_, _, pointErr := ParseNumber(number, '.')
	_, _, commaErr := ParseNumber(number, ',')
	point, comma := pointErr == nil, commaErr == nil
	points, commas := strings.Count(number, "."), strings.Count(number, ",")
	switch {
	case points+commas == 0 || !point && !comma:
		return unmarked
	case point && comma && commas == 1:
		return unclearComma
	case point && comma:
		return unclearPoint
	case point && commas > 0:
		return groupedCommas
	case point:
		return decimalPoint
	case points > 0:
		return groupedPoints
	}
	return decimalComma
}

// strippedNumber takes off the marks that people put around a number, "<0,05" or
// "12,5 %", and spells it plainly; ok is false without a digit.
func strippedNumber(text string) (number string, ok bool) {
	number = strings.Map(plainRune, strings.Trim(text, "<>≤≥=~≈%*†‡ \t\n\u00a0\u202f"))
	return number, strings.ContainsAny(number, "0123456789")
}
