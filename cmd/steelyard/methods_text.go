package main

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"steelyard/forest/words"
	"steelyard/meta"
	"steelyard/meta/effect"
	"steelyard/meta/review"
	"steelyard/meta/sparse"
	"steelyard/meta/synthesis"
)

// methods writes the results of all methods side by side, and which are apt.
func (p *page) methods(s *synthesis.Synthesis, o *synthesis.Outcome) {
	c := o.Methods
	if c == nil {
		return
	}
	p.line("")
	if c.Problem != "" {
		p.wrapped("", "No methods to compare: "+c.Problem)
		return
	}
	mixed := slices.ContainsFunc(c.Rows, func(r synthesis.MethodResult) bool { return r.Measure != c.Rows[0].Measure })
	measure := words.Measure(c.Rows[0].Measure)
	p.wrapped("", "All methods for counts, side by side; the result above is by the method chosen before")
	columns := []column{{head: "method"}, {head: "k", right: true}, {head: measure}, {head: "effect : none", right: true},
		{head: "steps", right: true}, {head: "τ", right: true}, {head: "scatter", right: true}}
	var rows [][]string
	var problems []string
	for _, r := range c.Rows {
		name := words.Method(r.Method, r.Effects)
		if r.Correction != "" {
			name += ", " + correctionWords[r.Correction]
		}
		if r.Measure != c.Rows[0].Measure {
			name += " *"
		}
		if r.Fit == nil {
			problems = append(problems, name+": "+r.Problem)
			rows = append(rows, []string{name, "", words.Missing, "", "", "", ""})
			continue
		}
		rows = append(rows, append([]string{name}, methodCells(r)...))
	}
	p.tableNamed(columns, rows, widestMethod, widestMethod)
	if mixed {
		p.item("*", fmt.Sprintf("An odds ratio, which is all that this method gives; it lies further from 1 than a %s where events are common.", measure))
	}
	if c.ZeroCell > 0 {
		p.item("·", fmt.Sprintf("Tables with a zero cell: %d. half, by arm: these corrections (half, treatment-arm) are added to them; dropped: they are left out (none).", c.ZeroCell))
	}
	if c.Others > 0 {
		p.item("·", fmt.Sprintf("%s without events and totals of both arms as counted: in no row of this table.", words.Number(c.Others, words.Noun(s, 1), words.Noun(s, 2))))
	}
	if !o.Analysis.Weighing.Own() {
		p.item("·", fmt.Sprintf("Evidence in this table is in the empirical form for all methods, not %s.", o.Analysis.Weighing.Form))
	}
	p.item("·", "scatter: p-value of the heterogeneity about one common effect.")
	for _, text := range problems {
		p.item("·", text)
	}
	p.advice(c)
}

// correctionWords are short names of the corrections.
var correctionWords = map[string]string{
	effect.Half.String(): "half", effect.TreatmentArm.String(): "by arm", effect.NoCorrection.String(): "dropped",
}

// widestMethod is the width of the longest name of a method with its effects.
const widestMethod = 40

// methodCells are what the table says of a method's result after its name.
func methodCells(r synthesis.MethodResult) []string {
	m := r.Fit.Mean
	notation := words.NotationOf(r.Measure, m.SE)
	reader := func(y float64) float64 { return effect.ToReader(r.Measure, y) }
	tau, scatter := words.Missing, words.Missing
	if r.Effects == meta.RandomEffects {
		tau = words.Tau(math.Sqrt(m.Tau2))
	}
	if h := r.Fit.Heterogeneity; h.DF > 0 {
		scatter = strings.TrimPrefix(strings.TrimPrefix(words.PValue(h.LnP), "p = "), "p ")
	}
	return []string{
		words.Count(m.K), notation.Estimate(reader(m.Estimate), reader(m.Low), reader(m.High)),
		words.Odds(m.Evidence.Ln()), words.Steps(m.Evidence.Steps()), tau, scatter,
	}
}

// aptWords say how well a method suits.
var aptWords = map[sparse.Aptness]string{sparse.Apt: "apt", sparse.WithCare: "with care", sparse.Inapt: "not apt"}

// advice writes which methods are apt for an odds ratio of these counts, and the
// facts that decide it.
func (p *page) advice(c *synthesis.Methods) {
	if c.Advice == nil {
		return
	}
	p.line("")
	p.wrapped("", "Which are apt for an odds ratio of these counts; a method is chosen before results are seen")
	numbers := map[sparse.FactKind]int{}
	var decisive []sparse.FactKind
	for _, name := range review.MethodNames() {
		m, err := review.ParseMethod(name)
		if err != nil {
			continue
		}
		verdict := c.Verdict(m)
		text := aptWords[verdict.Apt]
		var marks []string
		for _, kind := range verdict.Because {
			if numbers[kind] == 0 {
				decisive = append(decisive, kind)
				numbers[kind] = len(decisive)
			}
			marks = append(marks, fmt.Sprint(numbers[kind]))
		}
		if len(marks) > 0 {
			text += ": see " + strings.Join(marks, ", ")
		}
		p.row(name, text)
	}
	for i, kind := range decisive {
		p.fact(fmt.Sprint(i+1), c.Advice.Fact(kind))
	}
	for _, f := range c.Advice.Facts {
		if numbers[f.Kind] == 0 {
			p.fact("·", f)
		}
	}
}

func (p *page) fact(mark string, f sparse.Fact) {
	text := f.Text()
	if source := f.Kind.Source(); source != "" {
		text += " (" + source + ")"
	}
	p.item(mark, text)
}
