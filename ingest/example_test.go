package ingest_test

import (
	"context"
	"fmt"

	"steelyard/ingest"
	"steelyard/meta/review"
)

func ExampleRead() {
	sheet := []byte("Trial,Year,Events treated,N treated,Placebo events,Placebo N\n" +
		"Halvorsen,2009,11,41,19,40\n" +
		"Okwuosa,2012,<3,17,7,18\n")
	x, _, err := ingest.Read(context.Background(), sheet, "trials.csv", ingest.Options{})
	if err != nil {
		fmt.Println(err)
		return
	}
	for _, s := range x.Studies {
		events, ok := s.Number(review.EventsTreated)
		fmt.Println(s.Name, s.Date, events.Value, ok)
	}
	for _, f := range x.Findings {
		fmt.Println(f.Place, f.Severity, f.Rule)
	}
	// Output:
	// Halvorsen 2009 11 true
	// Okwuosa 2012 0 false
	// trials.csv!C3 error F6
}

func ExampleParseColumn() {
	fmt.Println(ingest.ParseColumn("events treated=Deaths, drug arm"))
	// Output: events treated Deaths, drug arm <nil>
}
