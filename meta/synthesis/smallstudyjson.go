package synthesis

import (
	"math"

	"steelyard/meta"
	"steelyard/meta/evidence"
)

// SmallStudyDocument says whether small studies show other effects than large ones.
// Refused says why nothing was run; the lists are then absent.
type SmallStudyDocument struct {
	Refused  string              `json:"problem,omitempty"`
	Few      bool                `json:"fewer_than_ten,omitempty"`
	FarOdds  bool                `json:"odds_ratio_far_from_1,omitempty"` // Egger's tests find asymmetry too often
	Spread   float64             `json:"se_ratio"`                        // largest over smallest standard error
	Tables   int                 `json:"studies_with_counts"`
	Step     *float64            `json:"step,omitempty"`
	Above    *int                `json:"studies_above_step,omitempty"`
	Pooled   *MeanDocument       `json:"pooled,omitempty"` // by inverse variances, as what is adjusted
	Tests    []AsymmetryDocument `json:"tests,omitempty"`
	Adjusted []AdjustedDocument  `json:"adjusted,omitempty"`
}

// AsymmetryDocument is a test of asymmetry with the evidence for it over none. A
// regression has a slope, a rank test a correlation, the selection model a χ².
type AsymmetryDocument struct {
	Method     string   `json:"method"`
	Assumption string   `json:"assumption"`
	Source     string   `json:"source"`
	K          int      `json:"k,omitempty"`
	Slope      *float64 `json:"slope,omitempty"`
	SE         *float64 `json:"se,omitempty"`
	Statistic  *float64 `json:"t,omitempty"`
	DF         *float64 `json:"df,omitempty"`
	Kendall    *float64 `json:"rank_correlation,omitempty"`
	Chi2       *float64 `json:"chi2,omitempty"`
	*AsymmetryEvidenceDocument
	Problem string `json:"problem,omitempty"`
}

// AsymmetryEvidenceDocument is what a test says.
type AsymmetryEvidenceDocument struct {
	P   float64 `json:"p"`
	LnP float64 `json:"ln_p"`
	EvidenceDocument
}

// AdjustedDocument is the result under a method's assumption: the mean with its
// interval, of which a side that the data do not limit is absent, and what the
// evidence becomes, absent without a null.
type AdjustedDocument struct {
	Method     string `json:"method"`
	Assumption string `json:"assumption"`
	Source     string `json:"source"`
	*AdjustedMeanDocument
	Missing *int     `json:"missing,omitempty"`
	Side    string   `json:"side,omitempty"`
	Rate    *float64 `json:"relative_rate,omitempty"`
	Square  *bool    `json:"peese,omitempty"`
	Problem string   `json:"problem,omitempty"`
}

// AdjustedMeanDocument holds the numbers of an adjusted result.
type AdjustedMeanDocument struct {
	K        int      `json:"k"`
	Estimate float64  `json:"estimate"`
	SE       float64  `json:"se"`
	DF       *float64 `json:"df,omitempty"`
	Low      *float64 `json:"ci_low,omitempty"`
	High     *float64 `json:"ci_high,omitempty"`
	Tau2     float64  `json:"tau2"`
	*AsymmetryEvidenceDocument
}

func (a *SmallStudy) document(nullMissing bool) *SmallStudyDocument {
	if a == nil {
		return nil
	}
	d := &SmallStudyDocument{Refused: a.Refused, Few: a.Few, FarOdds: a.FarOdds, Spread: a.Spread, Tables: a.Tables}
	if a.Refused != "" {
		return d
	}
	d.Step = &a.Step
	if a.Above > 0 {
		d.Above = &a.Above
	}
	pooled := meanDocument(a.Pooled)
	if nullMissing {
		pooled.TestDocument = nil
	}
	d.Pooled = &pooled
	for _, t := range a.Tests {
		d.Tests = append(d.Tests, t.document())
	}
	for _, r := range a.Adjusted {
		d.Adjusted = append(d.Adjusted, r.document(nullMissing))
	}
	return d
}

func (t *AsymmetryTest) document() AsymmetryDocument {
	d := AsymmetryDocument{Method: t.Method.String(), Assumption: t.Method.Assumption(), Source: t.Method.Source(), K: t.K, Kendall: t.Tau, Chi2: t.Chi2, Problem: t.Problem}
	if t.Slope != nil {
		d.Slope, d.SE, d.Statistic, d.DF = &t.Slope.Estimate, &t.Slope.SE, &t.Slope.Statistic, finite(t.Slope.DF)
	}
	if t.Problem == "" {
		d.AsymmetryEvidenceDocument = weighedDocument(t.LnP, t.Evidence)
	}
	return d
}

func (r *AdjustedResult) document(nullMissing bool) AdjustedDocument {
	d := AdjustedDocument{Method: r.Method.String(), Assumption: r.Method.Assumption(), Source: r.Method.Source(), Missing: r.Missing, Rate: r.Rate, Square: r.Square, Problem: r.Problem}
	if r.Side != nil {
		d.Side = r.Side.String()
	}
	if r.Problem == "" {
		d.AdjustedMeanDocument = adjustedMeanDocument(r.Mean, nullMissing)
	}
	return d
}

func adjustedMeanDocument(m meta.Mean, nullMissing bool) *AdjustedMeanDocument {
	d := &AdjustedMeanDocument{K: m.K, Estimate: m.Estimate, SE: m.SE, DF: finite(m.DF), Low: finite(m.Low), High: finite(m.High), Tau2: m.Tau2}
	if !nullMissing {
		d.AsymmetryEvidenceDocument = weighedDocument(m.LnP, m.Evidence)
	}
	return d
}

func weighedDocument(lnP float64, r evidence.Ratio) *AsymmetryEvidenceDocument {
	return &AsymmetryEvidenceDocument{P: math.Exp(lnP), LnP: lnP, EvidenceDocument: evidenceDocument(r)}
}
