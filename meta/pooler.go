package meta

import (
	"fmt"
	"math"

	"steelyard/meta/evidence"
)

// Pooler pools many sets of studies one after another in its own scratch space:
// once it has seen a set of the largest size, Pool allocates nothing. The zero
// value is ready. A Pooler must not be used by two goroutines at once.
type Pooler struct {
	data   sample
	model  Model   // as resolved, for the latest set
	null   float64 // in working units
	zero   moments // at τ² = 0
	final  moments // at the τ² used; the sums of squares only if they are needed
	modes  []mode  // of the latest likelihood searched
	height float64 // of the highest of them, where they were compared
	floor  bool    // the Hartung–Knapp floor stood in: all estimates are equal
	answer answer  // about the mean

	critical criticals

	brief   quickModel
	scratch [sumBlock]float64 // of quick
}

// answer is an inference about the mean in working units.
type answer struct {
	estimate, se, statistic, df, lnP, low, high float64
	evidence                                    evidence.Ratio
	locationSE                                  float64 // see Mean.Location
}

// Pool returns the pooled mean effect of the estimates y with standard errors s
// on the analysis scale; neither is modified or kept.
//
// It returns ErrNoStudies for no studies, an *InputError naming the index of an
// estimate that is not finite or a standard error that is not finite and above 0
// (or so large or small that its square is out of range), and a *ModelError for
// settings that do not go together. A nil error guarantees finite numbers; DF
// alone is +Inf for a normal statistic.
func (p *Pooler) Pool(m Model, y, s []float64) (Mean, error) {
	if err := p.prepare(m, y, s); err != nil {
		return Mean{}, err
	}
	var err error
	if p.answer, err = p.infer(); err != nil {
		return Mean{}, err
	}
	mean := p.inGivenUnits(&p.answer)
	if !mean.finite() {
		return Mean{}, errOutOfRange
	}
	return mean, nil
}

// prepare takes the studies in, resolves the model and estimates τ².
func (p *Pooler) prepare(m Model, y, s []float64) error {
	if err := p.data.load(y, s); err != nil {
		return err
	}
	d := &p.data
	var err error
	if p.model, err = m.Resolve(d.k()); err != nil {
		return err
	}
	p.floor = d.equal && p.model.Interval == HartungKnapp
	if p.floor {
		p.model.Interval = HartungKnappFloor
	}
	p.null = (m.Null - d.centre) / d.unit
	if math.Abs(p.null) > widest || math.Abs(m.Null) > largest {
		return &ModelError{Problem: fmt.Sprintf("null %v lies too far from the estimates to be compared with them: correct it", m.Null)}
	}
	p.zero = d.at(0)
	p.final = p.zero
	if p.model.Tau == DefaultTau {
		return nil
	}
	tau2, err := p.estimateTau2(p.model.Tau)
	if err == nil && tau2 > 0 {
		p.final = d.weigh(tau2)
	}
	return err
}

// infer returns the estimate with its interval, statistic and evidence.
func (p *Pooler) infer() (answer, error) {
	switch p.model.Interval {
	case HartungKnapp:
		return p.hartungKnapp(0), nil
	case HartungKnappFloor:
		return p.hartungKnapp(1), nil
	case ProfileLikelihood:
		if p.model.Effects == RandomEffects {
			return p.profile()
		}
	case HenmiCopas:
		return p.henmiCopas()
	}
	return p.wald(), nil
}

// inGivenUnits turns an answer into a Mean in the unit of the estimates.
func (p *Pooler) inGivenUnits(a *answer) Mean {
	d := &p.data
	mean := Mean{
		K:         d.k(),
		Estimate:  d.place(a.estimate),
		SE:        a.se * d.unit,
		Statistic: a.statistic,
		DF:        a.df,
		LnP:       min(0, a.lnP),
		Low:       d.place(a.low),
		High:      d.place(a.high),
		Tau2:      p.tau2() * d.unit * d.unit,
		Q:         p.zero.q,
		Evidence:  a.evidence,
	}
	mean.location = evidence.Location{Estimate: mean.Estimate, SE: a.locationSE * d.unit, DF: a.df, Form: p.model.Evidence}
	return mean
}

// tau2 returns the τ² used, in squared working units.
func (p *Pooler) tau2() float64 { return p.final.tau2 }

// place turns a position in working units into the unit of the estimates.
func (d *sample) place(x float64) float64 { return d.centre + x*d.unit }

// errOutOfRange reports a result that a float64 cannot hold.
var errOutOfRange = &InputError{Index: -1, Problem: "the result exceeds the range of numbers: use another unit for the estimates"}

// finite reports whether every number of the mean but DF is finite.
func (m *Mean) finite() bool {
	return allFinite(m.Estimate, m.SE, m.Statistic, m.LnP, m.Low, m.High, m.Tau2, m.Q, m.Evidence.Ln(), m.location.SE)
}

// allFinite reports whether no number is NaN or infinite.
func allFinite(numbers ...float64) bool {
	for _, x := range numbers {
		if x-x != 0 {
			return false
		}
	}
	return true
}

// Located returns the mean with the location that Location is to return: that of
// a method whose evidence is not taken at (Estimate − Null)/SE.
func (m Mean) Located(l evidence.Location) Mean {
	m.location = l
	return m
}

// Location returns the estimate as evidence about regions needs it. Its standard
// error is the interval's own, so that (Estimate − Null)/SE is the Statistic,
// beside Wald and Hartung–Knapp. Profile likelihood and Henmi–Copas have no
// single standard error: theirs is the one that makes (Estimate − Null)/SE the z
// which the evidence is taken at, or, where the estimate meets the null, the one
// that gives the interval its width.
//
// A Mean filled in by hand is located by its Estimate, SE and DF (0 meaning
// normal), in the empirical form.
func (m Mean) Location() evidence.Location {
	if m.location.SE > 0 {
		return m.location
	}
	df := m.DF
	if df == 0 {
		df = math.Inf(1)
	}
	return evidence.Location{Estimate: m.Estimate, SE: m.SE, DF: df}
}
