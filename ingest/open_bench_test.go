//go:build unix

package ingest

import (
	"bytes"
	"fmt"
	"testing"
	"time"

	"github.com/xuri/excelize/v2"
)

// BenchmarkOpen reads files of ten columns in a process of its own, and reports its
// processor time and its largest size.
func BenchmarkOpen(b *testing.B) {
	for _, rows := range []int{10_000, 100_000, 1_000_000} {
		b.Run(fmt.Sprintf("format=csv/rows=%d/cols=10", rows), func(b *testing.B) { benchmarkOpen(b, "a.csv", tenColumns(rows), rows) })
	}
	for _, rows := range []int{10_000, 100_000} {
		b.Run(fmt.Sprintf("format=xlsx/rows=%d/cols=10", rows), func(b *testing.B) { benchmarkOpen(b, "a.xlsx", tenColumnWorkbook(b, rows), rows) })
	}
}

func benchmarkOpen(b *testing.B, name string, data []byte, rows int) {
	path := written(b, name, data)
	b.SetBytes(int64(len(data)))
	var processor time.Duration
	peak := 0
	for b.Loop() {
		report, used := readInChild(b, path)
		if report.Error != "" || report.Studies != rows {
			b.Fatalf("%+v", report)
		}
		processor += used.processor
		peak = max(peak, used.peakMB)
	}
	b.ReportMetric(processor.Seconds()/float64(b.N), "cpu-s/op")
	b.ReportMetric(float64(peak), "peak-MB")
}

func tenColumns(rows int) []byte {
	b := bytes.NewBufferString("study,year,outcome,events treated,total treated,events control,total control,risk of bias,source,note\n")
	for i := range rows {
		fmt.Fprintf(b, "Trial %d,%d,death,%d,%d,%d,%d,low,p. %d,read twice\n", i, 1950+i%75, i%40, 100+i%900, i%50, 110+i%900, i%30)
	}
	return b.Bytes()
}

func tenColumnWorkbook(b *testing.B, rows int) []byte {
	f := excelize.NewFile()
	defer f.Close()
	w, err := f.NewStreamWriter("Sheet1")
	if err != nil {
		b.Fatal(err)
	}
	put := func(row int, values ...any) {
		if err := w.SetRow(cellAt(1, row), values); err != nil {
			b.Fatal(err)
		}
	}
	put(1, "study", "year", "outcome", "events treated", "total treated", "events control", "total control", "risk of bias", "source", "note")
	for i := range rows {
		put(i+2, fmt.Sprintf("Trial %d", i), 1950+i%75, "death", i%40, 100+i%900, i%50, 110+i%900, "low", fmt.Sprintf("p. %d", i%30), "read twice")
	}
	if err := w.Flush(); err != nil {
		b.Fatal(err)
	}
	return saved(b, f)
}
