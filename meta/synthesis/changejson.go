package synthesis

import (
	"steelyard/meta/review"
)

// ChangeFormat names the version of the JSON of a change report.
const ChangeFormat = "steelyard-change/1"

// ChangeDocument is the JSON of a change report. Estimates are on the analysis scale,
// weights and other shares are fractions, absolute differences are per 1000 people;
// what does not apply is absent.
type ChangeDocument struct {
	Format     string                  `json:"format"`
	Program    ProgramDocument         `json:"program"`
	Previous   *StateDocument          `json:"previous,omitempty"` // absent for the first state
	Current    StateDocument           `json:"current"`
	Material   bool                    `json:"material"`
	Conclusion string                  `json:"conclusion"`
	Settings   []SettingChangeDocument `json:"settings"`
	Outcomes   []OutcomeChangeDocument `json:"outcomes"`
	Findings   []FindingDocument       `json:"findings"` // of the current state
	Messages   []string                `json:"messages"` // on the ledger and on what was recorded
}

// StateDocument is a state of a living review. One that is not recorded has no number.
type StateDocument struct {
	Number   int                  `json:"number,omitempty"`
	Checksum string               `json:"checksum,omitempty"`
	Recorded string               `json:"recorded,omitempty"`
	Searched string               `json:"searched,omitempty"`
	By       string               `json:"by,omitempty"`
	Note     string               `json:"note,omitempty"`
	Program  string               `json:"program,omitempty"`
	Source   SourceDocument       `json:"source"`
	Results  []StateResult        `json:"results,omitempty"`
	Differs  []RecomputedDocument `json:"computed_differently,omitempty"`
}

// StateResult is the recorded result of an outcome.
type StateResult struct {
	Outcome  string   `json:"outcome"`
	Measure  string   `json:"measure,omitempty"`
	Problem  string   `json:"problem,omitempty"`
	K        int      `json:"k"`
	Estimate *float64 `json:"estimate,omitempty"`
	Low      *float64 `json:"ci_low,omitempty"`
	High     *float64 `json:"ci_high,omitempty"`
	Tau2     *float64 `json:"tau2,omitempty"`
	Ln       *float64 `json:"ln_evidence,omitempty"`
}

// RecomputedDocument is a number that this program computes otherwise than the one
// that recorded it.
type RecomputedDocument struct {
	Outcome  string  `json:"outcome"`
	What     string  `json:"what"`
	Recorded float64 `json:"recorded"`
	Computed float64 `json:"computed"`
}

// SettingChangeDocument is a setting of the plan with another value than before.
type SettingChangeDocument struct {
	Setting string `json:"setting"`
	Outcome string `json:"outcome,omitempty"`
	Before  string `json:"before"`
	After   string `json:"after"`
	Reason  string `json:"reason,omitempty"`
}

// OutcomeChangeDocument is what differs in one outcome.
type OutcomeChangeDocument struct {
	Outcome  string                   `json:"outcome"`
	Previous *OutcomeStateDocument    `json:"previous,omitempty"`
	Current  *OutcomeStateDocument    `json:"current,omitempty"`
	Rows     RowChangesDocument       `json:"rows"`
	Weights  []WeightChangeDocument   `json:"weights"`
	Absolute []AbsoluteChangeDocument `json:"absolute"`
	Guides   []GuideDocument          `json:"guides"`
	Triggers []TriggerDocument        `json:"triggers"`
	Looks    *RepeatedLooksDocument   `json:"repeated_looks,omitempty"`
}

// OutcomeStateDocument is an outcome's result in one state.
type OutcomeStateDocument struct {
	Measure      string              `json:"measure,omitempty"`
	K            int                 `json:"k"`
	Participants int                 `json:"participants,omitempty"`
	Problem      string              `json:"problem,omitempty"`
	Pooled       *PooledDocument     `json:"pooled,omitempty"`
	Tau2         *float64            `json:"tau2,omitempty"`
	Prediction   *PredictionDocument `json:"prediction,omitempty"`
}

