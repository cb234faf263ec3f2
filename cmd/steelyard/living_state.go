package main

import (
	"fmt"
	"strings"

	"github.com/urfave/cli/v2"

	"steelyard/forest/words"
	"steelyard/ingest/ledger"
	"steelyard/meta/choice"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/synthesis"
)

// stateDocument is a state as it was recorded.
func stateDocument(s *ledger.State) synthesis.StateDocument {
	r := s.Record
	d := synthesis.StateDocument{
		Number: s.Number, Checksum: s.Hash, Recorded: r.At, Searched: r.Searched, By: r.By, Note: r.Note, Program: r.Program,
		Source: synthesis.SourceDocument{File: r.Input.Sheet.File, Sheet: r.Input.Call.Sheet, SHA256: r.Input.Sheet.SHA256},
	}
	for _, o := range r.Results {
		result := synthesis.StateResult{Outcome: o.Outcome, Measure: o.Measure, Problem: o.Problem, K: o.K}
		if o.Pooled != nil {
			result.Estimate, result.Low, result.High, result.Tau2, result.Ln = &o.Pooled.Estimate, o.Pooled.Low, o.Pooled.High, &o.Pooled.Tau2, o.Pooled.LnEvidence
		}
		d.Results = append(d.Results, result)
	}
	return d
}

func differenceDocuments(all []ledger.Difference) []synthesis.RecomputedDocument {
	var list []synthesis.RecomputedDocument
	for _, d := range all {
		list = append(list, synthesis.RecomputedDocument(d))
	}
	return list
}

func livingHistory(c *cli.Context) error {
	format, err := outputWanted(c)
	if err != nil {
		return err
	}
	if c.NArg() > 0 {
		return &callError{fmt.Sprintf("history lists all states and takes none; leave out %q, or see: steelyard living show %s", c.Args().First(), c.Args().First())}
	}
	l, err := openLedger(c)
	if err != nil {
		return err
	}
	outcomes, err := wantedOutcomes(l, c.StringSlice(flagOutcome))
	if err != nil {
		return err
	}
	if c.IsSet(flagChart) {
		return drawUpdates(c, l, outcomes)
	}
	messages := ledgerMessages(l)
	if format != asText {
		complain(c, messages)
	}
	document := synthesis.HistoryDocument{Format: synthesis.HistoryFormat, Program: synthesis.ProgramDocument{Version: version}, States: []synthesis.StateDocument{}, Messages: messages}
	var states []*ledger.State
	for i := range l.States {
		states = append(states, &l.States[i])
		if format == asJSON || format == asCSV {
			document.States = append(document.States, stateDocument(&l.States[i]))
		}
	}
	var p page
	if format == asText || format == asMarkdown {
		for _, m := range messages {
			p.item("·", m)
		}
		if len(messages) > 0 {
			p.line("")
		}
		p.states(l, states, outcomes)
	}
	return reply(c, format, &p, document, "states")
}

// wantedOutcomes resolves the names of outcomes among those of the last state; nil
// for all.
func wantedOutcomes(l *ledger.Ledger, names []string) ([]string, error) {
	var wanted, all []string
	if last := l.Last(); last != nil {
		for _, o := range last.Record.Results {
			all = append(all, o.Outcome)
		}
	}
	for _, name := range names {
		found := false
		for _, have := range all {
			if choice.Fold(have) == choice.Fold(name) {
				wanted, found = append(wanted, have), true
			}
		}
		if !found && len(all) == 1 && all[0] == "" {
			return nil, &callError{fmt.Sprintf("--%s %s: the review has one outcome, without a name; leave --%s away", flagOutcome, name, flagOutcome)}
		}
		if !found {
			return nil, &callError{(&choice.UnknownError{What: "outcome of the last state", Text: name, Valid: all}).Error()}
		}
	}
	return wanted, nil
}

// states writes states as a table, a line for each outcome.
func (p *page) states(l *ledger.Ledger, states []*ledger.State, outcomes []string) {
	wanted := func(name string) bool {
		for _, have := range outcomes {
			if choice.Fold(have) == choice.Fold(name) {
				return true
			}
		}
		return len(outcomes) == 0
	}
	columns := []column{{head: "state"}, {head: "as of"}, {head: "k", right: true}, {head: "effect"}, {head: "effect : none", right: true}, {head: "steps", right: true}, {head: "by"}, {head: "note"}}
	named := false
	var rows [][]string
	for _, s := range states {
		first := []string{stateName(l, s), s.When()}
		for _, o := range s.Record.Results {
			if !wanted(o.Outcome) {
				continue
			}
			named = named || o.Outcome != ""
			row := append(append([]string{}, first...), resultCells(&o)...)
			row = append(row, cut(s.Record.By, 12), cut(noteOf(s, &o), 24))
			if first[0] == "" {
				row[6], row[7] = "", cut(outcomeNote(&o), 24)
			}
			rows = append(rows, row)
			first = []string{"", ""}
		}
	}
	if named {
		p.statesByOutcome(l, states, wanted)
		return
	}
	p.table(columns, rows)
}

