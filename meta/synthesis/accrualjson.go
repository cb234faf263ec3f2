package synthesis

import (
	"strings"

	"steelyard/meta"
)

// AccrualDocument says how the evidence came about; its parts stand in the
// outcome itself and are absent unless asked for.
type AccrualDocument struct {
	Order       *OrderDocument      `json:"order,omitempty"`
	Cumulative  []EntryDocument     `json:"cumulative,omitempty"`
	Looks       *LooksDocument      `json:"repeated_looks,omitempty"`
	LeaveOneOut []OmissionDocument  `json:"leave_one_out,omitempty"`
	Tipping     *TippingDocument    `json:"tipping_set,omitempty"`
	Influence   []InfluenceDocument `json:"influence,omitempty"`
	Subsets     *SubsetsDocument    `json:"subsets,omitempty"`
	Next        *NextDocument       `json:"next_trial,omitempty"`
}

// OrderDocument says by what the studies enter: "date", "file" or a column.
type OrderDocument struct {
	By   string `json:"by"`
	Ties string `json:"ties"`
}

// RefitDocument is the result for some of the studies. DF is absent for a normal
// statistic, the evidence where nothing is weighed.
type RefitDocument struct {
	Estimate float64  `json:"estimate"`
	SE       float64  `json:"se"`
	DF       *float64 `json:"df,omitempty"`
	Low      float64  `json:"ci_low"`
	High     float64  `json:"ci_high"`
	Tau2     float64  `json:"tau2"`
	Q        float64  `json:"q"`
	*EvidenceDocument
}

// EntryDocument is a step of the cumulative analysis; Study joins the names of
// those that entered together. Own marks a step of one study: it is that study's
// effect, not a mean. Without a result the numbers are absent and Problem says
// why.
type EntryDocument struct {
	Study   string   `json:"study"`
	Studies []string `json:"studies"`
	Date    string   `json:"date,omitempty"`
	At      string   `json:"at,omitempty"`
	K       int      `json:"k"`
	Own     bool     `json:"own_effect,omitempty"`
	*RefitDocument
	PredictionLow  *float64            `json:"prediction_low,omitempty"`
	PredictionHigh *float64            `json:"prediction_high,omitempty"`
	Added          *float64            `json:"added_steps,omitempty"`
	Posterior      []PosteriorDocument `json:"posterior,omitempty"`
	Problem        string              `json:"problem,omitempty"`
}

// OmissionDocument is the result without one study.
type OmissionDocument struct {
	Omitted string `json:"omitted"`
	*RefitDocument
	Carried *float64 `json:"carried_steps,omitempty"`
	Problem string   `json:"problem,omitempty"`
}

// TippingDocument is the tipping set: the fewest studies whose removal brings the
// evidence for an effect under a number of steps, with the result for the rest.
// Remove is empty where the evidence is under it already; where no set does it,
// Found is false and the result that of all studies.
type TippingDocument struct {
	Below  float64  `json:"below"`
	Found  bool     `json:"found"`
	Exact  bool     `json:"exact"`
	Remove []string `json:"remove"`
	Ways   int      `json:"ways,omitempty"`
	K      int      `json:"k"`
	*RefitDocument
}

// InfluenceDocument is what one study does to the result; the estimate and what
// belongs to it are those without it.
type InfluenceDocument struct {
	OmissionDocument
	Pull *float64 `json:"pull,omitempty"`
	*DetailDocument
}

// DetailDocument holds the measures of influence that rest on estimates and
// standard errors.
type DetailDocument struct {
	Leverage        float64 `json:"leverage"`
	Residual        float64 `json:"studentised_deleted_residual"`
	Shift           float64 `json:"fitted_value_shift"`
	Cook            float64 `json:"cooks_distance"`
	CovarianceRatio float64 `json:"covariance_ratio"`
	QShare          float64 `json:"q_contribution"`
	CommonShift     float64 `json:"common_effect_shift"`
}

// SubsetsDocument summarises the results over all subsets of the studies, or a
// sample of them. The grids of the chart are left out.
type SubsetsDocument struct {
	K              int                 `json:"k"`
	Count          int                 `json:"count"`
	Every          bool                `json:"every"`
	Failed         int                 `json:"failed,omitempty"`
	Estimate       SpreadDocument      `json:"estimate"`
	Steps          SpreadDocument      `json:"steps"`
	BelowNull      float64             `json:"below_null"`
	AboveNull      float64             `json:"above_null"`
	BelowImportant *float64            `json:"below_important,omitempty"`
	AboveImportant *float64            `json:"above_important,omitempty"`
	Words          []WordShareDocument `json:"words"`
}

// SpreadDocument is a distribution over subsets; a Resolution above 0 is how far
// a quantile may be off.
type SpreadDocument struct {
	Quantiles  []QuantileDocument `json:"quantiles"`
	Resolution float64            `json:"resolution"`
}

// QuantileDocument is the value that a share P does not exceed.
type QuantileDocument struct {
	P     float64 `json:"p"`
	Value float64 `json:"value"`
}

