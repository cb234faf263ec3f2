package ingest

import (
	"fmt"
	"strings"

	"steelyard/ingest/grid"
	"steelyard/meta/review"
)

// pair understands two rows as the header: groups, such as the arms, over what is
// given for each. A group reaches over its merged cells; in a sheet without merged
// cells it reaches over the blanks to its right, the last one no further than
// the first.
func (r *headerReader) pair(i int) *header {
	top, sub := &r.sheet.Rows[i], &r.sheet.Rows[i+1]
	h := &header{top: i, bottom: i + 1, columns: make([]column, max(len(top.Cells), len(sub.Cells)))}
	groups := r.groupTexts(top, sub, len(h.columns))
	var arms []armColumn
	for c := range h.columns {
		col := c + 1
		own, below := headerText(top, col), headerText(sub, col)
		switch group := groups[c]; {
		case below == "":
			h.columns[c] = r.newColumn(own, top.Number, col)
		case group == "":
			h.columns[c] = r.newColumn(below, sub.Number, col)
		default:
			joined, pending := r.joinedColumn(group, below, sub.Number, col)
			h.columns[c] = joined
			if pending != nil {
				arms = append(arms, *pending)
			}
		}
	}
	r.assignArms(h, arms)
	return h
}

// armColumn is a column that gives a quantity for a group whose name is no known
// word for an arm.
type armColumn struct {
	col      int
	group    string // as typed
	quantity quantity
	alone    meaning // what the lower header says by itself
}

// joinedColumn understands a group's header together with the one below it.
func (r *headerReader) joinedColumn(group, below string, row, col int) (column, *armColumn) {
	joined := r.newColumn(group+" "+below, row, col)
	if joined.field != review.NoField {
		return joined, nil
	}
	alone, known := recognise(below)
	if q, ok := bareQuantity(below); ok {
		return joined, &armColumn{col: col, group: group, quantity: q, alone: alone}
	}
	if q, ok := bareQuantity(group); ok && !known {
		return joined, &armColumn{col: col, group: below, quantity: q}
	}
	if known {
		return r.newColumn(below, row, col), nil
	}
	return joined, nil
}

// groupTexts returns for each column the text of the group above it, blank where
// there is none.
func (r *headerReader) groupTexts(top, sub *grid.Row, n int) []string {
	groups := make([]string, n)
	for c := range groups {
		groups[c] = headerText(top, c+1)
	}
	if r.fillMerges(top.Number, groups) {
		return groups
	}
	for c, width := 0, n; c < n; {
		if groups[c] == "" || headerText(sub, c+1) == "" {
			c++
			continue
		}
		end := c + 1
		for end < n && end-c < width && groups[end] == "" && headerText(sub, end+1) != "" {
			groups[end] = groups[c]
			end++
		}
		if end-c > 1 && width == n {
			width = end - c
		}
		c = end
	}
	return groups
}

// fillMerges spreads the texts of merged cells over their columns; ok is false if
// the row has no cells merged sideways.
func (r *headerReader) fillMerges(row int, groups []string) (ok bool) {
	for _, m := range r.sheet.Merges {
		if m.FirstRow != row || m.FirstCol == m.LastCol || m.FirstCol > len(groups) {
			continue
		}
		ok = true
		for col := m.FirstCol + 1; col <= min(m.LastCol, len(groups)); col++ {
			groups[col-1] = groups[m.FirstCol-1]
		}
	}
	return ok
}

// assignArms decides which of the groups named by the reviewer is the treated arm
// and which the control arm: by a word such as "without" or "placebo", else the
// first is treated. With more than two groups nothing is decided.
func (r *headerReader) assignArms(h *header, columns []armColumn) {
	var names []string
	for _, c := range columns {
		known := false
		for _, name := range names {
			known = known || name == c.group
		}
		if !known && c.quantity.treated != review.SETreated {
			names = append(names, c.group)
		}
	}
	treated, control, ok := r.nameArms(h, names)
	for _, c := range columns {
		m := &h.columns[c.col-1].meaning
		switch {
		case ok && c.group == treated:
			m.field = c.quantity.treated
		case ok && c.group == control:
			m.field = c.quantity.control
		case c.alone.field == review.Events || c.alone.field == review.Total || c.alone.field == review.PersonTime:
			*m = meaning{} // of one of several groups, and not of the only one
		default:
			*m = c.alone
		}
	}
	if ok {
		place := r.place(r.sheet.Rows[h.top].Number, 0, "")
		h.note(place, "F9", fmt.Sprintf("%s is read as the treated arm and %s as the control arm; if it is the other way round, head the groups Treated and Control",
			orArm(treated, "the other group"), orArm(control, "the other group")))
	}
}

func orArm(name, fallback string) string {
	if name == "" {
		return fallback
	}
	return quote(name)
}

// nameArms returns the names of the treated and the control group; one is blank
// when it was recognised by its words already.
func (r *headerReader) nameArms(h *header, names []string) (treated, control string, ok bool) {
	have := h.fields()
	knowsTreated := have[review.EventsTreated] || have[review.MeanTreated] || have[review.TotalTreated]
	knowsControl := have[review.EventsControl] || have[review.MeanControl] || have[review.TotalControl]
	switch {
	case len(names) == 1 && knowsControl && !knowsTreated:
		return names[0], "", true
	case len(names) == 1 && knowsTreated && !knowsControl:
		return "", names[0], true
	case len(names) != 2 || knowsTreated || knowsControl:
		return "", "", false
	case hintsControl(names[0], names[1]) && !hintsControl(names[1], names[0]):
		return names[1], names[0], true
	}
	return names[0], names[1], true
}

// hintsControl reports whether a group's name marks it as the control of other.
func hintsControl(name, other string) bool {
	phrase, _ := fold(name)
	opposite, _ := fold(other)
	for _, word := range strings.Fields(phrase) {
		if controlHints[word] {
			return true
		}
	}
	return opposite != "" && (phrase == "un"+opposite || phrase == "non"+opposite)
}
