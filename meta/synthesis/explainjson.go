package synthesis

import (
	"math"

	"steelyard/meta"
	"steelyard/meta/evidence"
	"steelyard/meta/explain"
)

// ExplainDocument says why the studies differ. Planned repeats what was stated, so
// that without it the comparisons are to be read as made after results were seen.
type ExplainDocument struct {
	Planned    bool                `json:"planned"`
	Subgroups  *SubgroupsDocument  `json:"subgroups,omitempty"`
	Regression *RegressionDocument `json:"regression,omitempty"`
}

// OmittedDocument is a study that a comparison leaves out, with its blank cells.
type OmittedDocument struct {
	Study string   `json:"study"`
	Cells []string `json:"cells"`
}

// SubgroupsDocument compares groups of studies. Tau is the shared one, absent where
// each group has its own. Without a result Problem says why.
type SubgroupsDocument struct {
	Column    string             `json:"column"`
	SharedTau bool               `json:"shared_tau"`
	Tau       *TauDocument       `json:"tau,omitempty"`
	Groups    []SubgroupDocument `json:"groups"`
	Between   *BetweenDocument   `json:"between,omitempty"`
	Omitted   []OmittedDocument  `json:"omitted,omitempty"`
	Problem   string             `json:"problem,omitempty"`
}

// SubgroupDocument is one group with its result. Against is its effect less that of
// the first group, on the analysis scale.
type SubgroupDocument struct {
	Group   string   `json:"group"`
	K       int      `json:"k"`
	Studies []string `json:"studies"`
	RefitDocument
	PredictionLow  *float64            `json:"prediction_low,omitempty"`
	PredictionHigh *float64            `json:"prediction_high,omitempty"`
	Against        *DifferenceDocument `json:"against_first,omitempty"`
}

// DifferenceDocument is a difference of two effects on the analysis scale.
type DifferenceDocument struct {
	Estimate float64  `json:"estimate"`
	Low      float64  `json:"ci_low"`
	High     float64  `json:"ci_high"`
	DF       *float64 `json:"df,omitempty"`
}

// BetweenDocument is the test between groups: the F that agrees with their
// intervals, and Q by the model's own standard errors.
type BetweenDocument struct {
	FDocument
	Q   float64 `json:"q"`
	QDF int     `json:"q_df"`
	PQ  float64 `json:"q_p"`
	LnQ float64 `json:"q_ln_p"`
}

// FDocument is an F with its evidence, for coefficients or groups that differ over
// none. DF2 is absent where df1·f is chi-square.
type FDocument struct {
	F   float64  `json:"f"`
	DF1 float64  `json:"df1"`
	DF2 *float64 `json:"df2,omitempty"`
	P   float64  `json:"p"`
	LnP float64  `json:"ln_p"`
	EvidenceDocument
}

// RegressionDocument is a meta-regression. Coefficients are per unit of their
// column, the intercept the effect with numbers at their means and categories at
// their references. Without a result Problem says why.
type RegressionDocument struct {
	K            int                   `json:"k"`
	Methods      *RegressionMethods    `json:"methods,omitempty"`
	Covariates   []CovariateDocument   `json:"covariates,omitempty"`
	Coefficients []CoefficientDocument `json:"coefficients"`
	Terms        []TermDocument        `json:"terms,omitempty"`
	Whole        *TermDocument         `json:"all_covariates,omitempty"`
	Residual     *ResidualDocument     `json:"residual,omitempty"`
	Permutation  *PermutationDocument  `json:"permutation,omitempty"`
	Fitted       []FittedStudyDocument `json:"fitted,omitempty"`
	At           *FittedDocument       `json:"at,omitempty"`
	Omitted      []OmittedDocument     `json:"omitted,omitempty"`
	Problem      string                `json:"problem,omitempty"`
}

// RegressionMethods are the methods really used. DF is of t and F.
type RegressionMethods struct {
	Effects  string   `json:"effects"`
	Tau      string   `json:"tau,omitempty"`
	Interval string   `json:"interval"`
	Level    float64  `json:"level"`
	Evidence string   `json:"evidence"`
	DF       *float64 `json:"df,omitempty"`
}

