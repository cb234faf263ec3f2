package missing

import (
	"math"

	"steelyard/meta"
	"steelyard/meta/evidence"
	"steelyard/meta/numeric"
)

// student returns an estimate with its Student-t interval, test against the
// model's null, and evidence in the model's form. It is not finite where the
// standard error is 0 or beyond numbers.
func student(m meta.Model, k int, estimate, se, df float64) meta.Mean {
	out := meta.Mean{K: k, Estimate: estimate, SE: se, DF: df, Statistic: (estimate - m.Null) / se}
	reach := numeric.StudentCritical(1-m.Level, df) * se
	out.Low, out.High = estimate-reach, estimate+reach
	out.LnP = min(0, math.Ln2+numeric.LogStudentTail(math.Abs(out.Statistic), df))
	out.Evidence = evidence.Matched(out.Statistic, df)
	if m.Evidence == evidence.StudentForm {
		out.Evidence = evidence.Student(out.Statistic, df)
	}
	return out.Located(evidence.Location{Estimate: estimate, SE: se, DF: df, Form: m.Evidence})
}

// finite returns the mean, or an error if one of its numbers is none.
func finite(means ...meta.Mean) error {
	for _, m := range means {
		for _, x := range []float64{m.Estimate, m.SE, m.Statistic, m.LnP, m.Low, m.High, m.Tau2, m.Evidence.Ln()} {
			if math.IsNaN(x) || math.IsInf(x, 0) {
				return &InputError{Index: -1, Problem: "the result exceeds the range of numbers: use another unit for the estimates"}
			}
		}
	}
	return nil
}

// againstZero is the model for a slope: its null is no slope.
func againstZero(m meta.Model) meta.Model {
	m.Null = 0
	return m
}
