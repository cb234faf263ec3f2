package synthesis

import (
	"steelyard/meta/evidence"
	"steelyard/meta/panel"
)

// PanelDocument is what a guideline panel reads of an outcome. Risks are fractions,
// differences and distances per 1000 where there is a baseline, else in the reader's
// unit; limits of regions are on the analysis scale. No certainty is computed: the
// judgements are the panel's own.
type PanelDocument struct {
	BaselineFrom string              `json:"baseline_from"` // "default", "sheet" or "flag"
	BaselineCell string              `json:"baseline_cell,omitempty"`
	Median       *MedianDocument     `json:"median_control_risk,omitempty"`
	NoAbsolute   string              `json:"no_absolute_effect,omitempty"`
	SD           *SDDocument         `json:"standard_deviation,omitempty"`
	Threshold    *ThresholdDocument  `json:"threshold,omitempty"`
	Rows         []PanelRowDocument  `json:"rows"`
	Domains      DomainsDocument     `json:"domains"`
	Judgements   []JudgementDocument `json:"judgements,omitempty"`
}

// MedianDocument is the median risk, or rate, of the control arms.
type MedianDocument struct {
	Risk    float64 `json:"risk"`
	Studies int     `json:"studies"`
	Used    bool    `json:"used_as_baseline"`
}

// SDDocument is the standard deviation in use.
type SDDocument struct {
	Value  float64 `json:"value"`
	Stated bool    `json:"stated"` // else the median of the control arms
}

// ThresholdDocument is the important difference as it was set.
type ThresholdDocument struct {
	Setting string                  `json:"setting"`
	Value   string                  `json:"value"`
	From    string                  `json:"from"`
	Cell    string                  `json:"cell,omitempty"`
	Date    string                  `json:"date,omitempty"`
	Flags   []ThresholdFlagDocument `json:"flags,omitempty"`
}

// ThresholdFlagDocument says what is known of when a threshold was set.
type ThresholdFlagDocument struct {
	Flag string `json:"flag"`
	Late bool   `json:"after_results"`
	Cell string `json:"cell,omitempty"`
	Date string `json:"date,omitempty"`
	File string `json:"file,omitempty"`
	Was  string `json:"was,omitempty"`
}

// PanelRowDocument is one baseline; an outcome without absolute effects has one row
// without one.
type PanelRowDocument struct {
	Name        string               `json:"name,omitempty"`
	Baseline    float64              `json:"baseline,omitempty"`
	Absolute    *AbsoluteDocument    `json:"absolute,omitempty"`
	Needed      *NeededDocument      `json:"number_needed,omitempty"`
	Null        *BoundaryDocument    `json:"no_effect,omitempty"`
	Zone        *PanelZoneDocument   `json:"important,omitempty"`
	Information *InformationDocument `json:"information_size,omitempty"`
	Trouble     string               `json:"problem,omitempty"`
}

// RangeDocument is a value with its limits.
type RangeDocument struct {
	Value float64 `json:"value"`
	Low   float64 `json:"ci_low"`
	High  float64 `json:"ci_high"`
}

// AbsoluteDocument is the effect at a baseline: the risk with treatment, and the
// difference per 1000, below 0 for fewer.
type AbsoluteDocument struct {
	Treated    RangeDocument `json:"treated_risk"`
	Difference RangeDocument `json:"difference_per_1000"`
	Capped     bool          `json:"stops_at_0_or_1,omitempty"`
}

// NeededDocument is a number needed to treat, unrounded. Where the interval goes
// through infinity the limits are for one event fewer and for one more; else an absent
// limit is infinite.
type NeededDocument struct {
	Value    *float64 `json:"value,omitempty"`
	Fewer    bool     `json:"for_one_fewer"`
	Low      *float64 `json:"low,omitempty"`
	High     *float64 `json:"high,omitempty"`
	Through  bool     `json:"through_infinity"`
	ForFewer *float64 `json:"least_for_one_fewer,omitempty"`
	ForMore  *float64 `json:"least_for_one_more,omitempty"`
}