// CovariateDocument says how a column was taken: numbers by where they are centred,
// categories by their reference and the others.
type CovariateDocument struct {
	Column     string   `json:"column"`
	Centre     *float64 `json:"centre,omitempty"`
	Reference  string   `json:"reference,omitempty"`
	Categories []string `json:"categories,omitempty"`
}

// CoefficientDocument is a coefficient on the analysis scale. The intercept has a
// test and evidence only where there is a null.
type CoefficientDocument struct {
	Name     string  `json:"name"`
	Estimate float64 `json:"estimate"`
	SE       float64 `json:"se"`
	*TestDocument
	DF   *float64 `json:"df,omitempty"`
	Low  float64  `json:"ci_low"`
	High float64  `json:"ci_high"`
	*EvidenceDocument
}

// TermDocument is the test of a term.
type TermDocument struct {
	Term string `json:"term"`
	FDocument
	PermutedP *float64 `json:"p_permuted,omitempty"`
}

// ResidualDocument says how the studies scatter about the regression. R2 is the share
// of the variance between studies without covariates that these take away.
type ResidualDocument struct {
	Q           float64      `json:"q"`
	DF          int          `json:"df"`
	P           float64      `json:"p"`
	Tau         *TauDocument `json:"tau,omitempty"`
	I2Q         float64      `json:"i2_q"`
	I2Tau       *float64     `json:"i2_tau,omitempty"`
	Tau2Without *float64     `json:"tau2_without_covariates,omitempty"`
	R2          *float64     `json:"r2,omitempty"`
	EvidenceDocument
}

// PermutationDocument says how a permutation test was done.
type PermutationDocument struct {
	Count int  `json:"count"`
	Exact bool `json:"exact"`
}

// FittedDocument is what the regression expects at some covariates.
type FittedDocument struct {
	Estimate       float64  `json:"estimate"`
	SE             float64  `json:"se"`
	Low            float64  `json:"ci_low"`
	High           float64  `json:"ci_high"`
	PredictionLow  *float64 `json:"prediction_low,omitempty"`
	PredictionHigh *float64 `json:"prediction_high,omitempty"`
}

// FittedStudyDocument is what the regression expects at a study's covariates.
type FittedStudyDocument struct {
	Study string `json:"study"`
	FittedDocument
}

func (o *Outcome) explainDocument() *ExplainDocument {
	e := o.Explain
	if e == nil {
		return nil
	}
	d := &ExplainDocument{Planned: e.Planned}
	if e.Subgroups != nil {
		d.Subgroups = o.subgroupsDocument(e.Subgroups)
	}
	if e.Regression != nil {
		d.Regression = o.regressionDocument(e.Regression)
	}
	return d
}

func (o *Outcome) omittedDocuments(omitted []Omitted) []OmittedDocument {
	var all []OmittedDocument
	for _, m := range omitted {
		all = append(all, OmittedDocument{Study: o.Studies[m.Row].Source.Name, Cells: m.Cells})
	}
	return all
}

func (o *Outcome) subgroupsDocument(r *SubgroupsResult) *SubgroupsDocument {
	d := &SubgroupsDocument{Column: r.Column, Groups: []SubgroupDocument{}, Omitted: o.omittedDocuments(r.Omitted), Problem: r.Problem}
	if r.Subgroups == nil {
		return d
	}
	if d.SharedTau = r.Shared; r.Shared {
		d.Tau = &TauDocument{Tau2: r.Tau2, Low: r.Limits.Low, High: finite(r.Limits.High)}
	}
	for _, g := range r.Groups {
		group := SubgroupDocument{Group: g.Name, K: g.Mean.K, Studies: o.names(g.Rows), RefitDocument: *o.refitDocument(g.Mean)}
		if g.Fit != nil && g.Fit.Prediction != nil {
			group.PredictionLow, group.PredictionHigh = &g.Fit.Prediction.Low, &g.Fit.Prediction.High
		}
		if a := g.Against; a != nil {
			group.Against = &DifferenceDocument{Estimate: a.Estimate, Low: a.Low, High: a.High, DF: finite(a.DF)}
		}
		d.Groups = append(d.Groups, group)
	}
	t := r.Test
	d.Between = &BetweenDocument{
		FDocument: fDocument(t.F, t.DF1, t.DF2, t.LnP, t.Evidence),
		Q:         t.Q, QDF: int(t.DF1), PQ: math.Exp(t.LnPQ), LnQ: t.LnPQ,
	}
	return d
}

