package synthesis

import (
	"strings"
	"testing"

	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// TestLacking: a row without a complete set of numbers is told what it lacks of
// the kind that it comes nearest to.
func TestLacking(t *testing.T) {
	for _, c := range []struct {
		numbers numbers
		want    string
	}{
		{numbers{review.EventsTreated: 3, review.TotalTreated: 40, review.TotalControl: 41}, "for counts it lacks events control"},
		{numbers{review.EventsTreated: 3, review.TotalTreated: 40}, "for counts it lacks events control and total control"},
		{numbers{review.MeanTreated: 3, review.SDTreated: 1, review.TotalTreated: 40, review.MeanControl: 3, review.TotalControl: 40}, "for means it lacks sd control"},
		{numbers{review.MeanTreated: 3, review.SETreated: 1, review.TotalTreated: 40, review.MeanControl: 3, review.TotalControl: 40}, "for means it lacks se control"},
		{numbers{review.Estimate: 3, review.LimitLow: 1}, "for an estimate with its limits it lacks ci high"},
		{numbers{review.Estimate: 3}, "for an estimate with its se it lacks se"},
		{numbers{review.Coefficient: 0.3}, "for a correlation it lacks total"},
		{numbers{review.Items: 3}, "give an estimate with se or both limits"},
	} {
		d := &derivation{row: new(sheet).row("A", "", c.numbers), measure: effect.Unspecified}
		if _, err := d.study(); err == nil || !strings.HasPrefix(err.Error(), "the row has no complete set of numbers: ") || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%v: %v, want %q", c.numbers, err, c.want)
		}
	}
}

// TestBlame: an error about one number is placed at its cell.
func TestBlame(t *testing.T) {
	s := &sheet{}
	s.row("A", "", counts(3, 40, 5, 41))
	s.row("B", "", counts(3, 40.5, 5, 41))
	_, o := runOne(t, s)
	if len(o.Excluded) != 1 || o.Excluded[0].Place.Col != int(review.TotalTreated) || o.Excluded[0].Rule != "F9" || !strings.HasSuffix(o.Excluded[0].Where(), "3, rule F9") {
		t.Errorf("left out: %+v", o.Excluded)
	}
}

// TestUnmatchedFilter: a value of the filter that no row has is noted.
func TestUnmatchedFilter(t *testing.T) {
	for where, want := range map[string]int{"risk of bias is not hihg": 1, "risk of bias is not high": 0, "risk of bias is not blank": 0, "converted is no": 0, "risk of bias is lo or risk of bias is low": 1} {
		s := &sheet{}
		remarked(s.row("A", "", counts(3, 40, 5, 41)), review.RiskOfBias, "low")
		remarked(s.row("B", "", counts(3, 40, 6, 41)), review.RiskOfBias, "high")
		s.Columns = []review.Column{{Header: "Risk of bias", Field: review.RiskOfBias}}
		_, o := runOne(t, s, "where", where)
		got := 0
		for _, note := range o.Notes {
			if strings.Contains(note, "check its spelling") {
				got++
			}
		}
		if got != want || o.Result == nil {
			t.Errorf("%s: %d notes, want %d: %q %s", where, got, want, o.Notes, o.Problem)
		}
	}
}
