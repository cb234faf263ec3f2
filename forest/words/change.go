package words

import (
	"fmt"
	"math"
	"strings"

	"steelyard/meta"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// ChangeText is what differs between two states of a review, in words: for the text
// answer, Markdown, and the section of a page.
type ChangeText struct {
	Conclusion string
	Settings   []string // of the plan that have changed
	Outcomes   []OutcomeChangeText
}

// OutcomeChangeText is what differs in one outcome. The rows of its tables have one
// cell for each column that its doc names.
type OutcomeChangeText struct {
	Name     string     // blank where the sheet has one outcome without a name
	Rows     []string   // which rows are new, removed or renamed, and which may be a second report
	Cells    [][]string // study, cell, before, now
	Results  [][]string // what, before, now
	Weights  [][]string // study, before, now, change; empty where no weight moves by a tenth of a per cent
	Guides   [][]string // number, before, now, guide
	Triggers [][]string // trigger, verdict, what was found
	Looks    string     // repeated looks; blank where they were not worked out
}

// Change words a change.
func Change(c *synthesis.Change) ChangeText {
	t := ChangeText{Conclusion: ChangeConclusion(c)}
	for _, s := range c.Settings {
		t.Settings = append(t.Settings, settingChange(s))
	}
	for i := range c.Outcomes {
		t.Outcomes = append(t.Outcomes, outcomeChange(c, &c.Outcomes[i]))
	}
	return t
}

func settingChange(s synthesis.SettingChange) string {
	text := fmt.Sprintf("%s: %s, before %s", s.Setting, orNone(s.After.Text), orNone(s.Before.Text))
	if s.Outcome != "" {
		text += ", for " + s.Outcome
	}
	if s.After.Reason != "" {
		text += " (" + s.After.Reason + ")"
	}
	return text
}

func orNone(text string) string {
	if text == "" {
		return "none"
	}
	return text
}

// ChangeConclusion is the one sentence that ends a change report: that nothing
// material changed, or what did.
func ChangeConclusion(c *synthesis.Change) string {
	if c.Nothing() {
		return "Nothing has changed: sheet, plan and results are as before."
	}
	if !c.Material() {
		return "Nothing material has changed: no trigger is met."
	}
	var parts []string
	for i := range c.Outcomes {
		o := &c.Outcomes[i]
		var met []string
		switch {
		case o.Gained():
			met = append(met, "there is a result for the first time")
		case o.Lost():
			met = append(met, "there is no result any more")
		}
		for _, t := range o.Met() {
			met = append(met, fmt.Sprintf("%s: %s", t.ID, TriggerText(o, t)))
		}
		if len(met) == 0 {
			continue
		}
		text := strings.Join(met, "; ")
		if len(c.Outcomes) > 1 && o.Name != "" {
			text = o.Name + ", " + text
		}
		parts = append(parts, text)
	}
	return "Something material has changed. " + capital(strings.Join(parts, "; ")) + "."
}

func outcomeChange(c *synthesis.Change, o *synthesis.OutcomeChange) OutcomeChangeText {
	t := OutcomeChangeText{Name: o.Name, Rows: rowSentences(c, o), Looks: RepeatedLooks(o.Looks)}
	for _, row := range o.Rows.Changed {
		for _, cell := range row.Cells {
			name := cell.Header
			if at := cell.Place.Cell(); at != "" && cell.Place.Col > 0 {
				name += " (" + at + ")"
			}
			t.Cells = append(t.Cells, []string{row.Study.Name, name, orBlank(cell.Before), orBlank(cell.After)})
		}
	}
	t.Results = resultRows(o)
	t.Weights = weightRows(o)
	for _, g := range o.Guides {
		t.Guides = append(t.Guides, guideRow(g))
	}
	for _, trigger := range o.Triggers {
		t.Triggers = append(t.Triggers, []string{trigger.ID.String() + " " + trigger.ID.Title(), trigger.Verdict.String(), TriggerText(o, trigger)})
	}
	return t
}

func orBlank(text string) string {
	if text == "" {
		return "(blank)"
	}
	return text
}

// mostListed is how many rows of one kind a sentence names.
const mostListed = 12

// rowSentences says which rows differ, each kind in one sentence.
func rowSentences(c *synthesis.Change, o *synthesis.OutcomeChange) []string {
	noun := func(n int) string { return Number(n, "row", "rows") }
	names := func(rows []*review.Study) string {
		var all []string
		for _, s := range rows {
			all = append(all, s.Name)
		}
		return list(all)
	}
	r := &o.Rows
	var all []string
	switch {
	case o.Current == nil:
		all = append(all, "The outcome is gone from the sheet.")
	case o.Previous == nil:
		all = append(all, "The outcome is new.")
	case !r.Any():
		all = append(all, "No row has changed.")
	}
	if len(r.New) > 0 {
		all = append(all, fmt.Sprintf("New: %s: %s.", noun(len(r.New)), names(r.New)))
	}
	if len(r.Removed) > 0 {
		all = append(all, fmt.Sprintf("Removed: %s: %s.", noun(len(r.Removed)), names(r.Removed)))
	}
	for _, row := range r.Renamed {
		by := "the same numbers"
		if row.ByID {
			by = "the same id"
		}
		all = append(all, fmt.Sprintf("Renamed: %s, before %s (%s).", row.Study.Name, row.Before, by))
	}
	for _, f := range r.SecondReports {
		all = append(all, fmt.Sprintf("A second report of a known %s? %s (%s, rule %s): %s.", Noun(c.Current.Synthesis, 1), f.Study, f.Place, f.Rule, f.Message))
	}
	if o.Current != nil && o.Current.Result == nil {
		all = append(all, "No result: "+o.Current.Problem)
	}
	return all
}

// list names some and counts the others.
func list(all []string) string {
	if more := len(all) - mostListed; more > 0 {
		return strings.Join(all[:mostListed], ", ") + fmt.Sprintf(" and %d more", more)
	}
	return strings.Join(all, ", ")
}

// resultRows sets the results before and now side by side.
func resultRows(o *synthesis.OutcomeChange) [][]string {
	var rows [][]string
	add := func(what string, of func(*synthesis.Outcome) string) {
		cells := []string{what, Missing, Missing}
		for i, state := range []*synthesis.Outcome{o.Previous, o.Current} {
			if state != nil && state.Result != nil {
				cells[i+1] = of(state)
			}
		}
		if cells[1] != Missing || cells[2] != Missing {
			rows = append(rows, cells)
		}
	}
	add("studies", func(s *synthesis.Outcome) string { return Count(len(s.Studies)) })
	add("participants", func(s *synthesis.Outcome) string {
		if s.Counts.Participants == 0 {
			return Missing
		}
		return Count(s.Counts.Participants)
	})
	add("effect", func(s *synthesis.Outcome) string {
		m := s.Result.Fit.Mean
		return Measure(s.Analysis.Measure) + " " + Reader(s, m.Estimate, meta.Limits{Low: m.Low, High: m.High})
	})
	add("spread τ", func(s *synthesis.Outcome) string { return Tau(math.Sqrt(s.Result.Fit.Mean.Tau2)) })
	add("next setting", func(s *synthesis.Outcome) string {
		if p := s.Result.Fit.Prediction; p != nil {
			return ReaderInterval(s, meta.Limits{Low: p.Low, High: p.High})
		}
		return Missing
	})
	add("evidence", func(s *synthesis.Outcome) string {
		if s.Analysis.NullMissing {
			return Missing
		}
		return Evidence(s.Result.Fit.Mean.Evidence)
	})
	add("strength", func(s *synthesis.Outcome) string {
		if s.Analysis.NullMissing {
			return Missing
		}
		return Strength(s.Result.Fit.Mean.Evidence)
	})
	for _, a := range o.Absolute {
		row := []string{"per 1000, " + baselineText(a.Baseline), Missing, Missing}
		if a.Before != nil {
			d := a.Before.Difference
			row[1] = Absolute(1000*d.Value, 1000*d.Low, 1000*d.High)
		}
		if a.After != nil {
			d := a.After.Difference
			row[2] = Absolute(1000*d.Value, 1000*d.Low, 1000*d.High)
		}
		rows = append(rows, row)
	}
	return rows
}

func baselineText(b review.Baseline) string {
	text := "of " + Per1000(b.Risk)
	if b.Name == synthesis.MedianBaseline {
		return "median control, " + text
	}
	if b.Name != "" {
		return b.Name + ", " + text
	}
	return text
}

// weightRows lists the weights, if any moves as it is shown.
func weightRows(o *synthesis.OutcomeChange) [][]string {
	var rows [][]string
	moved := false
	for _, w := range o.Weights {
		row := []string{w.Study, Missing, Missing, ""}
		if w.Before >= 0 {
			row[1] = Weight(w.Before) + "%"
		}
		if w.After >= 0 {
			row[2] = Weight(w.After) + "%"
		}
		switch {
		case w.Before < 0:
			row[3] = "new in the pool"
		case w.After < 0:
			row[3] = "left the pool"
		default:
			row[3] = signed(100*(w.After-w.Before), 1, "+")
		}
		moved = moved || row[1] != row[2]
		rows = append(rows, row)
	}
	if !moved {
		return nil
	}
	return rows
}

func guideRow(g synthesis.Guide) []string {
	show := func(x float64) string {
		if g.Share {
			return share(x)
		}
		return Count(int(x))
	}
	bound := "any change"
	if g.Bound > 0 {
		bound = show(g.Bound)
	}
	if g.Crossed {
		bound += ", crossed"
	}
	return []string{g.Name, show(g.Before), show(g.After), bound}
}

// TriggerText says what a trigger found: "the interval now excludes no effect".
func TriggerText(o *synthesis.OutcomeChange, t synthesis.Trigger) string {
	if t.Verdict == synthesis.TriggerNotJudged {
		return t.Why
	}
	met := t.Verdict == synthesis.TriggerMet
	switch t.ID {
	case synthesis.SignificanceTrigger:
		return "the interval " + againstNull(o, met, o.Current.Result.Fit.Mean.Low, o.Current.Result.Fit.Mean.High)
	case synthesis.PredictionTrigger:
		p := o.Current.Result.Fit.Prediction
		return "the prediction interval " + againstNull(o, met, p.Low, p.High)
	case synthesis.EffectTrigger:
		return fmt.Sprintf("the effect changed by %s of its distance from no effect (%s)", share(*t.After), bar(t, true))
	case synthesis.InformationTrigger:
		return fmt.Sprintf("new studies carry %s of the weight (%s)", share(*t.After), bar(t, true))
	case synthesis.AbsoluteTrigger:
		text := "the effect crossed no threshold"
		if met {
			text = "the effect crossed " + list(t.Named)
		}
		if t.Threshold != nil {
			text += fmt.Sprintf(" (%s per 1000)", bar(t, false))
		}
		return text
	case synthesis.CertaintyTrigger:
		return named(t, "crossed its guide: ", "no input crossed its guide")
	case synthesis.ScopeTrigger:
		return named(t, "new: ", "no new outcome or subgroup")
	}
	return named(t, "changed: ", "no earlier number was changed, no row removed, no retraction noted")
}

func named(t synthesis.Trigger, met, not string) string {
	if len(t.Named) == 0 {
		return not
	}
	return met + list(t.Named)
}

// share writes a share that may be large.
func share(x float64) string {
	if x > 10 {
		return "over 1,000%"
	}
	return Percent(x)
}

// bar names the threshold of a trigger and where it came from.
func bar(t synthesis.Trigger, percent bool) string {
	text := t.Threshold.Text
	if x, err := review.TriggerNumber(text); err == nil && percent {
		text = Percent(x)
	}
	return fmt.Sprintf("threshold %s, %s", text, t.Threshold.From)
}

// againstNull says on which side of no effect limits are, and whether that is new.
func againstNull(o *synthesis.OutcomeChange, changed bool, low, high float64) string {
	null := o.Current.Analysis.Model.Null
	excludes := low > null || high < null
	switch {
	case changed && excludes:
		return "now excludes no effect"
	case changed:
		return "no longer excludes no effect"
	case excludes:
		return "excludes no effect, as before"
	}
	return "includes no effect, as before"
}
