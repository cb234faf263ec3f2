package meta

import (
	"math"

	"steelyard/meta/evidence"
	"steelyard/meta/numeric"
)

// Clustered says how a fit allows for several estimates from one study. Its Mean
// rests on Student's t with the degrees of freedom that belong to the way.
type Clustered struct {
	Way      string // "three-level" or "robust"
	Clusters int    // studies
	Largest  int    // most estimates from one study
	Between  float64
	Within   float64 // variances of true effects between and within studies; both 0 unless three-level
}

// StudentMean returns an estimate with its Student-t interval, the test against the
// model's null, and evidence in the model's form; df is above 0. It is how methods
// outside this package make a Mean from an estimate, its standard error and its
// degrees of freedom. Numbers that are not finite are reported by the error.
func (m Model) StudentMean(k int, estimate, se, df float64) (Mean, error) {
	out := Mean{K: k, Estimate: estimate, SE: se, DF: df, Statistic: (estimate - m.Null) / se}
	reach := numeric.StudentCritical(1-m.Level, df) * se
	out.Low, out.High = estimate-reach, estimate+reach
	out.LnP = min(0, math.Ln2+numeric.LogStudentTail(math.Abs(out.Statistic), df))
	out.Evidence = evidence.Matched(out.Statistic, df)
	if m.Evidence == evidence.StudentForm {
		out.Evidence = evidence.Student(out.Statistic, df)
	}
	out.location = evidence.Location{Estimate: estimate, SE: se, DF: df, Form: m.Evidence}
	if !out.finite() {
		return Mean{}, errOutOfRange
	}
	return out, nil
}
