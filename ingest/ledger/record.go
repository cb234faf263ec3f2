package ledger

import (
	"encoding/json"
	"fmt"
	"math"

	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// Record is what a line of the ledger says of a state.
type Record struct {
	At       string          `json:"at"`      // when it was recorded: RFC 3339, in UTC
	Program  string          `json:"program"` // version that computed the results
	Searched string          `json:"searched,omitempty"`
	By       string          `json:"by,omitempty"`
	Note     string          `json:"note,omitempty"`
	Joins    []string        `json:"joins,omitempty"` // checksums of the other ends of a fork
	Input    Input           `json:"input"`
	Plan     []PlanEntry     `json:"plan,omitempty"` // what was not left at its default
	Results  []OutcomeRecord `json:"results"`
}

// Input is all that the results were computed from, so that they can be computed
// again.
type Input struct {
	Sheet     Stored  `json:"sheet"`
	Plan      *Stored `json:"plan,omitempty"`      // the plan beside a text file
	Judgement *Stored `json:"judgement,omitempty"` // a panel's judgements beside a text file
	Call      Call    `json:"call"`
}

// files returns the stored files of the input.
func (in *Input) files() []Stored {
	all := []Stored{in.Sheet}
	for _, s := range []*Stored{in.Plan, in.Judgement} {
		if s != nil {
			all = append(all, *s)
		}
	}
	return all
}

// Stored names a file of the folder "sheets".
type Stored struct {
	File   string `json:"file"` // base name under which it was read
	SHA256 string `json:"sha256"`
}

// Call is what the command said beside the files.
type Call struct {
	Sheet    string            `json:"sheet,omitempty"`    // of a workbook
	Columns  map[string]string `json:"columns,omitempty"`  // field to header
	Settings map[string]string `json:"settings,omitempty"` // setting to value
}

// PlanEntry is a setting of the plan.
type PlanEntry struct {
	Setting string `json:"setting"`
	Outcome string `json:"outcome,omitempty"` // blank for all
	Value   string `json:"value"`
	From    string `json:"from"`
	Reason  string `json:"reason,omitempty"`
}

// OutcomeRecord is the result of an outcome, on the analysis scale.
type OutcomeRecord struct {
	Outcome string     `json:"outcome,omitempty"`
	Measure string     `json:"measure,omitempty"`
	Problem string     `json:"problem,omitempty"` // why nothing was pooled
	K       int        `json:"k"`
	Rows    int        `json:"rows"`
	Pooled  *PooledRow `json:"pooled,omitempty"`
}

// PooledRow holds the numbers of a pooled mean. What does not apply, or is
// infinite, is absent.
type PooledRow struct {
	Estimate    float64  `json:"estimate"`
	SE          float64  `json:"se"`
	Low         *float64 `json:"ci_low,omitempty"`
	High        *float64 `json:"ci_high,omitempty"`
	Level       float64  `json:"level"`
	Null        *float64 `json:"null,omitempty"`
	Tau2        float64  `json:"tau2"`
	PredictLow  *float64 `json:"prediction_low,omitempty"`
	PredictHigh *float64 `json:"prediction_high,omitempty"`
	LnEvidence  *float64 `json:"ln_evidence,omitempty"`
}

// StudyShare is a pooled study: its own estimate on the analysis scale, its weight, a
// fraction, and its id where the sheet has one.
type StudyShare struct {
	Study                string
	Estimate, SE, Weight float64
	ID                   string
}

// MarshalJSON writes the study as a list.
func (s StudyShare) MarshalJSON() ([]byte, error) {
	fields := []any{s.Study, s.Estimate, s.SE, s.Weight}
	if s.ID != "" {
		fields = append(fields, s.ID)
	}
	return json.Marshal(fields)
}

// UnmarshalJSON reads what MarshalJSON writes.
func (s *StudyShare) UnmarshalJSON(text []byte) error {
	*s = StudyShare{}
	fields := []any{&s.Study, &s.Estimate, &s.SE, &s.Weight, &s.ID}
	most := len(fields)
	if err := json.Unmarshal(text, &fields); err != nil {
		return err
	}
	if len(fields) < most-1 || len(fields) > most {
		return fmt.Errorf("a study has %d or %d fields, not %d", most-1, most, len(fields))
	}
	return nil
}

// ResultsOf returns what a line keeps of a synthesis: the result of each outcome, and
// its pooled studies.
func ResultsOf(s *synthesis.Synthesis) (results []OutcomeRecord, studies [][]StudyShare) {
	results, studies = []OutcomeRecord{}, [][]StudyShare{}
	for i := range s.Outcomes {
		o := &s.Outcomes[i]
		r := OutcomeRecord{Outcome: o.Name, K: len(o.Studies), Rows: o.Counts.Rows, Problem: o.Problem}
		shares := []StudyShare{}
		if o.Result != nil {
			r.Measure, r.Pooled = o.Analysis.Measure.String(), pooledRow(o)
			for _, study := range o.Studies {
				shares = append(shares, StudyShare{Study: study.Source.Name, Estimate: study.Estimate.Y, SE: study.Estimate.SE, Weight: study.Weight, ID: study.Source.ID})
			}
		}
		results, studies = append(results, r), append(studies, shares)
	}
	return results, studies
}

func pooledRow(o *synthesis.Outcome) *PooledRow {
	fit := o.Result.Fit
	m := fit.Mean
	p := &PooledRow{Estimate: m.Estimate, SE: m.SE, Low: finite(m.Low), High: finite(m.High), Level: fit.Model.Level, Tau2: m.Tau2}
	if fit.Prediction != nil {
		p.PredictLow, p.PredictHigh = finite(fit.Prediction.Low), finite(fit.Prediction.High)
	}
	if !o.Analysis.NullMissing {
		p.Null, p.LnEvidence = finite(fit.Model.Null), finite(m.Evidence.Ln())
	}
	return p
}

func finite(x float64) *float64 {
	if math.IsInf(x, 0) || math.IsNaN(x) {
		return nil
	}
	return &x
}

// PlanOf returns the settings of a plan that were not left at their defaults, those
// for all outcomes first.
func PlanOf(plan *review.Plan, outcomes []string) []PlanEntry {
	names := []string{""}
	for _, name := range outcomes {
		if name != "" {
			names = append(names, name)
		}
	}
	var all []PlanEntry
	for _, outcome := range names {
		for _, s := range review.Settings() {
			v := plan.Value(s.Name, outcome)
			if v.From == review.FromDefault || (outcome != "" && v == plan.Value(s.Name, "")) {
				continue
			}
			all = append(all, PlanEntry{Setting: s.Name, Outcome: outcome, Value: v.Text, From: v.From.String(), Reason: v.Reason})
		}
	}
	return all
}
