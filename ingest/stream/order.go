package stream

import (
	"bytes"
	"fmt"
	"hash/maphash"
)

// mostLoose is how many sets may stand in any order. More must be in order, so that
// nothing needs to be remembered of them.
const mostLoose = 1_000_000

// Order watches that the rows of each set stand together: that no set comes a second
// time. While the sets are in order, by their text or by length and text, either way
// up, none can. The first mostLoose sets are remembered besides, by 64 bits each, for
// files whose sets are in no order. The zero value is ready.
type Order struct {
	file   string
	last   []byte
	sorted [4]bool // still ascending or descending by text, by length and text
	count  int
	seed   maphash.Seed
	seen   hashes
}

// NewOrder returns the watch over one file.
func NewOrder(file string) *Order {
	return &Order{file: file, sorted: [4]bool{true, true, true, true}, seed: maphash.MakeSeed()}
}

// Add takes the next set, whose first row is at line, or returns an *Error if it has
// come before, or may have.
func (o *Order) Add(set []byte, line int) error {
	if o.count > 0 {
		text, length := bytes.Compare(o.last, set), len(o.last)-len(set)
		if length == 0 {
			length = text
		}
		for i, step := range [4]int{text, -text, length, -length} {
			o.sorted[i] = o.sorted[i] && step < 0
		}
	}
	o.count++
	inOrder := o.sorted != [4]bool{}
	if o.count <= mostLoose {
		if o.seen.add(maphash.Bytes(o.seed, set)) && !inOrder {
			return &Error{File: o.file, Line: line, Problem: fmt.Sprintf("set %q comes a second time, after other sets", set),
				Remedy: "sort the file by set, or add --group, which sorts a copy on disk"}
		}
	} else {
		o.seen = hashes{}
		if !inOrder {
			return &Error{File: o.file, Line: line, Problem: fmt.Sprintf("set %q is out of order, after %q; more than %d sets must be in order", set, o.last, mostLoose),
				Remedy: "sort the file by set, or add --group, which sorts a copy on disk"}
		}
	}
	o.last = append(o.last[:0], set...)
	return nil
}

// hashes is a set of 64-bit numbers in an open table.
type hashes struct {
	slots []uint64 // 0 where empty
	used  int
}

// add adds a number and reports whether it was there.
func (h *hashes) add(x uint64) bool {
	if x == 0 {
		x = 1
	}
	if 2*h.used >= len(h.slots) {
		old := h.slots
		h.slots = make([]uint64, max(1024, 2*len(old)))
		h.used = 0
		for _, y := range old {
			if y != 0 {
				h.add(y)
			}
		}
	}
	mask := uint64(len(h.slots) - 1)
	for i := x & mask; ; i = (i + 1) & mask {
		switch h.slots[i] {
		case x:
			return true
		case 0:
			h.slots[i] = x
			h.used++
			return false
		}
	}
}
