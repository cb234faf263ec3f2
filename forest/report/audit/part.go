package audit

import "fmt"

// part is a part of an outcome's studies that a row of formulas pools: which, as a
// condition on each, and how many.
type part struct {
	mask string // "(n_1<>$A5)*", or blank for all
	k    int
	o    *outcome
}

// sum is the sum over the part of a term of the names y and v; {t} in it is τ², {m} a
// mean.
func (p part) sum(term string) string { return "SUMPRODUCT(" + p.mask + term + ")" }

// strip writes one cell after the other along a row, with heads over them.
type strip struct {
	s         *sheet
	col, row  int
	heads     int // row of the heads; 0 for none
	role      role
	mentioned string // put before each head, such as "step 3: "
}

// put writes a formula and its head.
func (t *strip) put(title string, form format, text string, arguments ...any) cell {
	if t.heads > 0 && t.s.get(t.col, t.heads).Text == "" {
		t.s.text(t.col, t.heads, look{role: head}, t.mentioned+title)
	}
	c := t.s.formula(t.col, t.row, look{t.role, form}, text, arguments...)
	t.col++
	return c
}

// y and v are the names of the effects and their variances.
func (o *outcome) yName() string { return o.named("y") }
func (o *outcome) vName() string { return o.named("v") }

// sums are the weighted sums of a part at one τ², with w = 1/(v + τ²).
type sums struct {
	tau2, w, mean       cell
	w2, w3, q, s2, rest cell // Σw², Σw³, Σw(y−mean)², Σw²(y−mean)², Σw³(y−mean)² − (Σw²(y−mean))²/Σw
}

// at writes Σw and the mean at a τ².
func (p part) at(t *strip, tau2 cell) sums {
	y, v := p.o.yName(), p.o.vName()
	u := sums{tau2: tau2}
	u.w = t.put("Σw", general, p.sum("1/(%s+%s)"), v, tau2)
	u.mean = t.put("mean", general, p.sum("%s/(%s+%s)")+"/%s", y, v, tau2, u.w)
	return u
}

// withQ adds Cochran's Q at the τ².
func (p part) withQ(t *strip, u sums) sums {
	u.q = t.put("Q", general, p.sum("(%s-%s)^2/(%s+%s)"), p.o.yName(), u.mean, p.o.vName(), u.tau2)
	return u
}

// withSquares adds Σw² and Σw²(y − mean)².
func (p part) withSquares(t *strip, u sums) sums {
	y, v := p.o.yName(), p.o.vName()
	u.w2 = t.put("Σw²", general, p.sum("1/(%s+%s)^2"), v, u.tau2)
	u.s2 = t.put("Σw²(y−mean)²", general, p.sum("(%s-%s)^2/(%s+%s)^2"), y, u.mean, v, u.tau2)
	return u
}

// withCubes adds Σw³ and what the slope's own slope needs.
func (p part) withCubes(t *strip, u sums) sums {
	y, v := p.o.yName(), p.o.vName()
	u.w3 = t.put("Σw³", general, p.sum("1/(%s+%s)^3"), v, u.tau2)
	u.rest = t.put("Σw³(y−mean)² − (Σw²(y−mean))²/Σw", general,
		p.sum("(%s-%s)^2/(%s+%s)^3")+"-"+p.sum("(%s-%s)/(%s+%s)^2")+"^2/%s",
		y, u.mean, v, u.tau2, y, u.mean, v, u.tau2, u.w)
	return u
}

// df is k − 1 as a formula writes it.
func (p part) df() string { return fmt.Sprint(p.k - 1) }
