package webpage

import (
	"steelyard/forest/words"
	"steelyard/meta/synthesis"
)

// changesView says what differs from an earlier sheet.
type changesView struct {
	Before     string // the earlier file
	Conclusion string
	Settings   []string
	Outcomes   []changedOutcome
}

// changedOutcome is what differs in one outcome.
type changedOutcome struct {
	Name   string
	Rows   []string
	Tables []tableView
	Looks  string
}

// changes builds the view of a change; nil without one.
func (v *view) changes(c *synthesis.Change) *changesView {
	if c == nil {
		return nil
	}
	said := words.Change(c)
	w := &changesView{Before: c.Previous.Synthesis.Source.File, Conclusion: said.Conclusion, Settings: said.Settings}
	for _, o := range said.Outcomes {
		x := changedOutcome{Name: words.Capital(o.Name), Rows: o.Rows, Looks: o.Looks}
		for _, part := range []struct {
			caption string
			heads   []string
			rows    [][]string
		}{
			{"Before and now", []string{"Quantity", "Before", "Now"}, o.Results},
			{"Triggers", []string{"Trigger", "State", "What was found"}, o.Triggers},
			{"Numbers against their guides", []string{"Number", "Before", "Now", "Guide"}, o.Guides},
			{"Cells that changed", []string{"Study", "Cell", "Before", "Now"}, o.Cells},
			{"Weights that moved", []string{"Study", "Before", "Now", "Change"}, o.Weights},
		} {
			if len(part.rows) == 0 {
				continue
			}
			t := v.table(part.caption, heads(part.heads...)...)
			for _, cells := range part.rows {
				row := rowView{}
				for _, cell := range cells {
					row.Cells = append(row.Cells, text(cell))
				}
				t.Rows = append(t.Rows, row)
			}
			t.pad()
			x.Tables = append(x.Tables, t)
		}
		w.Outcomes = append(w.Outcomes, x)
	}
	return w
}
