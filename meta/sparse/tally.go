package sparse

import "steelyard/meta/effect"

// Tally counts the tables by what they carry.
type Tally struct {
	Tables    int   // given
	NoEvents  int   // nobody in either arm had the event
	AllEvents int   // everybody in both arms had it
	ZeroCell  int   // another table with at least one cell of 0
	Silent    []int // indices of tables that carry nothing about the measure, ascending
}

// Used returns how many tables carry information.
func (t Tally) Used() int { return t.Tables - len(t.Silent) }

// take checks the tables and returns those that carry information about the
// measure, in order. It returns ErrNothingToCompare if there are none.
func take(m effect.Measure, tables []effect.Table) ([]effect.Table, Tally, error) {
	tally := Tally{Tables: len(tables)}
	used := make([]effect.Table, 0, len(tables))
	for i, t := range tables {
		if err := t.Check(); err != nil {
			return nil, tally, &TableError{Index: i, Err: err}
		}
		x := cellsOf(t)
		silent := false
		switch {
		case x.a == 0 && x.c == 0:
			tally.NoEvents++
			silent = m != effect.RiskDifference
		case x.b == 0 && x.d == 0:
			tally.AllEvents++
			silent = m == effect.OddsRatio
		case x.a == 0 || x.b == 0 || x.c == 0 || x.d == 0:
			tally.ZeroCell++
		}
		if silent {
			tally.Silent = append(tally.Silent, i)
		} else {
			used = append(used, t)
		}
	}
	if len(used) == 0 || m != effect.OddsRatio && (tally.NoEvents == len(tables) || tally.AllEvents == len(used)) {
		return nil, tally, ErrNothingToCompare
	}
	return used, tally, nil
}

// cells are events and non-events of the treated (a, b) and the control arm
// (c, d), with the totals of the arms and of the table.
type cells struct{ a, b, c, d, n1, n2, n float64 }

func cellsOf(t effect.Table) cells {
	return cells{
		a: t.Events1, b: t.Total1 - t.Events1, c: t.Events2, d: t.Total2 - t.Events2,
		n1: t.Total1, n2: t.Total2, n: t.Total1 + t.Total2,
	}
}

// toward returns −1 or 1 if the odds ratio of all tables together is estimated
// as 0 or as infinite, else 0: none has ad > 0, or none bc > 0.
func toward(tables []effect.Table) int {
	var up, down bool
	for _, t := range tables {
		x := cellsOf(t)
		up = up || x.a > 0 && x.d > 0
		down = down || x.b > 0 && x.c > 0
	}
	switch {
	case up && !down:
		return 1
	case down && !up:
		return -1
	}
	return 0
}

// spread turns the weights of the tables used into shares of all tables given.
func (t Tally) spread(weights []float64) []float64 {
	total := 0.0
	for _, w := range weights {
		total += w
	}
	all := make([]float64, t.Tables)
	next, silent := 0, t.Silent
	for i := range all {
		if len(silent) > 0 && silent[0] == i {
			silent = silent[1:]
			continue
		}
		all[i] = weights[next] / total
		next++
	}
	return all
}
