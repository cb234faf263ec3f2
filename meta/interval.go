package meta

import (
	"math"

	"steelyard/meta/evidence"
	"steelyard/meta/numeric"
)

var infinite = math.Inf(1)

// nearNull is the |z| below which the distance to the null says too little to
// divide by.
const nearNull = 1e-6

// wald returns mean ± z·se with evidence in the normal form.
func (p *Pooler) wald() answer {
	m := p.final
	a := answer{estimate: m.mean, se: m.se(), df: infinite}
	a.statistic = (a.estimate - p.null) / a.se
	a.lnP = math.Ln2 + numeric.LogNormalTail(math.Abs(a.statistic))
	a.evidence = evidence.Normal(a.statistic)
	a.locationSE = a.se
	return a.around(p.critical.of(p.model.Level, infinite))
}

// hartungKnapp returns mean ± t·se·√q on k − 1 degrees of freedom, with evidence
// in the matched or the Student-t form. q is Q(τ²)/(k − 1), but at least floor.
//
// Sources: Hartung & Knapp (2001), Statistics in Medicine 20:3875-3889; Sidik &
// Jonkman (2002), Statistics in Medicine 21:3153-3159; floor: Röver, Knapp &
// Friede (2015), BMC Medical Research Methodology 15:99.
func (p *Pooler) hartungKnapp(floor float64) answer {
	if p.final.tau2 > 0 {
		p.data.scatterAbout(&p.final)
	}
	m, df := &p.final, p.data.df()
	q := max(floor, m.q/df)
	a := answer{estimate: m.mean, se: m.se() * math.Sqrt(q), df: df}
	a.statistic = (a.estimate - p.null) / a.se
	lnTail := numeric.LogStudentTail(math.Abs(a.statistic), df)
	a.lnP = math.Ln2 + lnTail
	if p.model.Evidence == evidence.StudentForm {
		a.evidence = evidence.Student(a.statistic, df)
	} else {
		a.evidence = evidence.MatchedTail(lnTail)
	}
	a.locationSE = a.se
	return a.around(p.critical.of(p.model.Level, df))
}

// around returns the answer with the limits estimate ± critical·se.
func (a answer) around(critical float64) answer {
	a.low, a.high = a.estimate-critical*a.se, a.estimate+critical*a.se
	return a
}

// located returns the answer with evidence in the normal form at z and the
// standard error that places the estimate z of them from the null.
func (a answer) located(z, null, level float64) answer {
	a.evidence = evidence.Normal(z)
	if math.Abs(z) > nearNull {
		a.locationSE = (a.estimate - null) / z
	}
	if !(a.locationSE > 0) {
		a.locationSE = (a.high - a.low) / (2 * numeric.NormalCritical(1-level))
	}
	if !(a.locationSE > 0) { // a level so low that the interval has no width
		a.locationSE = a.se
	}
	return a
}
