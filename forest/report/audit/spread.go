package audit

import (
	"steelyard/forest/words"
	"steelyard/meta"
)

// estimators are those that the sheet of the spread writes out whatever the model.
var estimators = []meta.TauMethod{meta.RestrictedML, meta.PauleMandel, meta.DerSimonianLaird}

// writeSpread writes the estimators of τ² with their steps, and returns the one that
// the model uses; without a live form the program's own.
func (o *outcome) writeSpread() cell {
	model := o.fit().Model
	s := o.open("spread", "Spread between studies, τ²", "each estimator from the effects and their variances; the model's own is tinted. The steps are written out below.")
	for i, h := range []string{"estimator", "τ²", "τ", "came to rest", "its equation misses by", "what that is"} {
		s.text(i+1, 4, look{role: []role{headText, head, head, head, head, headSoft}[i]}, h)
	}
	list := estimators
	if own := model.Tau; own != meta.DefaultTau && own != meta.RestrictedML && own != meta.PauleMandel && own != meta.DerSimonianLaird {
		list = append([]meta.TauMethod{own}, list...)
	}
	used := cell{}
	row, steps := 5, 5+len(list)+6
	for _, method := range list {
		if len(o.o.Studies) < 2 {
			break
		}
		found := o.solve(s, &steps, method)
		s.text(1, row, look{role: plain}, words.TauMethod(method))
		if method == model.Tau && o.moves() && !o.common() {
			used, _ = s.key(2, row, decimals6, o.fit().Mean.Tau2, "%s", found.tau2)
		} else {
			s.formula(2, row, look{computed, decimals6}, "%s", found.tau2)
		}
		s.formula(3, row, look{computed, decimals4}, "SQRT(%s)", s.at(2, row))
		o.verify(s, row, method, found)
		row++
	}
	if o.common() {
		s.text(1, row, look{role: plain}, "as the model has it: no spread")
		used = s.number(2, row, look{result, decimals6}, 0)
		row++
	} else if used.sheet == nil {
		s.text(1, row, look{role: plain}, "of the model, by the program")
		used = s.entered(2, row, decimals6, o.fit().Mean.Tau2)
		row++
	}
	if model.Tau != meta.DefaultTau && used.sheet != nil {
		s.text(1, row, look{role: plain}, "the program's τ², as it was when this workbook was written")
		s.entered(2, row, decimals6, o.fit().Mean.Tau2)
	}
	o.keep("tau2", used)
	s.finish(page{widths: []float64{48, 13, 13, 13, 13, 46}, rest: 14, frozen: s.at(2, 5), repeated: 2, columns: 6, last: 5 + len(list) + 4})
	return used
}

// solve writes an estimator's steps and returns what they end in. A likelihood is
// climbed from both sides, as it may have two maxima, and the higher one taken.
func (o *outcome) solve(s *sheet, row *int, method meta.TauMethod) spread {
	s.text(1, *row, look{role: section}, words.TauMethod(method)+", written out")
	if method != meta.RestrictedML && method != meta.MaximumLikelihood {
		t := &strip{s: s, col: 2, row: *row + 2, heads: *row + 1}
		t.role = computed
		found := tauFormulas(method)(o.all(), t)
		*row += 4
		return found
	}
	p, restricted := o.all(), method == meta.RestrictedML
	var found [2]spread
	var height [2]cell
	for i, start := range []string{"0", p.sum("("+o.yName()+"-SUM("+o.yName()+")/"+o.cells["k"].from(s)+")^2") + "/" + p.df()} {
		t := &strip{s: s, col: 2, row: *row + 2 + i, heads: *row + 1, role: computed}
		s.text(1, t.row, look{role: soft}, []string{"from no spread upwards", "from the whole scatter downwards"}[i])
		found[i] = p.likelihood(t, restricted, i == 1, start)
		height[i] = p.height(t, restricted, found[i].tau2)
	}
	t := &strip{s: s, col: 2, row: *row + 4, role: computed}
	s.text(1, t.row, look{role: soft}, "the higher of the two")
	best := t.put("τ²", general, "IF(%s>=%s,%s,%s)", height[0], height[1], found[0].tau2, found[1].tau2)
	rest := t.put("came to rest", general, "IF(%s>=%s,%s,%s)", height[0], height[1], found[0].settled, found[1].settled)
	*row += 6
	return spread{best, rest}
}

// height writes the log-likelihood at a τ², but for its constant.
func (p part) height(t *strip, restricted bool, tau2 cell) cell {
	u := p.withQ(t, p.at(t, tau2))
	last := ""
	if restricted {
		last = "+LN(" + u.w.local() + ")"
	}
	return t.put("log-likelihood", general, "-("+p.sum("LN(%s+%s)")+"+%s"+last+")/2", p.o.vName(), tau2, u.q)
}

// verify writes how far an estimator's value is from solving its equation.
func (o *outcome) verify(s *sheet, row int, method meta.TauMethod, found spread) {
	if found.settled.sheet == nil {
		s.text(4, row, look{role: index}, "closed")
		return
	}
	s.formula(4, row, look{role: index}, "%s", found.settled)
	p, at := o.all(), s.at(2, row)
	y, v := o.yName(), o.vName()
	mean := p.sum("%[1]s/(%[2]s+%[3]s)") + "/" + p.sum("1/(%[2]s+%[3]s)")
	if method == meta.PauleMandel {
		s.formula(5, row, look{computed, small}, p.sum("(%[1]s-"+mean+")^2/(%[2]s+%[3]s)")+"-"+p.df(), y, v, at)
		s.text(6, row, look{role: soft}, "Q(τ²) − (k − 1); below 0 where τ² is 0")
		return
	}
	weight, said := p.sum("1/(%[2]s+%[3]s)"), "Σw²(y−mean)²/Σw − 1; below 0 where τ² is 0"
	if method == meta.RestrictedML {
		weight = "(" + weight + "-" + p.sum("1/(%[2]s+%[3]s)^2") + "/" + p.sum("1/(%[2]s+%[3]s)") + ")"
		said = "Σw²(y−mean)²/(Σw − Σw²/Σw) − 1; below 0 where τ² is 0"
	}
	s.formula(5, row, look{computed, small}, p.sum("(%[1]s-"+mean+")^2/(%[2]s+%[3]s)^2")+"/"+weight+"-1", y, v, at)
	s.text(6, row, look{role: soft}, said)
}

// profile writes the limits of τ² that Q has at the quantiles of chi-square, and under
// them what Q misses them by.
func (o *outcome) profile(s *sheet, row int, want meta.Limits) (low, high cell) {
	p := o.all()
	level := o.cells["level"].from(s)
	for i, tail := range []string{"(1-" + level + ")/2", "1-(1-" + level + ")/2"} {
		t := &strip{s: s, col: 8, row: row + i, heads: row - 1, role: computed}
		target := t.put("quantile of chi-square", general, "CHIINV("+tail+","+p.df()+")")
		found := p.whereQ(t, target.local())
		wanted := []float64{want.Low, want.High}[i]
		limit, _ := s.key(2, row+i, decimals6, wanted, "%s", found.tau2)
		y, v := o.yName(), o.vName()
		mean := p.sum("%[1]s/(%[2]s+%[3]s)") + "/" + p.sum("1/(%[2]s+%[3]s)")
		s.formula(2, row+2+i, look{computed, small}, p.sum("(%[1]s-"+mean+")^2/(%[2]s+%[3]s)")+"-%[4]s", y, v, limit, target)
		if i == 0 {
			low = limit
		} else {
			high = limit
		}
	}
	return low, high
}
