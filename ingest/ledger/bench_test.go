package ledger

import (
	"bytes"
	"fmt"
	"testing"
)

// BenchmarkOpen reads ledgers of reviews of 50 studies.
func BenchmarkOpen(b *testing.B) {
	for _, states := range []int{200, 2000} {
		b.Run(fmt.Sprintf("states=%d", states), func(b *testing.B) {
			var data bytes.Buffer
			data.WriteString(header() + "\n")
			parent := root
			for i := range states {
				e := entry(i)
				result := OutcomeRecord{Outcome: "flare within 24 weeks", Measure: "risk ratio", K: 50, Rows: 50, Pooled: &PooledRow{Estimate: -0.123456789012345, SE: 0.1}}
				var shares []StudyShare
				for j := range 50 {
					shares = append(shares, StudyShare{Study: fmt.Sprintf("Study %d 2019", j), Estimate: -0.123456789012345 / float64(j+1), SE: 0.212345678901234, Weight: 0.0212345678901234})
				}
				e.Record.Results = []OutcomeRecord{result}
				line, sum, err := encode(parent, e.Record, [][]StudyShare{shares})
				if err != nil {
					b.Fatal(err)
				}
				data.Write(append(line, '\n'))
				parent = sum
			}
			b.SetBytes(int64(data.Len()))
			for b.Loop() {
				if l, err := read("", data.Bytes()); err != nil || len(l.States) != states {
					b.Fatal(err)
				}
			}
		})
	}
}
