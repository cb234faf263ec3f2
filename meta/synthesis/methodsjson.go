package synthesis

import (
	"math"

	"steelyard/meta"
	"steelyard/meta/review"
	"steelyard/meta/sparse"
)

// MethodsDocument holds the results of all methods for counts side by side, with
// what speaks for and against each. Tables with a zero cell and studies without
// counts, which are in no row, are counted.
type MethodsDocument struct {
	Rows     []MethodDocument  `json:"rows"`
	ZeroCell int               `json:"tables_with_zero_cell"`
	Others   int               `json:"studies_without_counts"`
	Facts    []FactDocument    `json:"facts,omitempty"`
	Verdicts []VerdictDocument `json:"verdicts,omitempty"`
	Problem  string            `json:"problem,omitempty"`
}

// MethodDocument is the result of one method; without one the numbers are absent
// and Problem says why. The correction is that of tables with a zero cell.
type MethodDocument struct {
	Method     string `json:"method"`
	Effects    string `json:"effects"`
	Measure    string `json:"measure"`
	Correction string `json:"correction,omitempty"`
	*MethodResultDocument
	Problem string `json:"problem,omitempty"`
}

// MethodResultDocument holds the numbers of one method.
type MethodResultDocument struct {
	K int `json:"k"`
	MeanDocument
	EvidenceDocument
	Tau2      float64            `json:"tau2"`
	Scattered *ScatteredDocument `json:"heterogeneity,omitempty"`
}

// ScatteredDocument is a test of heterogeneity with its evidence.
type ScatteredDocument struct {
	Statistic string  `json:"statistic"`
	Q         float64 `json:"q"`
	DF        int     `json:"df"`
	P         float64 `json:"p"`
	EvidenceDocument
}

// FactDocument is a fact that decides which methods are apt; an absent value is
// too large for a number.
type FactDocument struct {
	Fact   string   `json:"fact"`
	Value  *float64 `json:"value,omitempty"`
	Limit  float64  `json:"limit"`
	Marked bool     `json:"marked"`
	Text   string   `json:"text"`
	Source string   `json:"source,omitempty"`
}

// VerdictDocument says whether a method is apt for an odds ratio of these counts,
// and which facts speak against it.
type VerdictDocument struct {
	Method  string   `json:"method"`
	Apt     string   `json:"apt"`
	Because []string `json:"because,omitempty"`
}

func (c *Methods) document() *MethodsDocument {
	if c == nil {
		return nil
	}
	d := &MethodsDocument{Rows: []MethodDocument{}, ZeroCell: c.ZeroCell, Others: c.Others, Problem: c.Problem}
	for _, r := range c.Rows {
		entry := MethodDocument{Method: r.Method.String(), Effects: r.Effects.String(), Measure: r.Measure.String(), Correction: r.Correction, Problem: r.Problem}
		if r.Fit != nil {
			entry.MethodResultDocument = methodResultDocument(r.Fit)
		}
		d.Rows = append(d.Rows, entry)
	}
	if c.Advice == nil {
		return d
	}
	for _, f := range c.Advice.Facts {
		d.Facts = append(d.Facts, FactDocument{Fact: f.Kind.String(), Value: finite(f.Value), Limit: f.Limit, Marked: f.Marked, Text: f.Text(), Source: f.Kind.Source()})
	}
	for _, method := range review.MethodNames() {
		m, err := review.ParseMethod(method)
		if err != nil {
			continue
		}
		verdict := c.Verdict(m)
		entry := VerdictDocument{Method: method, Apt: verdict.Apt.String()}
		for _, kind := range verdict.Because {
			entry.Because = append(entry.Because, kind.String())
		}
		d.Verdicts = append(d.Verdicts, entry)
	}
	return d
}

// Verdict returns what the advice, which must be there, says of a method.
func (c *Methods) Verdict(m review.Method) sparse.Verdict {
	if method, isTables := m.Tables(); isTables {
		return c.Advice.Methods[method]
	}
	return c.Advice.InverseVariance
}

func methodResultDocument(fit *meta.Fit) *MethodResultDocument {
	m := fit.Mean
	d := &MethodResultDocument{K: m.K, MeanDocument: meanDocument(m), EvidenceDocument: evidenceDocument(m.Evidence), Tau2: m.Tau2}
	if h := fit.Heterogeneity; h.DF > 0 {
		d.Scattered = &ScatteredDocument{Statistic: scatterName(fit), Q: h.Q, DF: h.DF, P: math.Exp(h.LnP), EvidenceDocument: evidenceDocument(h.Evidence)}
	}
	return d
}

// scatterName names the statistic of a fit's heterogeneity.
func scatterName(fit *meta.Fit) string {
	switch fit.Method {
	case sparse.ConditionalExact.String(), sparse.BinomialNormal.String():
		return sparse.LikelihoodRatio.String()
	}
	return sparse.AboutEstimate.String()
}
