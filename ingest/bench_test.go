package ingest

import (
	"bytes"
	"context"
	"fmt"
	"testing"
)

// manyStudies returns a text file of n studies in 8 columns.
func manyStudies(n int) []byte {
	var buffer bytes.Buffer
	buffer.WriteString("study,year,outcome,events treated,total treated,events control,total control,risk of bias\n")
	for i := range n {
		fmt.Fprintf(&buffer, "Trial %d,%d,death,%d,%d,%d,%d,low\n", i, 1950+i%75, i%40, 100+i%900, i%50, 110+i%900)
	}
	return buffer.Bytes()
}

// BenchmarkRead reads a text file of 8 columns, cells and all.
func BenchmarkRead(b *testing.B) {
	for _, rows := range []int{13, 100_000} {
		data := manyStudies(rows)
		b.Run(fmt.Sprintf("rows=%d", rows), func(b *testing.B) {
			b.ReportAllocs()
			b.SetBytes(int64(len(data)))
			for b.Loop() {
				x, _, err := Read(context.Background(), data, "trials.csv", Options{})
				if err != nil || len(x.Studies) != rows {
					b.Fatal(err)
				}
			}
		})
	}
}
