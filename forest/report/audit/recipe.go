package audit

import (
	"fmt"
	"math"
	"strings"

	"steelyard/meta/effect"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// recipe is a table of studies whose effects follow from numbers of one kind. Its
// formulas name the columns in braces.
type recipe struct {
	title  string
	fits   func(*synthesis.Study) bool
	inputs []review.Field
	steps  []derived // the last two are the estimate and its standard error
}

// derived is a column that follows from those before it.
type derived struct {
	name, note string
	form       format
	formula    string
}

// recipes returns the tables that an outcome of a measure may have.
func (o *outcome) recipes() []recipe {
	return []recipe{o.counts(), o.rates(), o.oneArm(), o.oneArmRate(), o.means(),
		o.withSE(true), o.withSE(false), o.reported(true, true), o.reported(true, false), o.reported(false, true), o.reported(false, false)}
}

// counts is the table of studies with a 2×2 table of the people themselves.
func (o *outcome) counts() recipe {
	m := o.o.Analysis.Measure
	correction := o.o.Analysis.Correction
	if o.fit().Method != "" && correction == effect.NoCorrection {
		correction = effect.Half
	}
	steps := corrected(m, correction)
	steps = append(steps,
		derived{"a", "Events of the treated arm, with what is added.", general, "{events treated}+{added treated}"},
		derived{"b", "Treated people without the event, with what is added.", general, "{total treated}-{events treated}+{added treated}"},
		derived{"c", "Events of the control arm, with what is added.", general, "{events control}+{added control}"},
		derived{"d", "Control people without the event, with what is added.", general, "{total control}-{events control}+{added control}"})
	estimate, se := "LN({a}*{d}/({b}*{c}))", "SQRT(1/{a}+1/{b}+1/{c}+1/{d})"
	source := "Cochrane Handbook 6.4.1: ln(ad/bc), variance 1/a + 1/b + 1/c + 1/d."
	switch m {
	case effect.RiskRatio:
		estimate, se = "LN({a}*({c}+{d})/({c}*({a}+{b})))", "SQRT({b}/({a}*({a}+{b}))+{d}/({c}*({c}+{d})))"
		source = "Cochrane Handbook 6.4.1: ln(a/(a+b)) − ln(c/(c+d)), variance b/(a(a+b)) + d/(c(c+d))."
	case effect.RiskDifference:
		estimate = "{events treated}/{total treated}-{events control}/{total control}"
		se = "SQRT({a}*{b}/({a}+{b})^3+{c}*{d}/({c}+{d})^3)"
		source = "Cochrane Handbook 6.4.1: difference of the risks as counted, variance ab/(a+b)³ + cd/(c+d)³."
	case effect.ArcsineDifference:
		estimate = "ASIN(SQRT({a}/({a}+{b})))-ASIN(SQRT({c}/({c}+{d})))"
		se = "SQRT(1/({a}+{b})+1/({c}+{d}))/2"
		source = "Rücker et al. 2009: difference of the arcsines of the roots of the risks, variance 1/(4n₁) + 1/(4n₂)."
	}
	return recipe{
		title:  "From events and totals of both arms",
		inputs: []review.Field{review.EventsTreated, review.TotalTreated, review.EventsControl, review.TotalControl},
		fits: func(s *synthesis.Study) bool {
			return s.Basis == synthesis.FromCounts && s.Table != nil && o.o.Analysis.Method != review.Peto
		},
		steps: withEstimate(steps, estimate, se, source),
	}
}

// corrected returns the columns of what is added to the cells of a table.
func corrected(m effect.Measure, c effect.Correction) []derived {
	need := ""
	switch m {
	case effect.OddsRatio:
		need = "OR({events treated}=0,{events treated}={total treated},{events control}=0,{events control}={total control})"
	case effect.RiskRatio:
		need = "OR({events treated}=0,{events control}=0)"
	case effect.RiskDifference:
		need = "AND(OR({events treated}=0,{events treated}={total treated}),OR({events control}=0,{events control}={total control}))"
	}
	one, other := "0.5", "0.5"
	source := "Cochrane Handbook 10.4.4.2: half added to all four cells, only where a zero cell leaves no estimate."
	if c == effect.TreatmentArm {
		one, other = "{total treated}/({total treated}+{total control})", "{total control}/({total treated}+{total control})"
		source = "Sweeting, Sutton & Lambert 2004: shares of 1 by the arms' sizes, only where a zero cell leaves no estimate."
	}
	if need == "" || c == effect.NoCorrection {
		none := "Nothing is added to any cell."
		return []derived{{"added treated", none, general, "0"}, {"added control", none, general, "0"}}
	}
	return []derived{
		{"added treated", source, general, "IF(" + need + "," + one + ",0)"},
		{"added control", source, general, "IF(" + need + "," + other + ",0)"},
	}
}

// means is the table of studies with mean, standard deviation and people of both arms.
func (o *outcome) means() recipe {
	r := recipe{
		title: "From means and standard deviations of both arms",
		inputs: []review.Field{review.MeanTreated, review.SDTreated, review.TotalTreated,
			review.MeanControl, review.SDControl, review.TotalControl},
		fits: func(s *synthesis.Study) bool { return s.Basis == synthesis.FromMeans && len(s.Conversions) == 1 },
	}
	estimate, se := "{mean treated}-{mean control}", "SQRT({sd treated}^2/{total treated}+{sd control}^2/{total control})"
	source := "Cochrane Handbook 6.5.1: difference of the means, variance sd₁²/n₁ + sd₂²/n₂."
	switch o.o.Analysis.Measure {
	case effect.StandardisedMeanDifference:
		r.steps = []derived{
			{"pooled sd", "Root of the two variances weighted by n − 1.", decimals4, pooledSD},
			{"small-sample factor", "Hedges 1981: J = Γ(m/2)/(√(m/2) Γ((m−1)/2)), m = n₁ + n₂ − 2.", decimals6, smallSample},
		}
		estimate = "{small-sample factor}*({mean treated}-{mean control})/{pooled sd}"
		se = "SQRT(1/{total treated}+1/{total control}+({estimate})^2/(2*({total treated}+{total control}-3.94)))"
		source = "Cochrane Handbook 10.5: g = J(m₁−m₂)/sd, variance N/(n₁n₂) + g²/(2(N−3.94))."
	case effect.RatioOfMeans:
		estimate = "LN({mean treated}/{mean control})"
		se = "SQRT({sd treated}^2/({total treated}*{mean treated}^2)+{sd control}^2/({total control}*{mean control}^2))"
		source = "Hedges, Gurevitch & Curtis 1999: ln m₁ − ln m₂, variance sd₁²/(n₁m₁²) + sd₂²/(n₂m₂²)."
	}
	r.steps = withEstimate(r.steps, estimate, se, source)
	return r
}

const (
	pooledSD    = "SQRT((({total treated}-1)*{sd treated}^2+({total control}-1)*{sd control}^2)/({total treated}+{total control}-2))"
	smallSample = "EXP(GAMMALN(({total treated}+{total control}-2)/2)-GAMMALN(({total treated}+{total control}-3)/2))/SQRT(({total treated}+{total control}-2)/2)"
)

// reported is the table of studies that report an estimate with its limits, in the
// reader's unit or on the analysis scale; leveled is the one of limits with a stated
// level.
func (o *outcome) reported(readers, leveled bool) recipe {
	m := o.o.Analysis.Measure
	r := recipe{title: "From an estimate with its limits, as reported", inputs: []review.Field{review.Estimate, review.LimitLow, review.LimitHigh}}
	estimate, low, high := toAnalysis(m, "{estimate reported}"), toAnalysis(m, "{ci low}"), toAnalysis(m, "{ci high}")
	if !readers {
		r.title = "From an estimate with its limits on the analysis scale, as reported"
		r.inputs = []review.Field{review.AnalysisEstimate, review.AnalysisLow, review.AnalysisHigh}
		estimate, low, high = "{analysis estimate}", "{analysis ci low}", "{analysis ci high}"
	}
	tail := "0.025"
	if leveled {
		r.inputs = append(r.inputs, review.LimitLevel)
		tail = "(1-{ci level})/2"
	}
	r.fits = func(s *synthesis.Study) bool {
		_, stated := s.Source.Number(review.LimitLevel)
		_, has := s.Source.Number(r.inputs[0])
		_, both := s.Source.Number(r.inputs[1])
		return s.Basis == synthesis.FromEstimateLimits && stated == leveled && has && both && !byStudent(s) &&
			(s.Source.Measure == effect.Unspecified || s.Source.Measure == m)
	}
	r.steps = withEstimate(nil, estimate, "("+high+"-"+low+")/(-2*NORMSINV("+tail+"))",
		"Cochrane Handbook 6.3: width of the interval (95% unless stated) on the analysis scale over twice the normal quantile.")
	return r
}

// byStudent reports whether the study's limits were taken as ones of Student's t.
func byStudent(s *synthesis.Study) bool {
	for _, c := range s.Conversions {
		if strings.Contains(c.What, "Student's t") {
			return true
		}
	}
	return false
}

func withEstimate(steps []derived, estimate, se, source string) []derived {
	return append(steps,
		derived{"estimate", "On the analysis scale. " + source, decimals6, estimate},
		derived{"se", "Standard error on the analysis scale. " + source, decimals6, se})
}

// fill puts references into a formula with names in braces. It returns an error that
// names what is missing.
func fill(s *sheet, text string, have map[string]cell) (string, error) {
	var b strings.Builder
	for {
		start := strings.IndexByte(text, '{')
		if start < 0 {
			b.WriteString(text)
			return b.String(), nil
		}
		end := start + strings.IndexByte(text[start:], '}')
		c, ok := have[text[start+1:end]]
		if !ok {
			return "", fmt.Errorf("nothing is called %q", text[start+1:end])
		}
		b.WriteString(text[:start] + c.from(s))
		text = text[end+1:]
	}
}

// same reports whether two numbers are the same to the last digits.
func same(a, b float64) bool {
	return a == b || math.Abs(a-b) <= 1e-12*math.Max(math.Abs(a), math.Abs(b))
}
