package webpage

import (
	"strings"

	"steelyard/forest/words"
	"steelyard/meta/synthesis"
)

// eligible sets out which study is in which synthesis, and why not; nil for one outcome
// from which nothing is left out.
func (v *view) eligible(s *synthesis.Synthesis) *tableView {
	left := 0
	columns := []string{words.Capital(words.Noun(s, 1))}
	var order []string
	cells := map[string][]string{}
	at := func(name string, outcome int, text string) {
		if cells[name] == nil {
			cells[name] = make([]string, len(s.Outcomes))
			order = append(order, name)
		}
		if cells[name][outcome] != "" {
			text = cells[name][outcome] + "; " + text
		}
		cells[name][outcome] = text
	}
	for i := range s.Outcomes {
		o := &s.Outcomes[i]
		columns = append(columns, outcomeName(s, o))
		left += len(o.Excluded)
		for _, study := range o.Studies {
			at(study.Source.Name, i, "yes")
		}
		for _, e := range o.Excluded {
			at(e.Study, i, "no: "+e.Reason)
		}
	}
	if len(s.Outcomes) < 2 && left == 0 {
		return nil
	}
	t := v.table("Which "+words.Noun(s, 1)+" is in which synthesis", heads(columns...)...)
	for _, name := range order {
		row := rowView{Cells: []cellView{text(name)}}
		for _, cell := range cells[name] {
			if cell == "" {
				cell = "not in the sheet"
			}
			row.Cells = append(row.Cells, text(strings.TrimSpace(cell)))
		}
		t.Rows = append(t.Rows, row)
	}
	return &t
}