func fDocument(f, df1, df2, lnP float64, r evidence.Ratio) FDocument {
	return FDocument{F: f, DF1: df1, DF2: finite(df2), P: math.Exp(lnP), LnP: lnP, EvidenceDocument: evidenceDocument(r)}
}

func (o *Outcome) regressionDocument(r *RegressionResult) *RegressionDocument {
	d := &RegressionDocument{K: len(r.Rows), Coefficients: []CoefficientDocument{}, Omitted: o.omittedDocuments(r.Omitted), Problem: r.Problem}
	if r.Regression == nil {
		return d
	}
	m := r.Model
	d.Methods = &RegressionMethods{Effects: m.Effects.String(), Interval: m.Interval.String(), Level: m.Level, Evidence: m.Evidence.String(), DF: finite(r.Whole.DF2)}
	if m.Effects == meta.RandomEffects {
		d.Methods.Tau = m.Tau.String()
	}
	for _, c := range r.Design.Covariates {
		d.Covariates = append(d.Covariates, covariateDocument(c))
	}
	for i, c := range r.Coefficients {
		entry := CoefficientDocument{Name: c.Name, Estimate: c.Estimate, SE: c.SE, DF: finite(c.DF), Low: c.Low, High: c.High}
		if i > 0 || !o.Analysis.NullMissing {
			weighed := evidenceDocument(c.Evidence)
			entry.TestDocument, entry.EvidenceDocument = &TestDocument{Statistic: c.Statistic, P: math.Exp(c.LnP), LnP: c.LnP}, &weighed
		}
		d.Coefficients = append(d.Coefficients, entry)
	}
	for _, t := range r.Terms {
		d.Terms = append(d.Terms, r.termDocument(t))
	}
	whole := r.termDocument(r.Whole)
	d.Whole = &whole
	d.Residual = r.residualDocument()
	if p := r.Permutation; p != nil {
		d.Permutation = &PermutationDocument{Count: p.Count, Exact: p.Exact}
	}
	for i, f := range r.Fitted {
		d.Fitted = append(d.Fitted, FittedStudyDocument{o.Studies[r.Rows[i]].Source.Name, fittedDocument(f)})
	}
	if r.At != nil {
		at := fittedDocument(*r.At)
		d.At = &at
	}
	return d
}

func covariateDocument(c *explain.Covariate) CovariateDocument {
	d := CovariateDocument{Column: c.Name}
	if c.Levels == nil {
		d.Centre = &c.Mean
		return d
	}
	d.Reference, d.Categories = c.Levels[0], c.Levels[1:]
	return d
}

func (r *RegressionResult) termDocument(t explain.Test) TermDocument {
	d := TermDocument{Term: t.Name, FDocument: fDocument(t.F, t.DF1, t.DF2, t.LnP, t.Evidence)}
	if r.Permutation != nil {
		d.PermutedP = &t.PermutedP
	}
	return d
}

func (r *RegressionResult) residualDocument() *ResidualDocument {
	d := &ResidualDocument{Q: r.Residual.Q, DF: r.Residual.DF, P: math.Exp(r.Residual.LnP), I2Q: r.Residual.I2Q, R2: r.R2, EvidenceDocument: evidenceDocument(r.Residual.Evidence)}
	if r.Model.Effects == meta.RandomEffects {
		d.Tau = &TauDocument{Tau2: r.Residual.Tau2, Low: r.Residual.Limits.Low, High: finite(r.Residual.Limits.High)}
		d.I2Tau, d.Tau2Without = &r.Residual.I2Tau, &r.Without
	}
	return d
}

func fittedDocument(f explain.Fitted) FittedDocument {
	d := FittedDocument{Estimate: f.Estimate, SE: f.SE, Low: f.Low, High: f.High}
	if p := f.Prediction; p != nil {
		d.PredictionLow, d.PredictionHigh = &p.Low, &p.High
	}
	return d
}
