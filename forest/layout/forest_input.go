package layout

import "fmt"

// ForestInput is what a forest chart shows, as plain display data. Estimates
// and limits stand on the analysis scale: natural logs for ratio measures.
type ForestInput struct {
	Title, Subtitle string
	Study           string // what a row is called: "trial" or "study"; empty is "study"
	Scale           EffectScale
	Sides           Sides
	Rows            []ForestRow
	Blocks          []ForestBlock // the rows by subgroup; nil: one list
	ForestSummary
	BiasOpen bool    // "bias is not in this number" stands beside the evidence
	Notes    []Note  // after the notes on key and rail, which the chart writes itself
	Level    float64 // of all intervals, such as 0.95
}

// ForestSummary is what stands under the rows.
type ForestSummary struct {
	Pooled     *ForestPooled     // nil: nothing was pooled, as with one study
	Prediction *ForestPrediction // nil: no row for it, as under common effects
	Spread     *ForestSpread     // nil: no row for it
}

// EffectScale says how effects are shown.
type EffectScale struct {
	Measure  string  // such as "risk ratio"
	Ratio    bool    // log axis
	Null     float64 // the value of no effect, analysis scale
	Decimals int     // of differences
}

// Sides holds the words for the directions of the effect and for the arms.
type Sides struct {
	Lower, Higher string    // under the line of no effect, such as "fewer flares" and "more"
	Arms          [2]string // over the counts, treated arm first
	Counts        string    // head of the counts; empty is "Events of total"
}

// Count is what one arm of a row counted, as text: "11" of "41". Empty Events
// beside a Total is shown as a dash.
type Count struct{ Events, Total string }

// ForestRow is one study.
type ForestRow struct {
	Name, Year          string   // shown as "Name Year"; either may be empty
	Counts              [2]Count // treated arm first; empty if not reported
	Estimate, Low, High float64  // analysis scale
	Weight              float64  // share of the pooled result, 0 to 1
	LnEvidence          float64  // ln of the evidence ratio, effect over none
	Unwanted            bool     // the effect goes in the direction that is not wanted
	Dagger              bool     // marked †, explained in a note
}

// ForestPooled is the pooled result.
type ForestPooled struct {
	Estimate, Low, High float64 // analysis scale
	LnEvidence          float64
	Unwanted            bool
	K                   int       // studies pooled
	OfPriors            bool      // its evidence rests on priors: it may favour none by more than a study alone can
	Clusters            int       // studies, where some give several of the K estimates; else 0
	Totals              [2]string // people per arm; empty if not known
}

// ForestPrediction is the interval for the true effect of a new study, or the
// reason why there is none.
type ForestPrediction struct {
	Low, High float64
	Reason    string // such as "needs 3 trials"; then Low and High are not used
}

// ForestSpread is the standard deviation τ of the true effects on the analysis
// scale, with limits where they are known.
type ForestSpread struct {
	Tau, Low, High float64
	HasLimits      bool
}

// Note is a paragraph under the chart with its bold first word, such as
// "Model".
type Note struct{ Head, Text string }

// validate refuses numbers that no axis can hold.
func (in *ForestInput) validate() error {
	if len(in.Rows) == 0 {
		return fmt.Errorf("forest chart: no %s to draw; nothing was pooled", in.plural(2))
	}
	c := in.checks()
	if err := c.frame(in.Scale, in.Level); err != nil {
		return err
	}
	for i, r := range in.Rows {
		where := fmt.Sprintf("row %d (%s)", i+1, Clean(r.Name))
		if err := c.result(where, r.Estimate, r.Low, r.High, r.LnEvidence); err != nil {
			return err
		}
		if !(0 <= r.Weight && r.Weight <= 1) {
			return fmt.Errorf("forest chart: %s: weight %v must lie from 0 to 1", where, r.Weight)
		}
	}
	if err := in.validateBlocks(); err != nil {
		return err
	}
	return in.validateSummary()
}

func (in *ForestInput) validateSummary() error {
	if p := in.Pooled; p != nil {
		if err := in.checks().result("pooled result", p.Estimate, p.Low, p.High, p.LnEvidence); err != nil {
			return err
		}
	}
	if p := in.Prediction; p != nil && p.Reason == "" {
		if err := in.checks().limits("prediction interval", p.Low, p.High); err != nil {
			return err
		}
	}
	if s := in.Spread; s != nil {
		if !(0 <= s.Tau && s.Tau <= mostDifference) {
			return fmt.Errorf("forest chart: spread between %s of %v must be 0 or more and finite", in.plural(2), s.Tau)
		}
		if s.HasLimits && !(0 <= s.Low && s.Low <= s.High && s.High <= mostDifference) {
			return fmt.Errorf("forest chart: limits of the spread, %v to %v, must ascend from 0 and be finite", s.Low, s.High)
		}
	}
	return nil
}

func (in *ForestInput) checks() checks {
	return checks{chart: "forest chart", ratio: in.Scale.Ratio}
}

// plural returns the word for n rows.
func (in *ForestInput) plural(n int) string { return noun(in.Study, n) }

// noun returns what a chart calls n of its rows: study is the word for one.
func noun(study string, n int) string {
	one, many := "study", "studies"
	if study != "" && study != "study" {
		one, many = Clean(study), Clean(study)+"s"
	}
	if n == 1 {
		return one
	}
	return many
}

// cleaned returns a scale whose name may stand in a drawing.
func (s EffectScale) cleaned() EffectScale {
	if s.Measure = Clean(s.Measure); s.Measure == "" {
		s.Measure = "effect"
	}
	return s
}

// cleaned returns words that may stand in a drawing, none of them missing.
func (s Sides) cleaned() Sides {
	clean := func(text, otherwise string) string {
		if text = Clean(text); text == "" {
			return otherwise
		}
		return text
	}
	s.Lower, s.Higher, s.Counts = clean(s.Lower, "lower"), clean(s.Higher, "higher"), clean(s.Counts, "Events of total")
	s.Arms = [2]string{Clean(s.Arms[0]), Clean(s.Arms[1])}
	return s
}

func cleanNotes(notes []Note) []Note {
	clean := make([]Note, len(notes))
	for i, n := range notes {
		clean[i] = Note{Head: Clean(n.Head), Text: Clean(n.Text)}
	}
	return clean
}
