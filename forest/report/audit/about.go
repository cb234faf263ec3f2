package audit

import (
	"fmt"

	"steelyard/forest/words"
	"steelyard/meta/synthesis"
)

// contents says what the sheets hold, by the first word of their names.
var contents = map[string]string{
	"studies": "the rows as read, with their places: the cells to change", "effects": "from each study's numbers to its effect",
	"pooling": "settings, weights and the weighted mean", "spread": "estimators of τ², written out and verified",
	"result": "interval, prediction interval, scatter, evidence", "cumulative": "the result as the studies entered",
	"leave-one-out": "the result without each study", "charts": "forest and cumulative chart", "tables": "what spreadsheets have no function for",
	"conversions": "the record of conversions", "findings": "what a person should look at", "plan": "the settings and where they came from",
}

// writeAbout fills in the first sheet, once all others are known.
func (b *book) writeAbout(about *sheet, s *synthesis.Synthesis, outcomes []*outcome, version string) {
	row := 1
	put := func(r role, label, text string) {
		about.text(1, row, look{role: r}, label)
		about.text(2, row, look{role: wrapped}, text)
		row++
	}
	put(heading, "Audit workbook", "")
	put(subtitle, "Every step from the numbers as read to the answer, as formulas that can be followed and changed.", "")
	row++
	put(section, "Cautions", "")
	for _, caution := range s.Cautions {
		put(plain, "", caution)
	}
	row++
	put(section, "Source", "")
	put(plain, "file", s.Source.File)
	if s.Source.Sheet != "" {
		put(plain, "sheet", s.Source.Sheet)
	}
	put(plain, "SHA-256 of the file", s.Source.SHA256)
	put(plain, "program", "steelyard "+version)
	row++
	put(section, "Results, as the program gave them", "")
	for i := range s.Outcomes {
		o := &s.Outcomes[i]
		put(plain, nameOf(o.Name), answerOf(o))
	}
	row++
	row = about.legend(row)
	put(section, "What moves and what does not", "")
	put(plain, "", "Change a shaded number on the sheet of studies, or a level, null or prior, and effects, weights, τ², the mean with its interval, the prediction interval, the scatter, the evidence, the cumulative and the leave-one-out rows follow. "+
		"Which rows are pooled, in which order they enter, and by which kind of numbers does not change: for that, change the sheet and run the program again. Pictures stay as drawn.")
	for _, o := range outcomes {
		seen := map[string]bool{}
		for _, what := range o.entered {
			if !seen[what] {
				put(plain, nameOf(o.o.Name), "Does not move: "+what+".")
			}
			seen[what] = true
		}
	}
	if b.fixed > 0 {
		put(plain, "", fmt.Sprintf("Cells with the program's own number because a formula would not give it to nine digits: %d; each has a note.", b.fixed))
	}
	row++
	put(section, "Sheets", "")
	for _, sheet := range b.sheets[1:] {
		at := about.text(1, row, look{role: link}, sheet.name)
		b.do(b.f.SetCellHyperLink(about.name, at.local(), sheet.quoted()+"A1", "Location"))
		about.text(2, row, look{role: wrapped}, describe(sheet.name, outcomes))
		row++
	}
	about.finish(page{widths: []float64{34, 104}, upright: true})
}

// legend shows how the kinds of cells look; it returns the row under it.
func (s *sheet) legend(row int) int {
	s.text(1, row, look{role: section}, "How to read the cells")
	for i, l := range []struct {
		role role
		name string
		text string
	}{
		{input, "shaded, underlined", "a number as read, or a setting: change it and see what follows"},
		{computed, "plain", "a formula"},
		{result, "bold, tinted", "a formula that is an answer"},
		{entered, "slanted, dotted line", "a number that the program computed and no formula gives; it does not move"},
	} {
		s.text(1, row+1+i, look{role: l.role}, l.name)
		s.text(2, row+1+i, look{role: wrapped}, l.text)
	}
	s.text(2, row+5, look{role: wrapped}, "A corner mark is a note: it names the formula's source. Effects stand on the analysis scale (logarithms for ratios) with the same beside them as a reader sees it. Evidence is a natural logarithm, and in steps of 2 + √3.")
	return row + 7
}

func nameOf(outcome string) string {
	if outcome == "" {
		return "all rows"
	}
	return outcome
}

// answerOf is an outcome's answer in one line.
func answerOf(o *synthesis.Outcome) string {
	if o.Result == nil {
		return "no result: " + o.Problem
	}
	fit := o.Result.Fit
	text := fmt.Sprintf("%s %s; studies: %d; %s", words.Measure(o.Analysis.Measure), readerText(o), fit.Mean.K, words.Model(fit))
	if !o.Analysis.NullMissing {
		text += "; evidence " + words.Evidence(fit.Mean.Evidence)
	}
	return text
}

// describe says what a sheet holds and of which outcome.
func describe(name string, outcomes []*outcome) string {
	for part, text := range contents {
		if name == part {
			return text
		}
		for _, o := range outcomes {
			if name == sheetName(part, o.at, o.many, o.o.Name) {
				return text + " · " + o.title()
			}
		}
	}
	return ""
}