// PanelZoneDocument is what the data say of the important difference at a baseline. An
// absent limit cannot be reached there.
type PanelZoneDocument struct {
	Low           *float64          `json:"low,omitempty"`
	High          *float64          `json:"high,omitempty"`
	LowPer1000    *float64          `json:"low_per_1000,omitempty"`
	HighPer1000   *float64          `json:"high_per_1000,omitempty"`
	Regions       []RegionDocument  `json:"regions"`
	LnBenefit     *float64          `json:"ln_evidence_benefit_over_trivial,omitempty"`
	LnTrivial     *float64          `json:"ln_evidence_trivial_over_harm,omitempty"`
	LowThreshold  *BoundaryDocument `json:"low_threshold,omitempty"`
	HighThreshold *BoundaryDocument `json:"high_threshold,omitempty"`
	Sides         []int             `json:"studies_below_within_above"`
}

// BoundaryDocument is where the interval lies to a value.
type BoundaryDocument struct {
	At        float64            `json:"at"`
	Crossed   bool               `json:"crossed"`
	Low       float64            `json:"ci_low_distance"`
	High      float64            `json:"ci_high_distance"`
	NullTrial *NullTrialDocument `json:"null_trial,omitempty"`
}

// NullTrialDocument is the smallest trial without any effect that changes whether the
// interval holds the value; where none of up to People does, Found is false.
type NullTrialDocument struct {
	Found  bool    `json:"found"`
	People float64 `json:"people"`
	Low    float64 `json:"ci_low"`
	High   float64 `json:"ci_high"`
}

// InformationDocument is the optimal information size. Risks are absent for means,
// Delta, in standard deviations, for risks.
type InformationDocument struct {
	PerArm    float64  `json:"per_arm"`
	Total     float64  `json:"total"`
	Events    float64  `json:"events,omitempty"`
	From      float64  `json:"risk,omitempty"`
	To        float64  `json:"risk_told_apart,omitempty"`
	Delta     float64  `json:"delta,omitempty"`
	Important bool     `json:"for_important_difference"`
	Reached   *float64 `json:"share_reached,omitempty"`
}

// DomainsDocument holds the numbers beside the domains that the pooled result does not
// have.
type DomainsDocument struct {
	RiskOfBias    []LabelShareDocument `json:"risk_of_bias,omitempty"`
	WithoutHigh   *SubsetDocument      `json:"without_high_risk,omitempty"`
	BelowNull     int                  `json:"estimates_below_null"`
	AboveNull     int                  `json:"estimates_above_null"`
	Apart         int                  `json:"intervals_without_pooled_effect"`
	SizesStated   int                  `json:"studies_with_sizes"`
	Small         int                  `json:"small_studies"`
	SmallWeight   float64              `json:"small_studies_weight"`
	LargestPeople float64              `json:"largest_study_share"`
	Funding       []LabelShareDocument `json:"funding,omitempty"`
	Designs       []LabelShareDocument `json:"designs,omitempty"`
}

// LabelShareDocument is what the studies of one label weigh.
type LabelShareDocument struct {
	Label   string  `json:"label"`
	Studies int     `json:"studies"`
	Weight  float64 `json:"weight"`
}

// JudgementDocument is one rating of the panel, in its own words.
type JudgementDocument struct {
	Domain string `json:"domain"`
	Rating string `json:"rating"`
	Reason string `json:"reason"`
	By     string `json:"by,omitempty"`
	Date   string `json:"date,omitempty"`
	Cell   string `json:"cell"`
}

func (p *Panel) document(o *Outcome) *PanelDocument {
	if p == nil {
		return nil
	}
	d := &PanelDocument{
		BaselineFrom: p.Baselines.From.String(), BaselineCell: p.Baselines.Place.String(), NoAbsolute: p.NoAbsolute,
		Threshold: p.Threshold.document(), Rows: []PanelRowDocument{}, Domains: p.Evidence.document(o.Analysis.NullMissing),
	}
	if p.Median != nil {
		d.Median = &MedianDocument{Risk: p.Median.Risk, Studies: p.Median.Studies, Used: p.Median.Used}
	}
	if p.SD != nil {
		d.SD = &SDDocument{Value: p.SD.Value, Stated: p.SD.Stated != nil}
	}
	for i := range p.Rows {
		d.Rows = append(d.Rows, p.Rows[i].document())
	}
	for _, j := range p.Judgements {
		d.Judgements = append(d.Judgements, JudgementDocument{
			Domain: j.Domain.String(), Rating: j.Rating, Reason: j.Reason, By: j.By, Date: j.Date.String(), Cell: j.Place.String(),
		})
	}
	return d
}

