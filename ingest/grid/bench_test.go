package grid

import (
	"context"
	"fmt"
	"strings"
	"testing"
)

func BenchmarkText(b *testing.B) {
	var text strings.Builder
	text.WriteString("study,year,outcome,events,total,mean,sd,note\n")
	for i := range 100_000 {
		fmt.Fprintf(&text, "Study %d,%d,mortality,%d,%d,%.3f,%.2f,\"read, twice\"\n", i, 1990+i%30, i%50, 100+i%900, float64(i)/7, float64(i%40)/3)
	}
	data := []byte(text.String())
	b.Run("rows=100000", func(b *testing.B) { benchmarkRead(b, data, 100_001) })
}

func BenchmarkWorkbook(b *testing.B) {
	for _, rows := range []int{10_000, 100_000} {
		var inner strings.Builder
		for i := range rows {
			fmt.Fprintf(&inner, `<row r="%d">`, i+1)
			for col := range 10 {
				fmt.Fprintf(&inner, `<c r="%s" s="0"><v>%d.%d</v></c>`, reference(i+1, col+1), i*(col+1)%1000, i%97)
			}
			inner.WriteString("</row>")
		}
		data := minimal("<sheetData>" + inner.String() + "</sheetData>").pack(b)
		b.Run(fmt.Sprintf("rows=%d/cols=10", rows), func(b *testing.B) { benchmarkRead(b, data, rows) })
	}
}

func benchmarkRead(b *testing.B, data []byte, rows int) {
	b.SetBytes(int64(len(data)))
	b.ReportAllocs()
	for b.Loop() {
		book, err := Read(context.Background(), data, "a.csv")
		if err != nil || len(book.Sheets[0].Rows) != rows {
			b.Fatal(err)
		}
	}
}
