package synthesis

import (
	"fmt"
	"math"
	"testing"

	"steelyard/meta/bayes"
	"steelyard/meta/review"
)

// TestIntegrated: the evidence integrated over τ stands beside that of two to five
// studies under random effects, with the prior of the measure's unit
// (half-normal, scale 0.5 for log ratios: METHODS, from Röver et al. 2021).
func TestIntegrated(t *testing.T) {
	build := func(k int) *sheet {
		var s sheet
		for i := range k {
			s.row(string(rune('a'+i)), "", estimate(0.7+0.02*float64(i), 0.15))
		}
		return &s
	}
	for _, c := range []struct {
		k        int
		settings []string
		want     bayes.TauPrior
		none     bool
	}{
		{k: 1, settings: []string{"measure", "risk ratio"}, none: true},
		{k: 2, settings: []string{"measure", "risk ratio"}, want: bayes.TauPrior{Kind: bayes.HalfNormal, Scale: 0.5}},
		{k: 5, settings: []string{"measure", "standardised mean difference"}, want: bayes.TauPrior{Kind: bayes.HalfNormal, Scale: 0.5}},
		{k: 6, settings: []string{"measure", "risk ratio"}, none: true},
		{k: 3, settings: []string{"measure", "risk ratio", "effects", "common"}, none: true},
		{k: 3, settings: []string{"measure", "mean difference"}, want: bayes.TauPrior{Kind: bayes.Uniform}},
		{k: 2, settings: []string{"measure", "mean difference"}, none: true}, // a uniform prior needs three
	} {
		_, o := runOne(t, build(c.k), c.settings...)
		got := o.Result.Integrated
		if (got == nil) != c.none || (got != nil && got.Prior != c.want) {
			t.Errorf("%d studies, %v: %+v, want %+v", c.k, c.settings, got, c.want)
		}
	}
}

// TestIntegratedOverSDs: the prior for mean differences has half the median SD of
// the arms as its scale.
func TestIntegratedOverSDs(t *testing.T) {
	var s sheet
	for i, sd := range []float64{4, 8, 20} {
		s.row(string(rune('a'+i)), "", map[review.Field]float64{
			review.MeanTreated: 10, review.SDTreated: sd, review.TotalTreated: 50,
			review.MeanControl: 12, review.SDControl: sd, review.TotalControl: 50,
		})
	}
	_, o := runOne(t, &s)
	if r := o.Result.Integrated; r == nil || r.Prior.Kind != bayes.HalfNormal || math.Abs(r.Prior.Scale-4) > 1e-12 {
		t.Errorf("%+v, want a half-normal prior of scale 4", r)
	}
}

// TestDifferingStands: effects that differ are weighed for any number of studies
// and either model, but not for one study, nor for two under a uniform prior.
func TestDifferingStands(t *testing.T) {
	for _, c := range []struct {
		k        int
		settings []string
		stands   bool
	}{
		{1, []string{"measure", "risk ratio"}, false},
		{2, []string{"measure", "risk ratio"}, true},
		{2, []string{"measure", "mean difference"}, false},
		{9, []string{"measure", "mean difference"}, true},
		{9, []string{"measure", "risk ratio", "effects", "common"}, true},
		{mostIntegrated + 1, []string{"measure", "risk ratio"}, false},
	} {
		var s sheet
		for i := range c.k {
			s.row(fmt.Sprintf("study %d", i), "", estimate(0.7+0.0002*float64(i), 0.15))
		}
		if _, o := runOne(t, &s, c.settings...); (o.Result.Differing != nil) != c.stands {
			t.Errorf("%d studies, %v: %+v", c.k, c.settings, o.Result.Differing)
		}
	}
}
