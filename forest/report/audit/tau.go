package audit

import (
	"fmt"

	"steelyard/meta"
)

// How many steps the unrolled iterations take. Of 40,000 random sets of 2 to 16
// studies all but 1 in 1,000 needed at most 9 for a likelihood and 8 for Q.
const (
	likelihoodSteps = 12
	qSteps          = 10
)

// spread is a formula's τ² with the cell that says whether its iteration came to rest;
// settled is the zero cell for a closed formula.
type spread struct{ tau2, settled cell }

// tauFormulas returns what writes the estimator's τ² of a part along a row; nil for a
// common effect and a single study, whose τ² is 0.
func tauFormulas(method meta.TauMethod) func(part, *strip) spread {
	switch method {
	case meta.DerSimonianLaird:
		return part.derSimonianLaird
	case meta.TwoStepDerSimonianLaird:
		return part.twoStep
	case meta.HedgesOlkin:
		return part.hedgesOlkin
	case meta.HunterSchmidt:
		return part.hunterSchmidt
	case meta.SidikJonkman:
		return part.sidikJonkman
	case meta.PauleMandel:
		return func(p part, t *strip) spread { return p.whereQ(t, p.df()) }
	case meta.MaximumLikelihood:
		return func(p part, t *strip) spread { return p.climb(t, false) }
	case meta.RestrictedML:
		return func(p part, t *strip) spread { return p.climb(t, true) }
	}
	return nil
}

// zero writes a τ² of 0.
func (t *strip) zero() cell { return t.put("τ²", general, "0") }

// derSimonianLaird writes max(0, (Q − (k−1))/(Σw − Σw²/Σw)) with w = 1/v.
func (p part) derSimonianLaird(t *strip) spread {
	u := p.withSquares(t, p.withQ(t, p.at(t, t.zero())))
	return spread{tau2: t.put("τ²", general, "MAX(0,(%s-"+p.df()+")/(%s-%s/%s))", u.q, u.w, u.w2, u.w)}
}

// twoStep writes the second step from DerSimonian–Laird's τ², with a = 1/(v + τ²).
func (p part) twoStep(t *strip) spread {
	first := p.derSimonianLaird(t)
	u := p.withSquares(t, p.withQ(t, p.at(t, first.tau2)))
	v := p.o.vName()
	av := t.put("Σav", general, p.sum("%s/(%s+%s)"), v, v, first.tau2)
	aav := t.put("Σa²v", general, p.sum("%s/(%s+%s)^2"), v, v, first.tau2)
	return spread{tau2: t.put("τ²", general, "MAX(0,(%s-%s+%s/%s)/(%s-%s/%s))", u.q, av, aav, u.w, u.w, u.w2, u.w)}
}

// scatter writes the plain mean and Σ(y − mean)².
func (p part) scatter(t *strip) cell {
	y := p.o.yName()
	mean := t.put("plain mean", general, p.sum("%s")+"/%s", y, fmt.Sprint(p.k))
	return t.put("Σ(y−mean)²", general, p.sum("(%s-%s)^2"), y, mean)
}

// hedgesOlkin writes max(0, sample variance of y − mean v).
func (p part) hedgesOlkin(t *strip) spread {
	scatter := p.scatter(t)
	return spread{tau2: t.put("τ²", general, "MAX(0,%s/"+p.df()+"-"+p.sum("%s")+"/%s)", scatter, p.o.vName(), fmt.Sprint(p.k))}
}

// hunterSchmidt writes max(0, (Q − k)/Σw) with w = 1/v.
func (p part) hunterSchmidt(t *strip) spread {
	u := p.withQ(t, p.at(t, t.zero()))
	return spread{tau2: t.put("τ²", general, "MAX(0,(%s-%s)/%s)", u.q, fmt.Sprint(p.k), u.w)}
}

// sidikJonkman writes τ₀² Q(τ₀²)/(k−1) with τ₀² = Σ(y − mean)²/k.
func (p part) sidikJonkman(t *strip) spread {
	scatter := p.scatter(t)
	start := t.put("τ₀²", general, "%s/%s", scatter, fmt.Sprint(p.k))
	u := p.withQ(t, p.at(t, start))
	return spread{tau2: t.put("τ²", general, "%s*%s/"+p.df(), start, u.q)}
}

