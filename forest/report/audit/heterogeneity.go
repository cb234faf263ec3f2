package audit

import (
	"math"

	"steelyard/forest/words"
)

// heterogeneity writes how the estimates scatter.
func (l *listing) heterogeneity() {
	o, h := l.o, l.o.fit().Heterogeneity
	if o.fit().Mean.K < 2 {
		return
	}
	l.section("Scatter of the estimates")
	if o.fit().Method != "" {
		l.fixed(line{label: "Cochran's Q", source: "Entered: by " + words.Model(o.fit()) + ".", form: decimals6, name: "q"}, h.Q)
		l.fixed(line{label: "τ²", source: "Entered: likewise.", form: decimals6}, o.fit().Mean.Tau2)
		return
	}
	at, w, y := o.cells, o.named("w_common"), o.yName()
	mean := l.put(line{label: "mean with weights 1/v", form: decimals6}, "SUMPRODUCT("+w+","+y+")/SUM("+w+")")
	q := l.put(line{label: "Cochran's Q", source: "Σ(y − mean)²/v.", form: decimals6, name: "q", key: true, want: &h.Q}, "SUMPRODUCT("+w+"*("+y+"-%s)^2)", mean)
	df := l.put(line{label: "degrees of freedom of Q", source: "k − 1.", form: whole}, "%s-1", at["k"])
	if p := math.Exp(h.LnP); p < negligible {
		l.fixed(line{label: "ln p", source: "Entered: p is too small for a spreadsheet.", form: decimals4}, h.LnP)
	} else {
		l.put(line{label: "p", source: "Upper tail of chi-square.", form: small, name: "p_q", want: &p}, "CHIDIST(%s,%s)", q, df)
	}
	l.shareByQ(q, df)
	h2 := h.H2
	l.put(line{label: "H² by Q", source: "Q/(k − 1). Higgins & Thompson 2002.", form: decimals4, name: "h2", want: &h2}, "%s/%s", q, df)
	typical := l.put(line{label: "typical sampling variance", source: "(k−1)Σw/((Σw)² − Σw²), w = 1/v.", form: decimals6, want: &h.Typical}, "%s/(SUM("+w+")-SUMPRODUCT("+w+"^2)/SUM("+w+"))", df)
	tau2 := at["tau2"]
	l.put(line{label: "τ", source: "√τ², from the sheet of the spread.", form: decimals6, name: "tau"}, "SQRT(%s)", tau2)
	l.put(line{label: "I² by τ²", source: "τ²/(τ² + typical variance).", form: percent, name: "i2_tau", want: &h.I2Tau.Value}, "%s/(%s+%s)", tau2, tau2, typical)
	l.profile(typical)
	ln := h.Evidence.Ln()
	l.put(line{label: "ln evidence for unrelated effects over one common effect", source: "Dudbridge 2024, chi-square form: (Q − df(1 + ln 2))/2.", form: decimals4, name: "ln_evidence_q", want: &ln}, "(%s-%s*(1+LN(2)))/2", q, df)
}

// shareByQ writes I² by Q with its limits.
func (l *listing) shareByQ(q, df cell) {
	h, k, level := l.o.fit().Heterogeneity.I2Q, l.o.cells["k"], l.o.cells["level"]
	l.put(line{label: "I² by Q", source: "(Q − (k−1))/Q, not below 0. Higgins & Thompson 2002.", form: percent, name: "i2_q", want: &h.Value}, "MAX(0,(%s-%s)/MAX(%s,%s))", q, df, q, df)
	if l.o.fit().Mean.K < 3 {
		l.fixed(line{label: "its lower limit", form: percent}, h.Low)
		l.fixed(line{label: "its upper limit", form: percent}, h.High)
		return
	}
	se := l.put(line{label: "standard error of ln H", source: "½(ln Q − ln(k−1))/(√(2Q) − √(2k−3)) where Q > k, else √((1 − 1/(3(k−2)²))/(2(k−2))).", form: decimals6},
		"IF(%[1]s>%[2]s,0.5*LN(%[1]s/%[3]s)/(SQRT(2*%[1]s)-SQRT(2*%[2]s-3)),SQRT((1-1/(3*(%[2]s-2)^2))/(2*(%[2]s-2))))", q, k, df)
	for _, limit := range []struct {
		label, sign string
		want        float64
	}{{"its lower limit", "+", h.Low}, {"its upper limit", "-", h.High}} {
		want := limit.want
		l.put(line{label: limit.label, source: "1 − 1/H², H = exp(ln H ± quantile × standard error), not below 0.", form: percent, want: &want},
			"MAX(0,1-1/EXP(0.5*LN(MAX(1,%s/%s))"+limit.sign+"NORMSINV((1-%s)/2)*%s)^2)", q, df, level, se)
	}
}

// profile writes the limits of τ² and of I².
func (l *listing) profile(typical cell) {
	o, h := l.o, l.o.fit().Heterogeneity
	const limitSource = "The τ² at which Q(τ²) is the quantile of chi-square (Viechtbauer 2007). Its steps stand to the right."
	const missSource = "Q(τ²) less the quantile: 0 at a limit, below 0 where the limit is 0."
	for i, text := range [][2]string{{"τ², lower limit of the Q-profile", limitSource}, {"τ², upper limit of the Q-profile", limitSource},
		{"what Q misses its quantile by at the lower limit", missSource}, {"what Q misses its quantile by at the upper limit", missSource}} {
		l.s.text(1, l.row+i, look{role: plain}, text[0])
		l.s.text(4, l.row+i, look{role: soft}, text[1])
	}
	low, high := o.profile(l.s, l.row, o.fit().Tau2)
	l.row += 4
	o.keep("tau2_low", low)
	o.keep("tau2_high", high)
	for _, limit := range []struct {
		label string
		at    cell
		want  float64
	}{{"I² by τ², lower limit", low, h.I2Tau.Low}, {"I² by τ², upper limit", high, h.I2Tau.High}} {
		want := limit.want
		l.put(line{label: limit.label, form: percent, want: &want}, "%s/(%s+%s)", limit.at, limit.at, typical)
	}
}
