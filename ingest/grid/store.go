package grid

// blockCells is the number of cells allocated at a time.
const blockCells = 32 << 10

// cellStore keeps rows of cells in large blocks and counts them.
type cellStore struct {
	block []Cell
	count int
	limit int
}

// keep returns a copy of cells; ok is false when the limit is passed.
func (s *cellStore) keep(cells []Cell) (kept []Cell, ok bool) {
	s.count += len(cells)
	if s.count > s.limit {
		return nil, false
	}
	if len(s.block)+len(cells) > cap(s.block) {
		s.block = make([]Cell, 0, max(len(cells), min(blockCells, 2*cap(s.block)+256)))
	}
	start := len(s.block)
	s.block = append(s.block, cells...)
	return s.block[start:len(s.block):len(s.block)], true
}
