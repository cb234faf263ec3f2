package audit

import "github.com/xuri/excelize/v2"

// look is how a cell looks: what it is, and how its number is shown.
type look struct {
	role role
	form format
}

// role is what a cell is to the reader.
type role int

const (
	plain    role = iota // a text
	computed             // a formula
	input                // a number as read, to be changed
	entered              // a number that the program computed
	result               // a formula whose value is an answer
	heading
	subtitle
	section
	head     // of a column of numbers
	headText // of a column of texts
	headSoft // of a column of soft texts
	index    // a number that counts
	wrapped
	soft
	link
)

// format is how a number is shown; its digits are all kept.
type format int

const (
	general format = iota
	whole
	decimals2
	decimals4
	decimals6
	percent
	small // probabilities
)

var formats = map[format]string{
	whole: "0", decimals2: "0.00", decimals4: "0.0000", decimals6: "0.000000", percent: "0.0%",
	small: "[<0.0001]0.00E+00;0.0000",
}

// Colours of the program's drawings: each difference is also one of weight, slant or
// border, so that a print in grey says the same.
const (
	inkColour   = "1A1A1A"
	softColour  = "595959"
	inputFill   = "DCEAF4"
	resultFill  = "EFF1F3"
	lineColour  = "B3B3B3"
	hairColour  = "E3E3E3"
	inputBorder = "0072B2"
)

func (l look) style() *excelize.Style {
	s := &excelize.Style{
		Font:      &excelize.Font{Family: "Arial", Size: 10, Color: inkColour},
		Alignment: &excelize.Alignment{Vertical: "top"},
	}
	if form, ok := formats[l.form]; ok {
		s.CustomNumFmt = &form
	}
	switch l.role {
	case input:
		s.Fill = solid(inputFill)
		s.Border = []excelize.Border{{Type: "bottom", Style: 1, Color: inputBorder}}
	case entered:
		s.Font.Italic = true
		s.Border = []excelize.Border{{Type: "bottom", Style: 4, Color: softColour}}
	case result:
		s.Font.Bold = true
		s.Fill = solid(resultFill)
	case heading:
		s.Font.Bold, s.Font.Size = true, 14
	case subtitle:
		s.Font.Color = softColour
	case soft:
		s.Font.Color = softColour
		s.Alignment = &excelize.Alignment{Vertical: "top", Horizontal: "left", Indent: 1}
	case index:
		s.Alignment.Horizontal = "center"
	case section:
		s.Font.Bold, s.Font.Size = true, 11
	case head, headText, headSoft:
		s.Font.Bold = true
		s.Alignment = &excelize.Alignment{Vertical: "bottom", Horizontal: "left", WrapText: true}
		switch l.role {
		case head:
			s.Alignment.Horizontal = "right"
		case headSoft:
			s.Alignment.Indent = 1
		}
		s.Border = []excelize.Border{{Type: "bottom", Style: 2, Color: inkColour}}
	case wrapped:
		s.Alignment.WrapText = true
	case link:
		s.Font.Color, s.Font.Underline = inputBorder, "single"
	}
	return s
}

func solid(colour string) excelize.Fill {
	return excelize.Fill{Type: "pattern", Pattern: 1, Color: []string{colour}}
}
