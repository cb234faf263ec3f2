package audit

import (
	"fmt"

	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// firstRow is where the tables begin, under two rows of title and one of heads.
const firstRow = 5

// writeStudies writes the rows as read, each number in a cell of its own, which all
// else refers to. It returns these cells.
func (b *book) writeStudies(s *synthesis.Synthesis, x *review.Extraction) map[*review.Study]map[review.Field]cell {
	sh := b.sheet("studies")
	sh.text(1, 1, look{role: heading}, "Studies as read")
	sh.text(1, 2, look{role: subtitle}, "Every number as it stands in the sheet. Change one of the shaded cells, and what follows from it moves.")
	heads := []string{"study", "date", "outcome", "row", "pooled"}
	for i, h := range heads {
		sh.text(i+1, firstRow-1, look{role: headText}, h)
	}
	fields := fieldsOf(x)
	for i, f := range fields {
		c := sh.text(len(heads)+1+i, firstRow-1, look{role: head}, f.String())
		if at := columnOf(x, f); at.Col > 0 {
			sh.note(c, "Read from "+at.String()+".")
		}
	}
	status := statusOf(s)
	cells := map[*review.Study]map[review.Field]cell{}
	for i := range x.Studies {
		study, row := &x.Studies[i], firstRow+i
		said, known := status[study.Row.Row]
		if !known {
			said = "not asked for"
		}
		for j, text := range []string{study.Name, study.Date.String(), study.Outcome, study.Row.String(), said} {
			sh.text(j+1, row, look{role: map[bool]role{true: wrapped}[j == len(heads)-1]}, text)
		}
		cells[study] = map[review.Field]cell{}
		for j, f := range fields {
			if n, ok := study.Number(f); ok {
				c := sh.number(len(heads)+1+j, row, look{role: input}, n.Value)
				cells[study][f] = c
				if at := columnOf(x, f); n.Place.Row != study.Row.Row || n.Place.Col != at.Col {
					sh.note(c, "Read from "+n.Place.In(study.Row).String()+".")
				}
			}
		}
	}
	sh.finish(page{widths: []float64{24, 10, 24, 26, 30}, rest: 11, frozen: sh.at(2, firstRow), repeated: firstRow - 1})
	return cells
}

// fieldsOf returns the columns of numbers that some row fills, in their usual order.
func fieldsOf(x *review.Extraction) []review.Field {
	var have [review.FieldCount]bool
	for i := range x.Studies {
		for _, n := range x.Studies[i].Numbers {
			have[n.Field] = true
		}
	}
	var fields []review.Field
	for f := range have {
		if have[f] {
			fields = append(fields, review.Field(f))
		}
	}
	return fields
}

func columnOf(x *review.Extraction, f review.Field) review.Place {
	for _, c := range x.Columns {
		if c.Field == f {
			return review.Place{File: c.Place.File, Sheet: c.Place.Sheet, Col: c.Place.Col}
		}
	}
	return review.Place{}
}

// statusOf says of each row, by its number, whether it is pooled and why not.
func statusOf(s *synthesis.Synthesis) map[int]string {
	status := map[int]string{}
	for i := range s.Outcomes {
		for _, study := range s.Outcomes[i].Studies {
			status[study.Source.Row.Row] = "yes"
			if s.Outcomes[i].Result == nil {
				status[study.Source.Row.Row] = "no result"
			}
		}
		for _, e := range s.Outcomes[i].Excluded {
			status[e.Place.Row] = fmt.Sprintf("no: %s", e.Reason)
		}
	}
	return status
}
