package grid

import "fmt"

// remarksOfAKind is how often the same message is given on one sheet; the rest
// is counted.
const remarksOfAKind = 20

// remarker collects remarks and keeps them few.
type remarker struct {
	list   []Remark
	counts map[remarkKind]int
	order  []remarkKind
}

type remarkKind struct{ sheet, message string }

// add notes message, which should be the same text for the same kind of remark;
// detail, if not blank, is put behind it.
func (r *remarker) add(sheet string, row, col int, message, detail string) {
	if r.counts == nil {
		r.counts = map[remarkKind]int{}
	}
	kind := remarkKind{sheet, message}
	r.counts[kind]++
	switch n := r.counts[kind]; {
	case n == 1:
		r.order = append(r.order, kind)
	case n > remarksOfAKind:
		return
	}
	if detail != "" {
		message += ": " + detail
	}
	r.list = append(r.list, Remark{Sheet: sheet, Row: row, Col: col, Message: message})
}

// all returns the remarks in the order they were made, then a count of those
// left out.
func (r *remarker) all() []Remark {
	for _, kind := range r.order {
		if more := r.counts[kind] - remarksOfAKind; more > 0 {
			r.list = append(r.list, Remark{Sheet: kind.sheet, Message: fmt.Sprintf("%s: %d more cells", kind.message, more)})
		}
	}
	return r.list
}
