package stream

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
	"math/rand/v2"
	"runtime"
	"strings"
	"testing"
)

// counted counts the rows of each set through the workers.
func counted(t *testing.T, r *Reader, workers int) (sets []string, rows []int, err error) {
	t.Helper()
	type found struct {
		sets []string
		rows []int
	}
	err = Each(context.Background(), r, workers, func() func(*Block, *found) {
		return func(b *Block, into *found) {
			*into = found{}
			for rows := r.Table.Rows(b); rows.Next(); {
				if n := len(into.sets); n == 0 || into.sets[n-1] != string(rows.Row.Set) {
					into.sets, into.rows = append(into.sets, string(rows.Row.Set)), append(into.rows, 0)
				}
				into.rows[len(into.rows)-1]++
			}
		}
	}, func(_ *Block, f *found) error {
		sets, rows = append(sets, f.sets...), append(rows, f.rows...)
		return nil
	})
	return sets, rows, err
}

// TestBlocksHoldWholeSets: sets of any size, up to several blocks long, come whole and
// in order, whatever the number of workers.
func TestBlocksHoldWholeSets(t *testing.T) {
	random := rand.New(rand.NewPCG(4, 4))
	var text strings.Builder
	text.WriteString("set,estimate,se\n")
	var want []int
	for set := range 60 {
		n := 1 + random.IntN(40)
		if set%20 == 7 {
			n = 120_000 // about three blocks
		}
		want = append(want, n)
		for range n {
			fmt.Fprintf(&text, "s%d,%.6f,0.25\n", set, random.NormFloat64())
		}
	}
	for _, workers := range []int{1, 3} {
		r, err := NewReader(strings.NewReader(text.String()), Options{File: "t.csv"})
		if err != nil {
			t.Fatal(err)
		}
		sets, rows, err := counted(t, r, workers)
		if err != nil || len(sets) != len(want) {
			t.Fatalf("%d sets, %v; want %d", len(sets), err, len(want))
		}
		for i := range want {
			if sets[i] != fmt.Sprintf("s%d", i) || rows[i] != want[i] {
				t.Errorf("set %d: %s with %d rows, want %d", i, sets[i], rows[i], want[i])
			}
		}
	}
}

// TestGroupSortsOnDisk: more than is sorted at a time in memory comes back whole, each
// set together, its rows in the order of the file, with their line numbers.
func TestGroupSortsOnDisk(t *testing.T) {
	t.Setenv("TMPDIR", t.TempDir())
	const n = 400_000 // at about 110 bytes each, more than one run
	var text bytes.Buffer
	text.WriteString("estimate,se,set\n")
	for i := range n {
		fmt.Fprintf(&text, "%d,0.25,%d\n", i, i*7919%1000)
	}
	r, err := NewReader(&text, Options{File: "t.csv"})
	if err != nil {
		t.Fatal(err)
	}
	sorted, done, err := Group(context.Background(), r)
	if err != nil {
		t.Fatal(err)
	}
	defer done()
	var b Block
	seen, set, last := 0, -1, -1.0
	for {
		if err := sorted.Next(&b); errors.Is(err, io.EOF) {
			break
		} else if err != nil {
			t.Fatal(err)
		}
		for rows := sorted.Table.Rows(&b); rows.Next(); seen++ {
			if name := fmt.Sprint(set); name != string(rows.Row.Set) {
				if set++; fmt.Sprint(set) != string(rows.Row.Set) {
					t.Fatalf("set %s follows %s", rows.Row.Set, name)
				}
				last = -1
			}
			value := rows.Row.Values[0]
			if value <= last || rows.Row.Line != int(value)+2 {
				t.Fatalf("set %d: %v after %v, line %d", set, value, last, rows.Row.Line)
			}
			last = value
		}
	}
	if seen != n || set != 999 {
		t.Errorf("%d rows of %d sets, want %d of 1000", seen, set+1, n)
	}
}

// TestOrderRemembers: a set that comes back is refused, in whatever order the sets
// are; sets in order never are.
func TestOrderRemembers(t *testing.T) {
	for _, tt := range []struct {
		sets string
		bad  string // the set at which it is refused
	}{
		{"a b c d", ""}, {"d c b a", ""}, {"1 2 9 10 11 100", ""}, {"b a c", ""},
		{"a b a", "a"}, {"b a c b", "b"}, {"1 2 10 2", "2"}, {"c a b c", "c"},
	} {
		o := NewOrder("t.csv")
		bad := ""
		for i, set := range strings.Fields(tt.sets) {
			if err := o.Add([]byte(set), i+2); err != nil {
				bad = set
				break
			}
		}
		if bad != tt.bad {
			t.Errorf("%s: refused at %q, want %q", tt.sets, bad, tt.bad)
		}
	}
}

// TestOrderForgets: beyond a million sets in order nothing is remembered, and one out
// of order is refused.
func TestOrderForgets(t *testing.T) {
	o := NewOrder("t.csv")
	for i := range mostLoose + 10 {
		if err := o.Add([]byte(fmt.Sprint(i)), i); err != nil {
			t.Fatal(err)
		}
	}
	if len(o.seen.slots) > 0 {
		t.Errorf("%d slots are kept", len(o.seen.slots))
	}
	if err := o.Add([]byte("10000000"), 1); err != nil {
		t.Errorf("in order by length and text: %v", err)
	}
	o.last = append(o.last[:0], "zzzzzzzzz"...)
	if err := o.Add([]byte("a"), 1); err == nil {
		t.Error("a set out of order is taken")
	}
}

// TestMemoryIsFlat: ten times the rows need no more room than the blocks in flight.
func TestMemoryIsFlat(t *testing.T) {
	peak := func(sets int) uint64 {
		r, err := NewReader(&long{sets: sets}, Options{File: "t.csv"})
		if err != nil {
			t.Fatal(err)
		}
		var most uint64
		var stats runtime.MemStats
		err = Each(context.Background(), r, 2, func() func(*Block, *int) { return func(*Block, *int) {} }, func(*Block, *int) error {
			runtime.ReadMemStats(&stats)
			most = max(most, stats.HeapInuse)
			return nil
		})
		if err != nil {
			t.Fatal(err)
		}
		return most
	}
	few, many := peak(40_000), peak(400_000)
	if many > few+(16<<20) {
		t.Errorf("%d MB for 40,000 sets, %d MB for ten times as many", few>>20, many>>20)
	}
}

// long is a table of many sets of two rows that is made as it is read.
type long struct {
	sets, done int
	ready      bytes.Buffer
}

func (l *long) Read(p []byte) (int, error) {
	if l.done == 0 {
		l.ready.WriteString("set,estimate,se\n")
	}
	for l.ready.Len() < len(p) && l.done < l.sets {
		fmt.Fprintf(&l.ready, "%d,0.1,0.2\n%d,0.3,0.2\n", l.done, l.done)
		l.done++
	}
	return l.ready.Read(p)
}