// RowChangesDocument is what differs between the rows of two states.
type RowChangesDocument struct {
	New           []string          `json:"new"`
	Removed       []string          `json:"removed"`
	Changed       []CellDocument    `json:"changed"`
	Renamed       []RenamedDocument `json:"renamed"`
	SecondReports []FindingDocument `json:"possible_second_reports"`
}

// CellDocument is a cell that differs.
type CellDocument struct {
	Study  string `json:"study"`
	Column string `json:"column"`
	Cell   string `json:"cell,omitempty"`
	Before string `json:"before"`
	After  string `json:"after"`
	Number bool   `json:"number"`
}

// RenamedDocument is a row of another name than before.
type RenamedDocument struct {
	Study   string `json:"study"`
	Before  string `json:"before"`
	KnownBy string `json:"known_by"` // id or numbers
}

// WeightChangeDocument is a study's share of the weight; absent where not pooled.
type WeightChangeDocument struct {
	Study  string   `json:"study"`
	Before *float64 `json:"before,omitempty"`
	After  *float64 `json:"after,omitempty"`
}

// AbsoluteChangeDocument is what the effect means at a baseline risk.
type AbsoluteChangeDocument struct {
	Name     string            `json:"name,omitempty"`
	Baseline float64           `json:"baseline"`
	Before   *AbsoluteDocument `json:"before,omitempty"`
	After    *AbsoluteDocument `json:"after,omitempty"`
}

// GuideDocument is an input to certainty with the bound that it may cross, absent
// where any change counts.
type GuideDocument struct {
	Name    string   `json:"name"`
	Before  float64  `json:"before"`
	After   float64  `json:"after"`
	Bound   *float64 `json:"bound,omitempty"`
	Crossed bool     `json:"crossed"`
}

// TriggerDocument is a trigger for a full update.
type TriggerDocument struct {
	Trigger   string   `json:"trigger"`
	Title     string   `json:"title"`
	Verdict   string   `json:"verdict"`
	Why       string   `json:"why,omitempty"`
	Threshold string   `json:"threshold,omitempty"`
	From      string   `json:"threshold_from,omitempty"`
	Measured  *float64 `json:"measured,omitempty"`
	Named     []string `json:"named,omitempty"`
}

// RepeatedLooksDocument is what repeated looks show by chance.
type RepeatedLooksDocument struct {
	Times     int                  `json:"times"`
	Looks     int                  `json:"looks"`
	Reached   int                  `json:"steps_reached"`
	Sequences int                  `json:"sequences,omitempty"`
	Why       string               `json:"not_simulated,omitempty"`
	Chances   []LookChanceDocument `json:"chances"`
}

// LookChanceDocument is the chance to reach the steps under no effect.
type LookChanceDocument struct {
	Tau2     float64           `json:"tau2"`
	AnyLook  SimulatedDocument `json:"any_look"`
	LastLook SimulatedDocument `json:"last_look"`
}

// Document returns the change as the parts of its JSON that it knows: those of the
// states and of the program are the caller's.
func (c *Change) Document(version, conclusion string) ChangeDocument {
	d := ChangeDocument{
		Format: ChangeFormat, Program: ProgramDocument{Version: version}, Material: c.Material(), Conclusion: conclusion,
		Settings: []SettingChangeDocument{}, Outcomes: []OutcomeChangeDocument{}, Findings: FindingDocuments(c.Current.Synthesis.Findings), Messages: []string{},
	}
	for _, s := range c.Settings {
		d.Settings = append(d.Settings, SettingChangeDocument{Setting: s.Setting, Outcome: s.Outcome, Before: s.Before.Text, After: s.After.Text, Reason: s.After.Reason})
	}
	for i := range c.Outcomes {
		d.Outcomes = append(d.Outcomes, c.Outcomes[i].document())
	}
	return d
}