func (t *Threshold) document() *ThresholdDocument {
	if t == nil {
		return nil
	}
	d := &ThresholdDocument{Setting: t.Setting, Value: t.Value.Text, From: t.Value.From.String(), Cell: t.Value.Place.String(), Date: t.Value.Date.String()}
	for _, f := range t.Flags {
		d.Flags = append(d.Flags, ThresholdFlagDocument{
			Flag: f.Kind.String(), Late: f.Kind.Late(), Cell: f.Place.String(), Date: f.Date.String(), File: f.File, Was: f.Was,
		})
	}
	return d
}

func absoluteDocument(a *panel.Absolute) *AbsoluteDocument {
	if a == nil {
		return nil
	}
	return &AbsoluteDocument{
		Treated:    RangeDocument(a.Treated),
		Difference: RangeDocument{Value: 1000 * a.Difference.Value, Low: 1000 * a.Difference.Low, High: 1000 * a.Difference.High},
		Capped:     a.Capped,
	}
}

func (r *PanelRow) document() PanelRowDocument {
	d := PanelRowDocument{Name: r.Baseline.Name, Baseline: r.Baseline.Risk, Null: r.Null.document(), Zone: r.Zone.document(), Trouble: r.Trouble}
	d.Absolute = absoluteDocument(r.Absolute)
	if n := r.Needed; n != nil {
		d.Needed = &NeededDocument{Value: finite(n.Value), Fewer: n.Fewer, Through: n.Through}
		if n.Through {
			d.Needed.ForFewer, d.Needed.ForMore = finite(n.ForFewer), finite(n.ForMore)
		} else {
			d.Needed.Low, d.Needed.High = finite(n.Low), finite(n.High)
		}
	}
	if a := r.Information; a != nil {
		d.Information = &InformationDocument{PerArm: a.PerArm, Total: a.Total(), Events: a.Events, From: a.From, To: a.To, Delta: a.Delta, Important: a.Important}
		if a.People > 0 {
			share := a.Share()
			d.Information.Reached = &share
		}
	}
	return d
}

func (z *PanelZone) document() *PanelZoneDocument {
	if z == nil {
		return nil
	}
	d := &PanelZoneDocument{
		Low: finite(z.Limits.Low), High: finite(z.Limits.High), Regions: []RegionDocument{},
		LnBenefit: lnOf(z.Benefit), LnTrivial: lnOf(z.Harm), LowThreshold: z.Low.document(), HighThreshold: z.High.document(), Sides: z.Sides[:],
	}
	if z.Per1000 != nil {
		if z.Low != nil {
			d.LowPer1000 = &z.Per1000.Low
		}
		if z.High != nil {
			d.HighPer1000 = &z.Per1000.High
		}
	}
	for _, r := range z.Regions {
		d.Regions = append(d.Regions, r.document())
	}
	return d
}

func lnOf(r *evidence.Ratio) *float64 {
	if r == nil {
		return nil
	}
	ln := r.Ln()
	return &ln
}

func (b *Boundary) document() *BoundaryDocument {
	if b == nil {
		return nil
	}
	d := &BoundaryDocument{At: b.At, Crossed: b.Crossed, Low: b.Low, High: b.High}
	if t := b.Trial; t != nil {
		trial := NullTrialDocument(*t)
		d.NullTrial = &trial
	}
	return d
}

func (e *EvidenceMap) document(nullMissing bool) DomainsDocument {
	return DomainsDocument{
		RiskOfBias: shareDocuments(e.RiskOfBias), WithoutHigh: subsetDocument(e.WithoutHigh, nullMissing),
		BelowNull: e.Scatter.Below, AboveNull: e.Scatter.Above, Apart: e.Scatter.Apart,
		SizesStated: e.Small.Counted, Small: e.Small.Below, SmallWeight: e.Small.Weight, LargestPeople: e.Small.Largest,
		Funding: shareDocuments(e.Funding), Designs: shareDocuments(e.Designs),
	}
}

func shareDocuments(shares []LabelShare) []LabelShareDocument {
	var all []LabelShareDocument
	for _, s := range shares {
		all = append(all, LabelShareDocument(s))
	}
	return all
}
