package dependence

import (
	"math"

	"steelyard/meta"
	"steelyard/meta/numeric"
)

// Fit pools estimates y with standard errors s of which those with the same number
// in clusters are from one study; the numbers mean nothing else. The result has
// the weights, heterogeneity and caveats that belong to it, no limits of τ² (0 to
// +Inf) and no study-level estimates.
//
// Errors: those of meta.Model.Fit; ErrNoRepeats, ErrOneStudy and ErrCommon.
func Fit(way Way, m meta.Model, y, s []float64, clusters []int) (*meta.Fit, error) {
	if way == Independent {
		return m.Fit(y, s)
	}
	base, err := m.Fit(y, s) // checks the numbers, and gives what does not depend on the way
	if err != nil {
		return nil, err
	}
	groups := grouped(clusters)
	largest := 0
	for _, g := range groups {
		largest = max(largest, len(g))
	}
	switch {
	case largest == 1:
		return nil, ErrNoRepeats
	case len(groups) == 1:
		return nil, ErrOneStudy
	case way == ThreeLevel && base.Model.Effects == meta.CommonEffect:
		return nil, ErrCommon
	}
	base.Clustered = &meta.Clustered{Way: way.String(), Clusters: len(groups), Largest: largest}
	if way == ThreeLevel {
		err = threeLevels(base, y, s, groups)
	} else {
		err = robustly(base, y, s, groups)
	}
	if err != nil {
		return nil, err
	}
	complete(base)
	return base, nil
}

// grouped returns the rows of each cluster, in the order of first rows.
func grouped(clusters []int) [][]int {
	at := map[int]int{}
	var groups [][]int
	for row, c := range clusters {
		i, known := at[c]
		if !known {
			i = len(groups)
			at[c] = i
			groups = append(groups, nil)
		}
		groups[i] = append(groups[i], row)
	}
	return groups
}

// fewDegrees is the number of degrees of freedom below which a robust variance
// gives rough p-values.
//
// Source: Tipton (2015), Psychological Methods 20:375-393.
const fewDegrees = 4

// complete fills in what follows from the mean: the share of τ² in the scatter, the
// prediction on degrees of freedom of the studies, and the caveats.
func complete(f *meta.Fit) {
	studies := f.Clustered.Clusters
	h := &f.Heterogeneity
	share := f.Mean.Tau2 / (f.Mean.Tau2 + h.Typical)
	h.I2Tau = meta.Share{Value: share, Low: 0, High: 1}
	h.H2Tau = (f.Mean.Tau2 + h.Typical) / h.Typical
	f.Tau2 = meta.Limits{Low: 0, High: math.Inf(1)}
	f.Predictors, f.Prediction, f.Caveats = nil, nil, nil
	random := f.Model.Effects == meta.RandomEffects
	if random && studies >= 3 {
		f.Prediction = predicted(f, studies)
	}
	add := func(kind meta.CaveatKind, size float64, when bool) {
		if when {
			f.Caveats = append(f.Caveats, meta.Caveat{Kind: kind, K: studies, Size: size})
		}
	}
	add(meta.FewStudies, 0, random && studies < 5)
	add(meta.FewDegrees, f.Mean.DF, f.Clustered.Way == Robust.String() && f.Mean.DF < fewDegrees)
	add(meta.TauZero, 0, random && f.Mean.Tau2 == 0)
	add(meta.PredictionNeedsThree, 0, random && studies < 3)
	add(meta.PredictionWidened, 0, f.Prediction != nil && f.Prediction.Widened)
}

// predicted returns mean ± t·√(τ² + se²) on studies − 2 degrees of freedom, or − 1
// where that is asked for, τ² being that of one estimate; never inside the interval
// for the mean.
func predicted(f *meta.Fit, studies int) *meta.Prediction {
	p := &meta.Prediction{Method: f.Model.Prediction, DF: float64(studies - 2)}
	if p.Method == meta.PredictionOneLess {
		p.DF++
	} else {
		p.Method = meta.PredictionTwoLess
	}
	reach := numeric.StudentCritical(1-f.Model.Level, p.DF) * math.Hypot(math.Sqrt(f.Mean.Tau2), f.Mean.SE)
	p.Low, p.High = f.Mean.Estimate-reach, f.Mean.Estimate+reach
	if p.Low > f.Mean.Low || p.High < f.Mean.High {
		p.Widened = true
		p.Low, p.High = math.Min(p.Low, f.Mean.Low), math.Max(p.High, f.Mean.High)
	}
	return p
}
