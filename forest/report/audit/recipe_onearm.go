package audit

import (
	"steelyard/meta/effect"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// half is the column of what is added to events where a condition holds.
func half(name, need string, c effect.Correction) derived {
	if c == effect.NoCorrection {
		return derived{name, "Nothing is added to any count.", general, "0"}
	}
	return derived{name, "Cochrane Handbook 10.4.4.2: added only where a count of none leaves no estimate.", general, "IF(" + need + ",0.5,0)"}
}

// rates is the table of studies with events and person time of both arms.
func (o *outcome) rates() recipe {
	const need = "OR({events treated}=0,{events control}=0)"
	c := o.o.Analysis.Correction
	one, other := half("added treated", need, c), half("added control", need, c)
	if c == effect.TreatmentArm {
		one.formula = "IF(" + need + ",{person time treated}/({person time treated}+{person time control}),0)"
		other.formula = "IF(" + need + ",{person time control}/({person time treated}+{person time control}),0)"
	}
	return recipe{
		title:  "From events and person time of both arms",
		inputs: []review.Field{review.EventsTreated, review.PersonTimeTreated, review.EventsControl, review.PersonTimeControl},
		fits:   func(s *synthesis.Study) bool { return s.Basis == synthesis.FromPersonTime && plainSteps(s) },
		steps: withEstimate([]derived{one, other},
			"LN(({events treated}+{added treated})/{person time treated}/(({events control}+{added control})/{person time control}))",
			"SQRT(1/({events treated}+{added treated})+1/({events control}+{added control}))",
			"Cochrane Handbook 6.7.1: ln of the ratio of the rates, variance 1/E₁ + 1/E₂."),
	}
}

// oneArm is the table of studies with events and total of one arm.
func (o *outcome) oneArm() recipe {
	r := recipe{
		title:  "From events and total of one arm",
		inputs: []review.Field{review.Events, review.Total},
		fits:   func(s *synthesis.Study) bool { return s.Basis == synthesis.FromOneArm && plainSteps(s) },
	}
	switch o.o.Analysis.Measure {
	case effect.ArcsineProportion:
		r.steps = withEstimate(nil, "ASIN(SQRT({events}/{total}))", "1/(2*SQRT({total}))", "Freeman & Tukey 1950: arcsine of the root of the proportion, variance 1/(4n).")
	case effect.DoubleArcsineProportion:
		r.steps = withEstimate(nil, "(ASIN(SQRT({events}/({total}+1)))+ASIN(SQRT(({events}+1)/({total}+1))))/2", "1/SQRT(4*{total}+2)",
			"Freeman & Tukey 1950: mean of two arcsines, variance 1/(4n+2).")
	default:
		r.steps = withEstimate([]derived{half("added", "OR({events}=0,{events}={total})", o.o.Analysis.Correction)},
			"LN(({events}+{added})/({total}-{events}+{added}))", "SQRT(1/({events}+{added})+1/({total}-{events}+{added}))",
			"Woolf 1955: logit, variance 1/x + 1/(n−x).")
	}
	return r
}

// oneArmRate is the table of studies with events and person time of one arm.
func (o *outcome) oneArmRate() recipe {
	return recipe{
		title:  "From events and person time of one arm",
		inputs: []review.Field{review.Events, review.PersonTime},
		fits:   func(s *synthesis.Study) bool { return s.Basis == synthesis.FromOneArmTime && plainSteps(s) },
		steps: withEstimate([]derived{half("added", "{events}=0", o.o.Analysis.Correction)},
			"LN(({events}+{added})/{person time})", "1/SQRT({events}+{added})", "Cochrane Handbook 6.7.1: ln of the rate, variance 1/E."),
	}
}

// withSE is the table of studies that report an estimate with its standard error, in
// the reader's unit or on the analysis scale.
func (o *outcome) withSE(readers bool) recipe {
	m := o.o.Analysis.Measure
	r := recipe{title: "From an estimate with its standard error, as reported", inputs: []review.Field{review.Estimate, review.StandardError}}
	estimate := toAnalysis(m, "{estimate reported}")
	if !readers {
		r.title = "From an estimate with its standard error on the analysis scale, as reported"
		r.inputs[0], estimate = review.AnalysisEstimate, "{analysis estimate}"
	}
	r.fits = func(s *synthesis.Study) bool {
		_, has := s.Source.Number(r.inputs[0])
		return s.Basis == synthesis.FromEstimateSE && has && plainSteps(s) && (s.Source.Measure == effect.Unspecified || s.Source.Measure == m)
	}
	r.steps = withEstimate(nil, estimate, "{se reported}", "Cochrane Handbook 6.3: the standard error is that on the analysis scale.")
	return r
}

// plainSteps reports whether nothing was done but to add to a count of none and to
// derive the effect: no adjustment for clusters, no change of measure.
func plainSteps(s *synthesis.Study) bool {
	steps := len(s.Conversions)
	if s.Corrected {
		steps--
	}
	return steps <= 1
}