// statesByOutcome writes a table for each outcome that has a name.
func (p *page) statesByOutcome(l *ledger.Ledger, states []*ledger.State, wanted func(string) bool) {
	columns := []column{{head: "state"}, {head: "as of"}, {head: "k", right: true}, {head: "effect"}, {head: "effect : none", right: true}, {head: "steps", right: true}, {head: "by"}, {head: "note"}}
	var order []string
	rows := map[string][][]string{}
	for _, s := range states {
		for _, o := range s.Record.Results {
			if !wanted(o.Outcome) {
				continue
			}
			if rows[o.Outcome] == nil {
				order = append(order, o.Outcome)
			}
			row := append([]string{stateName(l, s), s.When()}, resultCells(&o)...)
			rows[o.Outcome] = append(rows[o.Outcome], append(row, cut(s.Record.By, 12), cut(noteOf(s, &o), 24)))
		}
	}
	for i, name := range order {
		if i > 0 {
			p.line("")
		}
		p.line(name)
		p.table(columns, rows[name])
	}
}

// stateName is a state's number and checksum, with the state that it follows where
// that is not the line before.
func stateName(l *ledger.Ledger, s *ledger.State) string {
	name := fmt.Sprintf("%d %s", s.Number, s.Short())
	if before := l.Before(s); before != nil && before.Number != s.Number-1 {
		name += fmt.Sprintf(" ← %d", before.Number)
	}
	return name
}

func noteOf(s *ledger.State, o *ledger.OutcomeRecord) string {
	if problem := outcomeNote(o); problem != "" {
		return problem
	}
	return s.Record.Note
}

func outcomeNote(o *ledger.OutcomeRecord) string {
	if o.Pooled == nil {
		return "no result: " + o.Problem
	}
	return ""
}

// resultCells words a recorded result.
func resultCells(o *ledger.OutcomeRecord) []string {
	cells := []string{words.Count(o.K), words.Missing, words.Missing, words.Missing}
	p := o.Pooled
	if p == nil {
		return cells
	}
	m, err := effect.ParseMeasure(o.Measure)
	if err != nil {
		m = effect.Unspecified
	}
	notation := words.NotationOf(m, p.SE)
	estimate := notation.Value(effect.ToReader(m, p.Estimate))
	if p.Low != nil && p.High != nil {
		estimate = notation.Estimate(effect.ToReader(m, p.Estimate), effect.ToReader(m, *p.Low), effect.ToReader(m, *p.High))
	}
	cells[1] = estimate
	if p.LnEvidence != nil {
		cells[2], cells[3] = words.Odds(*p.LnEvidence), words.Steps(evidence.FromLn(*p.LnEvidence).Steps())
	}
	return cells
}

func livingShow(c *cli.Context) error {
	format, err := outputWanted(c)
	if err != nil {
		return err
	}
	if c.NArg() != 1 {
		return &callError{"which state? give its number, or the first digits of its checksum, as steelyard living history lists them"}
	}
	l, err := openLedger(c)
	if err != nil {
		return err
	}
	s, err := l.State(c.Args().First())
	if err != nil {
		return livingError(err)
	}
	computed, err := l.Again(c.Context, s)
	if err != nil {
		return err
	}
	differences := s.Differences(computed.Synthesis)
	messages := ledgerMessages(l)
	if format != asText {
		complain(c, messages)
	}
	document := synthesis.StateReport{Format: synthesis.StateFormat, State: stateDocument(s), Results: computed.Synthesis.Document(version), Messages: messages}
	document.State.Differs = differenceDocuments(differences)
	var p page
	for _, m := range messages {
		p.item("·", m)
	}
	p.state(l, s, differences)
	p.line("")
	p.answer(computed.Synthesis)
	if err := reply(c, format, &p, document, "results", "outcomes"); err != nil {
		return err
	}
	return incomplete(computed.Synthesis)
}

// state writes what a record says besides the results.
func (p *page) state(l *ledger.Ledger, s *ledger.State, differences []ledger.Difference) {
	r := s.Record
	p.line(fmt.Sprintf("State %d", s.Number))
	p.row("Checksum", s.Hash)
	follows := "none: it is the first"
	if before := l.Before(s); before != nil {
		follows = fmt.Sprintf("state %d", before.Number)
	} else if s.Number > 1 {
		follows = "a state whose line is missing"
	}
	p.row("Follows", follows)
	p.row("Recorded", r.At+", program "+r.Program)
	for _, part := range [][2]string{{"Searched", r.Searched}, {"By", r.By}, {"Note", r.Note}} {
		if part[1] != "" {
			p.row(part[0], part[1])
		}
	}
	p.row("Sheet", r.Input.Sheet.File+", SHA-256 "+r.Input.Sheet.SHA256)
	var settings []string
	for _, e := range r.Plan {
		text := e.Setting + " " + e.Value
		if e.Outcome != "" {
			text += " for " + e.Outcome
		}
		settings = append(settings, text+" ("+e.From+")")
	}
	if len(settings) > 0 {
		p.row("Plan", strings.Join(settings, "; "))
	}
	if len(differences) == 0 {
		p.row("Computed again", "the same numbers")
	}
	for _, d := range differences {
		p.row("Computed again", d.String())
	}
}
