package webpage

import (
	"fmt"
	"slices"
	"strings"

	"steelyard/forest/words"
	"steelyard/meta/effect"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// filterView is a choice that narrows the study table to the rows with a text in a
// column.
type filterView struct {
	Label  string
	Column int
	Values []string
}

// mostFilterValues bounds the values of a column that a choice is made of.
const mostFilterValues = 8

// studyTable is the table of the pooled rows, with the cells that their numbers stand in.
func (v *view) studyTable(s *synthesis.Synthesis, o *synthesis.Outcome, id string) tableView {
	arms := armColumns(s, o)
	columns := []string{words.Capital(words.Noun(s, 1)), "Date"}
	for _, arm := range arms {
		columns = append(columns, "#"+arm.head)
	}
	columns = append(columns, estimateHead(o), "#Weight")
	if !o.Analysis.NullMissing {
		columns = append(columns, "#Effect : none")
	}
	risk := slices.ContainsFunc(o.Studies, func(st synthesis.Study) bool { return st.Source.Cell("risk-of-bias") != "" })
	if risk {
		columns = append(columns, "Risk of bias")
	}
	columns = append(columns, "Cells")
	t := v.table(words.Capital(words.Noun(s, 2))+", as read from the sheet", heads(columns...)...)
	t.ID, t.Sortable = id+"-studies", true
	for i, study := range o.Studies {
		src := study.Source
		name := text(src.Name)
		name.Dagger = strings.Join(study.Assumptions, "; ")
		date := text(strings.ReplaceAll(src.Date.String(), "-", "\u2011")) // no line break within a date
		row := rowView{Study: studyMark(id, i), Cells: []cellView{name, date}}
		for _, arm := range arms {
			row.Cells = append(row.Cells, arm.cell(src))
		}
		row.Cells = append(row.Cells, estimateCell(o, study.Estimate.Y, study.Interval), number(words.PercentFine(study.Weight), study.Weight))
		if !o.Analysis.NullMissing {
			row.Cells = append(row.Cells, number(oddsCell(study.Evidence.Ln()), study.Evidence.Ln()))
		}
		if risk {
			row.Cells = append(row.Cells, text(src.Cell("risk-of-bias")))
		}
		row.Cells = append(row.Cells, cellView{Text: cellsOf(src), Key: fmt.Sprint(src.Row.Row)})
		t.Rows = append(t.Rows, row)
	}
	if risk {
		t.Filters = append(t.Filters, valuesOf(t, "Risk of bias")...)
	}
	t.Notes = conversionNotes(o)
	return t
}

// studyMark is the mark by which a study is found in table, charts and data.
func studyMark(id string, row int) string { return fmt.Sprintf("%s-%d", id, row+1) }

// armColumn is a column of what an arm counted or measured.
type armColumn struct {
	head string
	cell func(*review.Study) cellView
}

// armColumns are the columns of counts or means that any study fills.
func armColumns(s *synthesis.Synthesis, o *synthesis.Outcome) []armColumn {
	any := func(f review.Field) bool {
		return slices.ContainsFunc(o.Studies, func(st synthesis.Study) bool { _, ok := st.Source.Number(f); return ok })
	}
	var columns []armColumn
	for arm, f := range [][4]review.Field{
		{review.EventsTreated, review.TotalTreated, review.MeanTreated, review.SDTreated},
		{review.EventsControl, review.TotalControl, review.MeanControl, review.SDControl},
	} {
		name := words.Capital(s.Arms[arm])
		switch {
		case any(f[0]):
			columns = append(columns, armColumn{name + ", events of total", func(st *review.Study) cellView { return countCell(st, f[0], f[1]) }})
		case any(f[2]):
			columns = append(columns, armColumn{name + ", mean (SD), n", func(st *review.Study) cellView { return meanCell(st, f[2], f[3], f[1]) }})
		}
	}
	return columns
}

func stored(st *review.Study, f review.Field) string {
	n, ok := st.Number(f)
	switch {
	case !ok:
		return "–"
	case strings.TrimSpace(n.Place.Text) != "":
		return strings.TrimSpace(n.Place.Text)
	}
	return words.PriorScale(n.Value)
}

func countCell(st *review.Study, events, total review.Field) cellView {
	e, n := "–", "–"
	if x, ok := st.Number(events); ok {
		e = words.People(x.Value)
	}
	if x, ok := st.Number(total); ok {
		n = words.People(x.Value)
	}
	if e == "–" && n == "–" {
		return cellView{Text: "–", Number: true}
	}
	return cellView{Text: words.NoBreak(e + " of " + n), Number: true}
}

func meanCell(st *review.Study, mean, sd, total review.Field) cellView {
	if _, ok := st.Number(mean); !ok {
		return cellView{Text: "–", Number: true}
	}
	return cellView{Text: words.NoBreak(fmt.Sprintf("%s (%s), %s", stored(st, mean), stored(st, sd), stored(st, total))), Number: true}
}

// cellsOf names the cells of a study's numbers: "D6:I6" for a row, with the sheet.
func cellsOf(st *review.Study) string {
	first, last := 0, 0
	for _, n := range st.Numbers {
		if n.Place.Row != st.Row.Row || n.Place.Col == 0 {
			continue
		}
		if first == 0 || n.Place.Col < first {
			first = n.Place.Col
		}
		last = max(last, n.Place.Col)
	}
	if first == 0 {
		return st.Row.String()
	}
	from := st.Row
	from.Col = first
	if last == first {
		return from.String()
	}
	to := review.Place{Row: st.Row.Row, Col: last}
	return from.String() + ":" + to.Cell()
}

// valuesOf makes a choice of a column's texts, if they are few.
func valuesOf(t tableView, head string) []filterView {
	at := slices.IndexFunc(t.Heads, func(h headView) bool { return h.Text == head })
	var values []string
	for _, row := range t.Rows {
		if x := row.Cells[at].Text; !slices.Contains(values, x) {
			values = append(values, x)
		}
	}
	if len(values) < 2 || len(values) > mostFilterValues {
		return nil
	}
	slices.Sort(values)
	return []filterView{{Label: head, Column: at, Values: values}}
}

// conversionNotes say what the marked numbers were worked out of, cell by cell.
func conversionNotes(o *synthesis.Outcome) []string {
	var notes []string
	for _, study := range o.Studies {
		for _, c := range study.Conversions {
			if study.Converted() || c.Added {
				notes = append(notes, conversionNote(study, c))
			}
		}
		if study.Converted() && len(study.Conversions) == 0 {
			notes = append(notes, fmt.Sprintf("† %s: %s.", study.Source.Name, strings.Join(study.Assumptions, "; ")))
		}
	}
	return notes
}

func conversionNote(study synthesis.Study, c effect.Conversion) string {
	text := fmt.Sprintf("† %s: %s", study.Source.Name, c.What)
	if from := valuesText(c.From, study.Source); from != "" {
		text += " from " + from
	}
	if to := valuesText(c.To, nil); to != "" {
		text += ", giving " + to
	}
	if c.Source != "" {
		text += " (" + c.Source + ")"
	}
	return text + "."
}

// valuesText writes named numbers, with the cell of one that the row holds.
func valuesText(values []effect.Value, row *review.Study) string {
	var all []string
	for _, x := range values {
		text := fmt.Sprintf("%s %s", x.Name, strings.Replace(fmt.Sprintf("%.4g", x.Value), "-", "−", 1))
		if row != nil {
			if field, err := review.ParseField(x.Name); err == nil {
				if n, ok := row.Number(field); ok && n.Value == x.Value {
					text += " (" + n.Place.Cell() + ")"
				}
			}
		}
		all = append(all, text)
	}
	return strings.Join(all, ", ")
}
