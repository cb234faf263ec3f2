package webpage

import (
	"fmt"
	"slices"
	"strings"

	"steelyard/forest/words"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// findingsView lists what the check of the sheet found.
type findingsView struct {
	Under string
	Rows  []findingView
}

// findingView is a finding: kind, place, what was found and what was done.
type findingView struct{ Kind, Where, Study, Message, Done string }

func findingsOf(s *synthesis.Synthesis) findingsView {
	n := s.CountFindings()
	w := findingsView{Under: fmt.Sprintf("%s, %s, %s; %s accepted by the reviewers. A sheet without findings can still hold wrong numbers.",
		words.Number(n.Errors, "error", "errors"), words.Number(n.Warnings, "warning", "warnings"), words.Number(n.Notes, "note", "notes"), words.Count(n.Accepted))}
	order := make([]int, len(s.Findings))
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(a, b int) int { return int(s.Findings[a].Severity) - int(s.Findings[b].Severity) })
	for _, i := range order {
		f := s.Findings[i]
		row := findingView{Kind: words.Capital(f.Severity.String()), Where: f.Place.String(), Study: f.Study, Message: f.Message, Done: done(f)}
		if f.Rule != "" {
			row.Kind += " " + f.Rule
		}
		if f.Study == "" {
			row.Study = f.Outcome
		}
		w.Rows = append(w.Rows, row)
	}
	return w
}

// done says what became of a finding.
func done(f review.Finding) string {
	switch {
	case f.Accepted != "":
		return "Accepted: " + f.Accepted
	case f.Blocks() && f.Place.Row > 0:
		return "Row left out"
	case f.Blocks():
		return "Refused until mended"
	case f.Severity == review.Warning:
		return "Open"
	}
	return "For information"
}

// methodsView is the methods of an outcome: paragraphs, and its settings where they
// are its own.
type methodsView struct {
	ID, Name   string // ID begins the ids of its elements
	Paragraphs []string
	Settings   []settingView
}

// settingView is a setting with its value and origin.
type settingView struct{ Name, Value, Origin, Reason string }

func methodsOf(s *synthesis.Synthesis, o *synthesis.Outcome, id string) methodsView {
	m := methodsView{ID: id, Name: outcomeName(s, o), Paragraphs: words.MethodsParagraphs(s, o)}
	for _, setting := range review.Settings() {
		v := s.Plan.Value(setting.Name, o.Name)
		if v.Text == "" || v.From == review.FromDefault {
			continue
		}
		origin := v.From.String()
		if at := v.Place.String(); v.From == review.FromSheet && at != "" {
			origin += ", " + at
		}
		m.Settings = append(m.Settings, settingView{setting.Name, v.Text, origin, v.Reason})
	}
	return m
}

// defaultsOf lists the settings that stand at their defaults for every outcome.
func defaultsOf(s *synthesis.Synthesis) []settingView {
	var all []settingView
	for _, setting := range review.Settings() {
		given := slices.ContainsFunc(s.Outcomes, func(o synthesis.Outcome) bool {
			return s.Plan.Value(setting.Name, o.Name).From != review.FromDefault
		})
		if text := s.Plan.Value(setting.Name, "").Text; !given && text != "" {
			all = append(all, settingView{Name: setting.Name, Value: text})
		}
	}
	return all
}

// pageCautions are the synthesis's own, and those that every page has.
func pageCautions(s *synthesis.Synthesis) []string {
	return append(slices.Clone(s.Cautions),
		"An interval that excludes no effect does not make the effect important; one that includes it does not show that there is none. Judge against the thresholds.",
		synthesis.AccrualCaution,
		"Harms are measured poorly in few studies. Missing data are not zero events.",
		"Results hold as of the date of the search behind the sheet. If an error here could affect patients now, tell the authors and the guideline body; do not only mend the sheet.",
	)
}

// recordView says what was read and by what.
type recordView struct{ Rows []recordRow }

// recordRow is a line of the record.
type recordRow struct{ Name, Value string }

func recordOf(s *synthesis.Synthesis, options Options) recordView {
	sheet := s.Source.File
	if s.Source.Sheet != "" {
		sheet += ", sheet “" + s.Source.Sheet + "”"
	}
	var changed []string
	for _, setting := range review.Settings() {
		if v := s.Plan.Value(setting.Name, ""); v.From == review.FromFlag {
			changed = append(changed, setting.Name+" "+v.Text)
		}
	}
	given := "none"
	if len(changed) > 0 {
		given = strings.Join(changed, " · ")
	}
	return recordView{Rows: []recordRow{
		{"Sheet", sheet}, {"SHA-256", s.Source.SHA256},
		{"Settings given in the call, before those of the plan", given},
		{"Program", "steelyard " + options.Version + ", output format " + synthesis.Format},
		{"Certainty", "never computed; what people entered stands with the outcome"},
	}}
}