func (o *OutcomeChange) document() OutcomeChangeDocument {
	d := OutcomeChangeDocument{
		Outcome: o.Name, Previous: o.Previous.stateDocument(), Current: o.Current.stateDocument(), Rows: o.Rows.document(),
		Weights: []WeightChangeDocument{}, Absolute: []AbsoluteChangeDocument{}, Guides: []GuideDocument{}, Triggers: []TriggerDocument{},
		Looks: o.Looks.document(),
	}
	for _, w := range o.Weights {
		d.Weights = append(d.Weights, WeightChangeDocument{Study: w.Study, Before: pooledShare(w.Before), After: pooledShare(w.After)})
	}
	for _, a := range o.Absolute {
		d.Absolute = append(d.Absolute, AbsoluteChangeDocument{Name: a.Baseline.Name, Baseline: a.Baseline.Risk, Before: absoluteDocument(a.Before), After: absoluteDocument(a.After)})
	}
	for _, g := range o.Guides {
		entry := GuideDocument{Name: g.Name, Before: g.Before, After: g.After, Crossed: g.Crossed}
		if g.Bound > 0 {
			entry.Bound = finite(g.Bound)
		}
		d.Guides = append(d.Guides, entry)
	}
	for _, t := range o.Triggers {
		entry := TriggerDocument{Trigger: t.ID.String(), Title: t.ID.Title(), Verdict: t.Verdict.String(), Why: t.Why, Named: t.Named, Measured: t.After}
		if t.Threshold != nil && t.Threshold.Text != "" {
			entry.Threshold, entry.From = t.Threshold.Text, t.Threshold.From.String()
		}
		d.Triggers = append(d.Triggers, entry)
	}
	return d
}

func pooledShare(share float64) *float64 {
	if share < 0 {
		return nil
	}
	return &share
}

func (o *Outcome) stateDocument() *OutcomeStateDocument {
	if o == nil {
		return nil
	}
	d := &OutcomeStateDocument{K: len(o.Studies), Participants: o.Counts.Participants, Problem: o.Problem}
	if o.Result == nil {
		return d
	}
	pooled := o.pooledDocument(o.Result.Fit)
	d.Measure, d.Pooled, d.Tau2 = o.Analysis.Measure.String(), &pooled, finite(o.Result.Fit.Mean.Tau2)
	if p := o.Result.Fit.Prediction; p != nil {
		d.Prediction = &PredictionDocument{Low: p.Low, High: p.High, DF: finite(p.DF), Method: p.Method.String(), Widened: p.Widened}
	}
	return d
}

func (r *RowChanges) document() RowChangesDocument {
	names := func(rows []*review.Study) []string {
		all := []string{}
		for _, s := range rows {
			all = append(all, s.Name)
		}
		return all
	}
	d := RowChangesDocument{New: names(r.New), Removed: names(r.Removed), Changed: []CellDocument{}, Renamed: []RenamedDocument{}, SecondReports: FindingDocuments(r.SecondReports)}
	for _, row := range r.Changed {
		for _, cell := range row.Cells {
			d.Changed = append(d.Changed, CellDocument{Study: row.Study.Name, Column: cell.Header, Cell: cell.Place.Cell(), Before: cell.Before, After: cell.After, Number: cell.Number})
		}
	}
	for _, row := range r.Renamed {
		by := "numbers"
		if row.ByID {
			by = "id"
		}
		d.Renamed = append(d.Renamed, RenamedDocument{Study: row.Study.Name, Before: row.Before, KnownBy: by})
	}
	return d
}

func (r *RepeatedLooks) document() *RepeatedLooksDocument {
	if r == nil {
		return nil
	}
	d := &RepeatedLooksDocument{Times: r.Times, Looks: r.Looks, Reached: r.Reached, Sequences: r.Sequences, Why: r.Why, Chances: []LookChanceDocument{}}
	for _, c := range r.Chances {
		d.Chances = append(d.Chances, LookChanceDocument{Tau2: c.Tau2, AnyLook: SimulatedDocument(c.AnyLook), LastLook: SimulatedDocument(c.LastLook)})
	}
	return d
}