// whereQ writes the τ² at which Q is a target, or 0 where Q(0) is at or below it, by
// Newton's steps on target/Q, which is nearly straight in τ².
func (p part) whereQ(t *strip, target string) spread {
	now := t.zero()
	var before cell
	for i := range qSteps {
		t.mentioned = fmt.Sprintf("step %d: ", i+1)
		u := p.withQ(t, p.at(t, now))
		u.s2 = t.put("Σw²(y−mean)²", general, p.sum("(%s-%s)^2/(%s+%s)^2"), p.o.yName(), u.mean, p.o.vName(), now)
		before, now = now, t.put("next τ²", general, "IF(%s>0,MAX(0,%s+(%s-%s)*%s/(%s*%s)),0)", u.s2, now, u.q, target, u.q, target, u.s2)
	}
	t.mentioned = ""
	return spread{now, p.settled(t, before, now)}
}

// settled writes whether the last step moved τ² by less than one part in 10¹⁰ of it
// and of a typical variance.
func (p part) settled(t *strip, before, now cell) cell {
	return t.put("came to rest", general, "IF(ABS(%s-%s)<=0.0000000001*(%s+1/%s),\"yes\",\"no\")", now, before, now, p.sum("1/"+p.o.vName()))
}

// mostFromBothSides is the largest number of studies for which the rows of refits climb
// the likelihood from both sides: with few studies it has two maxima now and then.
const mostFromBothSides = 25

// climb writes the highest maximum of the (restricted) likelihood: of those reached
// from no spread and from the whole scatter with few studies, else the one reached from
// Hedges–Olkin's τ².
func (p part) climb(t *strip, restricted bool) spread {
	if p.k > mostFromBothSides {
		return p.likelihood(t, restricted, false, "")
	}
	scatter := p.scatter(t)
	below := p.likelihood(t, restricted, false, "0")
	low := p.height(t, restricted, below.tau2)
	above := p.likelihood(t, restricted, true, scatter.local()+"/"+p.df())
	high := p.height(t, restricted, above.tau2)
	best := t.put("τ² of the higher", general, "IF(%s>=%s,%s,%s)", low, high, below.tau2, above.tau2)
	rest := t.put("came to rest", general, "IF(%s>=%s,%s,%s)", low, high, below.settled, above.settled)
	return spread{best, rest}
}

// likelihood writes the maximum of the (restricted) likelihood of τ² by Newton's steps
// on 1 − c/s, with s = Σw²(y−mean)² and c = Σw − Σw²/Σw (restricted; else c = Σw), which
// is 0 at a maximum and straight where all studies are equally precise; by Fisher's
// scoring where that does not fall. start is a formula; blank for Hedges–Olkin's τ².
// From above no step may take more than seven eighths of τ², so that it does not leap
// over a maximum to 0, which the climb from 0 finds if it is the highest.
func (p part) likelihood(t *strip, restricted, fromAbove bool, start string) spread {
	var now cell
	if start == "" {
		now = p.hedgesOlkin(t).tau2
	} else {
		now = t.put("start", general, start)
	}
	var before cell
	for i := range likelihoodSteps {
		t.mentioned = fmt.Sprintf("step %d: ", i+1)
		u := p.withCubes(t, p.withSquares(t, p.at(t, now)))
		c, slope := u.w, u.w2
		if restricted {
			c = t.put("Σw − Σw²/Σw", general, "%s-%s/%s", u.w, u.w2, u.w)
			slope = t.put("information × 2", general, "%s-2*%s/%s+(%s/%s)^2", u.w2, u.w3, u.w, u.w2, u.w)
		}
		least := "0"
		if fromAbove {
			least = "%[1]s/8"
		}
		next := "MAX(" + least + ",%[1]s+IF(%[2]s*%[3]s<2*%[4]s*%[5]s,-(%[3]s-%[4]s)*%[3]s/(%[2]s*%[3]s-2*%[4]s*%[5]s),(%[3]s-%[4]s)/%[2]s))"
		before, now = now, t.put("next τ²", general, next, now, slope, u.s2, c, u.rest)
	}
	t.mentioned = ""
	return spread{now, p.settled(t, before, now)}
}
