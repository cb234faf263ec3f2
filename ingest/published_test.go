package ingest

import (
	"context"
	"testing"

	"steelyard/meta/review"
)

// TestPublishedCounts reads the counts of the 13 trials of BCG vaccine. Source:
// Colditz et al., JAMA 1994;271:698-702, as the file's README says; the numbers
// here are typed from that table.
func TestPublishedCounts(t *testing.T) {
	x, plan, err := Open(context.Background(), "../testdata/checks/bcg_counts.csv", Options{})
	if err != nil {
		t.Fatal(err)
	}
	if len(x.Findings) != 0 {
		t.Errorf("findings: %v", x.Findings)
	}
	if got := plan.Value(review.SettingLevel, "").Text; got != "0.95" {
		t.Errorf("level %q, want the default 0.95 without a plan", got)
	}
	want := []struct {
		year                             int
		events1, total1, events2, total2 float64
	}{
		{1948, 4, 123, 11, 139}, {1949, 6, 306, 29, 303}, {1960, 3, 231, 11, 220}, {1977, 62, 13598, 248, 12867},
		{1973, 33, 5069, 47, 5808}, {1953, 180, 1541, 372, 1451}, {1973, 8, 2545, 10, 629}, {1980, 505, 88391, 499, 88391},
		{1968, 29, 7499, 45, 7277}, {1961, 17, 1716, 65, 1665}, {1974, 186, 50634, 141, 27338}, {1969, 5, 2498, 3, 2341},
		{1976, 27, 16913, 29, 17854},
	}
	if len(x.Studies) != len(want) {
		t.Fatalf("%d studies, want %d", len(x.Studies), len(want))
	}
	for i, w := range want {
		s := &x.Studies[i]
		if s.Date.Year != w.year || s.Row.Row != i+2 {
			t.Errorf("study %d: year %d in row %d, want %d in row %d", i, s.Date.Year, s.Row.Row, w.year, i+2)
		}
		for field, value := range map[review.Field]float64{
			review.EventsTreated: w.events1, review.TotalTreated: w.total1, review.EventsControl: w.events2, review.TotalControl: w.total2,
		} {
			if n, ok := s.Number(field); !ok || n.Value != value {
				t.Errorf("%s: %v = %v, want %v", s.Name, field, n.Value, value)
			}
		}
		if _, ok := s.Remark("latitude"); !ok {
			t.Errorf("%s: the covariate latitude is lost", s.Name)
		}
	}
}
