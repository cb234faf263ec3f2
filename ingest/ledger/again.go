package ledger

import (
	"context"
	"fmt"
	"math"

	"steelyard/ingest"
	"steelyard/ingest/rules"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// Again computes a state once more from its input sheets, as they were stored. The
// errors are a *SheetError, and those of reading and pooling a sheet.
func (l *Ledger) Again(ctx context.Context, s *State) (*synthesis.State, error) {
	input := s.Record.Input
	files := &ingest.Files{}
	var err error
	if files.Sheet, err = l.Sheet(input.Sheet); err != nil {
		return nil, err
	}
	for _, one := range []struct {
		name *Stored
		to   **ingest.File
	}{{input.Plan, &files.Plan}, {input.Judgement, &files.Judgement}} {
		if one.name == nil {
			continue
		}
		file, err := l.Sheet(*one.name)
		if err != nil {
			return nil, err
		}
		*one.to = &file
	}
	state, err := Compute(ctx, files, files.Sheet.Name, input.Call)
	if err != nil {
		return nil, fmt.Errorf("state %d: %w", s.Number, err)
	}
	return state, nil
}

// Compute reads and pools the files of a state; path is what the user calls the
// sheet. A setting of the call that cannot be is an error of review.Plan.Set.
func Compute(ctx context.Context, files *ingest.Files, path string, call Call) (*synthesis.State, error) {
	x, plan, err := files.Read(ctx, path, ingest.Options{Sheet: call.Sheet, Columns: call.Columns})
	if err != nil {
		return nil, err
	}
	for _, setting := range review.Settings() {
		if text, given := call.Settings[setting.Name]; given {
			if err := plan.Set(setting.Name, "", review.Value{Text: text, From: review.FromFlag}); err != nil {
				return nil, err
			}
		}
	}
	rules.Apply(x, plan)
	s, err := synthesis.Run(ctx, x, plan, synthesis.Want{})
	if err != nil {
		return nil, err
	}
	return &synthesis.State{Extraction: x, Synthesis: s}, nil
}

// Difference is a number of a state that was computed otherwise when it was recorded.
type Difference struct {
	Outcome, What      string
	Recorded, Computed float64
}

// String returns both numbers.
func (d Difference) String() string {
	where := d.What
	if d.Outcome != "" {
		where = d.Outcome + ", " + where
	}
	return fmt.Sprintf("%s: recorded %.10g, computed now %.10g", where, d.Recorded, d.Computed)
}

// sameTo is how far numbers of one computation may lie apart on other processors, of
// their size or of the standard error.
const sameTo = 1e-9

// Differences compares the results that a state recorded with those computed again.
func (s *State) Differences(now *synthesis.Synthesis) []Difference {
	results, _ := ResultsOf(now)
	byName := map[string]*OutcomeRecord{}
	for i := range results {
		byName[results[i].Outcome] = &results[i]
	}
	var all []Difference
	for i := range s.Record.Results {
		before := &s.Record.Results[i]
		d := differ{outcome: before.Outcome}
		after := byName[before.Outcome]
		if after == nil {
			after = &OutcomeRecord{}
		}
		d.number("pooled studies", float64(before.K), float64(after.K), 0)
		switch a, b := before.Pooled, after.Pooled; {
		case a != nil && b != nil:
			d.pooled(a, b)
		case (a == nil) != (b == nil):
			d.number("a pooled result (1 there, 0 not)", there(a), there(b), 0)
		}
		all = append(all, d.found...)
	}
	return all
}

func there(p *PooledRow) float64 {
	if p == nil {
		return 0
	}
	return 1
}

// differ gathers the differences of one outcome.
type differ struct {
	outcome string
	found   []Difference
}

func (d *differ) number(what string, a, b, scale float64) {
	if math.Abs(a-b) > sameTo*(math.Abs(a)+scale) {
		d.found = append(d.found, Difference{Outcome: d.outcome, What: what, Recorded: a, Computed: b})
	}
}

func (d *differ) maybe(what string, a, b *float64, scale float64) {
	switch {
	case a != nil && b != nil:
		d.number(what, *a, *b, scale)
	case a != nil:
		d.number(what+" (not computed now: 0)", *a, 0, scale)
	case b != nil:
		d.number(what+" (not recorded: 0)", 0, *b, scale)
	}
}

func (d *differ) pooled(a, b *PooledRow) {
	d.number("estimate", a.Estimate, b.Estimate, a.SE)
	d.number("standard error", a.SE, b.SE, 0)
	d.maybe("lower limit", a.Low, b.Low, a.SE)
	d.maybe("upper limit", a.High, b.High, a.SE)
	d.number("τ²", a.Tau2, b.Tau2, a.SE*a.SE)
	d.maybe("lower end of the prediction interval", a.PredictLow, b.PredictLow, a.SE)
	d.maybe("upper end of the prediction interval", a.PredictHigh, b.PredictHigh, a.SE)
	d.maybe("ln of the evidence ratio", a.LnEvidence, b.LnEvidence, 1)
}

// Update returns what repeated looks need of a state: when it was, and the studies
// that it pooled.
func (s *State) Update() (synthesis.Update, error) {
	u := synthesis.NewUpdate(s.Number, s.When())
	studies, err := s.Studies()
	if err != nil {
		return u, err
	}
	for i, r := range s.Record.Results {
		if i >= len(studies) {
			break
		}
		for _, study := range studies[i] {
			u.Knows(r.Outcome, study.Study, study.ID, study.Estimate, study.SE)
		}
	}
	return u, nil
}

// When returns the date of a state's search, else that on which it was recorded.
func (s *State) When() string {
	if s.Record.Searched != "" {
		return s.Record.Searched
	}
	return s.Record.At[:min(len(s.Record.At), len("2006-01-02"))]
}