// WordShareDocument is the share of subsets whose evidence has a word.
type WordShareDocument struct {
	Favours string  `json:"favours"`
	Word    string  `json:"word"`
	Share   float64 `json:"share"`
}

func (o *Outcome) accrualDocument() *AccrualDocument {
	a := o.Accrual
	if a == nil {
		return nil
	}
	d := &AccrualDocument{}
	if a.Cumulative != nil {
		d.Order = &OrderDocument{By: a.Order.By, Ties: a.Order.Ties.String()}
	}
	for _, entry := range a.Cumulative {
		d.Cumulative = append(d.Cumulative, o.entryDocument(entry))
	}
	if a.Looks != nil {
		d.Looks = looksDocument(a.Looks)
	}
	for _, omission := range a.LeaveOneOut {
		d.LeaveOneOut = append(d.LeaveOneOut, o.omissionDocument(omission))
	}
	if t := a.Tipping; t != nil {
		d.Tipping = &TippingDocument{
			Below: t.Below, Found: t.Found, Exact: t.Exact, Remove: o.names(t.Rows), Ways: t.Ways,
			K: t.Mean.K, RefitDocument: o.refitDocument(t.Mean),
		}
	}
	for _, i := range a.Influence {
		influence := InfluenceDocument{OmissionDocument: o.omissionDocument(i.Omission)}
		if i.Problem == nil {
			influence.Pull = &i.Pull
		}
		if i.Detail != nil {
			detail := DetailDocument(*i.Detail)
			influence.DetailDocument = &detail
		}
		d.Influence = append(d.Influence, influence)
	}
	if a.Subsets != nil {
		d.Subsets = subsetsDocument(a.Subsets.Subsets)
	}
	if a.Next != nil {
		d.Next = nextDocument(a.Next)
	}
	return d
}

// names returns the names of studies by their index.
func (o *Outcome) names(rows []int) []string {
	names := []string{}
	for _, row := range rows {
		names = append(names, o.Studies[row].Source.Name)
	}
	return names
}

func (o *Outcome) refitDocument(m meta.Mean) *RefitDocument {
	d := &RefitDocument{
		Estimate: m.Estimate, SE: m.SE, DF: finite(m.DF), Low: m.Low, High: m.High,
		Tau2: m.Tau2, Q: m.Q,
	}
	if !o.Analysis.NullMissing {
		evidence := evidenceDocument(m.Evidence)
		d.EvidenceDocument = &evidence
	}
	return d
}

func (o *Outcome) entryDocument(e Entry) EntryDocument {
	d := EntryDocument{Studies: o.names(e.Entered), At: e.At, K: e.K, Own: e.Alone}
	if !o.Analysis.NullMissing {
		d.Added = e.Added
	}
	d.Study = strings.Join(d.Studies, "; ")
	d.Date = o.commonDate(e.Entered)
	if e.Problem != nil {
		d.Problem = e.Problem.Error()
		return d
	}
	d.RefitDocument = o.refitDocument(e.Mean)
	if p := e.Prediction; p != nil {
		d.PredictionLow, d.PredictionHigh = &p.Low, &p.High
	}
	for _, b := range e.Posterior {
		d.Posterior = append(d.Posterior, PosteriorDocument(b))
	}
	return d
}

// commonDate returns the date of studies that share one, else "".
func (o *Outcome) commonDate(rows []int) string {
	date := o.Studies[rows[0]].Source.Date
	for _, row := range rows {
		if o.Studies[row].Source.Date != date {
			return ""
		}
	}
	return date.String()
}

func (o *Outcome) omissionDocument(omission meta.Omission) OmissionDocument {
	d := OmissionDocument{Omitted: o.Studies[omission.Row].Source.Name}
	if omission.Problem != nil {
		d.Problem = omission.Problem.Error()
		return d
	}
	d.RefitDocument = o.refitDocument(omission.Mean)
	if !o.Analysis.NullMissing {
		d.Carried = &omission.Carried
	}
	return d
}

func subsetsDocument(s *meta.Subsets) *SubsetsDocument {
	d := &SubsetsDocument{
		K: s.K, Count: s.Count, Every: s.Every, Failed: s.Failed,
		Estimate: spreadDocument(s.Estimate), Steps: spreadDocument(s.Steps),
		BelowNull: s.Sides.BelowNull, AboveNull: s.Sides.AboveNull,
		BelowImportant: s.Sides.BelowZone, AboveImportant: s.Sides.AboveZone,
	}
	for _, w := range s.Words {
		d.Words = append(d.Words, WordShareDocument{Favours: w.Favours.String(), Word: w.Word.String(), Share: w.Share})
	}
	return d
}

func spreadDocument(s meta.Spread) SpreadDocument {
	d := SpreadDocument{Quantiles: []QuantileDocument{}, Resolution: s.Resolution}
	for _, q := range s.Quantiles {
		d.Quantiles = append(d.Quantiles, QuantileDocument(q))
	}
	return d
}
