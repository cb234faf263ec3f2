package main

import (
	"fmt"

	"github.com/urfave/cli/v2"

	"steelyard/forest/words"
	"steelyard/ingest/ledger"
	"steelyard/meta/synthesis"
)

func livingStart(c *cli.Context) error {
	format, err := outputWanted(c)
	if err != nil {
		return err
	}
	path, err := oneFile(c)
	if err != nil {
		return err
	}
	dir := c.String(flagIn)
	if dir == "" {
		return &callError{"where is the record to be? add --in DIR; the folder is made if it is not there"}
	}
	call, _, err := livingCall(c, nil)
	if err != nil {
		return err
	}
	state, entry, err := livingEntry(c, path, call)
	if err != nil {
		return err
	}
	recorded, err := ledger.Start(c.Context, dir, whoWrites(c), entry)
	if err != nil {
		return livingError(err)
	}
	l, err := ledger.Open(dir)
	if err != nil {
		return livingError(err)
	}
	var p page
	p.wrapped("", fmt.Sprintf("Recorded as state %d (%s) in %s. The next one: steelyard living update FILE --in %s", recorded.Number, recorded.Short(), dir, dir))
	p.line("")
	p.states(l, []*ledger.State{l.Last()}, nil)
	document := synthesis.ChangeDocument{
		Format: synthesis.ChangeFormat, Program: synthesis.ProgramDocument{Version: version}, Current: stateDocument(l.Last()), Conclusion: "This is the first state.",
		Settings: []synthesis.SettingChangeDocument{}, Outcomes: []synthesis.OutcomeChangeDocument{}, Findings: synthesis.FindingDocuments(state.Synthesis.Findings), Messages: []string{},
	}
	if err := reply(c, format, &p, document, "outcomes"); err != nil {
		return err
	}
	return incomplete(state.Synthesis)
}

// sheetAndLedger returns the call's format, its sheet and the folder of its ledger.
func sheetAndLedger(c *cli.Context) (format answerFormat, path, dir string, err error) {
	if format, err = outputWanted(c); err != nil {
		return format, "", "", err
	}
	if path, err = oneFile(c); err != nil {
		return format, "", "", err
	}
	dir, err = ledgerFolder(c)
	return format, path, dir, err
}

func livingUpdate(c *cli.Context) error {
	format, path, dir, err := sheetAndLedger(c)
	if err != nil {
		return err
	}
	store, err := ledger.Hold(c.Context, dir, whoWrites(c))
	if err != nil {
		return livingError(err)
	}
	defer store.Close()
	report, entry, err := newState(c, store.Ledger, path)
	if err != nil {
		return err
	}
	recorded, setAside, err := store.Append(entry)
	if err != nil {
		return livingError(err)
	}
	report.now = recorded
	report.acknowledge = fmt.Sprintf("recorded as state %d (%s)", recorded.Number, recorded.Short())
	if setAside != "" {
		report.messages = append(report.messages, fmt.Sprintf("the last line of the ledger was never finished; it is set aside in %s", setAside))
	}
	if len(recorded.Record.Joins) > 0 {
		report.messages = append(report.messages, fmt.Sprintf("state %d follows state %d and joins %s of the fork", recorded.Number, report.before.Number, words.Number(len(recorded.Record.Joins), "other end", "other ends")))
	}
	if recorded.Record.At < report.before.Record.At {
		report.messages = append(report.messages, fmt.Sprintf("this computer's clock (%s) stands before the time of state %d (%s); the order of the record is that of its lines", recorded.Record.At, report.before.Number, report.before.Record.At))
	}
	return report.deliver(c, format)
}

// newState computes the call's sheet as the state after the last one, with what has
// changed.
func newState(c *cli.Context, l *ledger.Ledger, path string) (*changeReport, ledger.Entry, error) {
	before := l.Last()
	if before == nil {
		return nil, ledger.Entry{}, fmt.Errorf("the ledger has no state that can be read; see: steelyard living verify")
	}
	call, messages, err := livingCall(c, before)
	if err != nil {
		return nil, ledger.Entry{}, err
	}
	now, entry, err := livingEntry(c, path, call)
	if err != nil {
		return nil, entry, err
	}
	report := &changeReport{before: before, messages: append(ledgerMessages(l), messages...)}
	if entry.Record.Searched != "" && before.Record.Searched > entry.Record.Searched {
		report.messages = append(report.messages, fmt.Sprintf("the search of %s lies before that of state %d (%s); is the date right?", entry.Record.Searched, before.Number, before.Record.Searched))
	}
	updates, err := updatesTo(l, before)
	if err != nil {
		return nil, entry, err
	}
	at := &ledger.State{Number: before.Number + 1, Record: entry.Record}
	updates = append(updates, synthesis.NewUpdate(at.Number, at.When()))
	report.now = at
	return report, entry, report.compute(c, l, now, updates)
}

// updatesTo returns the updates up to a state, itself included, in the order of the
// lines: both sides of a fork have looked.
func updatesTo(l *ledger.Ledger, s *ledger.State) ([]synthesis.Update, error) {
	var updates []synthesis.Update
	for i := range l.States {
		if l.States[i].Number > s.Number {
			break
		}
		u, err := l.States[i].Update()
		if err != nil {
			return nil, err
		}
		updates = append(updates, u)
	}
	return updates, nil
}

// changeReport is what has changed between two states of a record. One that is not
// recorded yet has no checksum.
type changeReport struct {
	before, now *ledger.State
	change      *synthesis.Change
	differences []ledger.Difference // of the state before, as this program computes it
	messages    []string
	single      bool   // the report is of a sheet that is not recorded
	acknowledge string // that the state is recorded; blank if nothing was
}

// compute compares the state before with another, and looks at the repeated looks.
func (r *changeReport) compute(c *cli.Context, l *ledger.Ledger, now *synthesis.State, updates []synthesis.Update) error {
	before, err := l.Again(c.Context, r.before)
	if err != nil {
		return fmt.Errorf("%w (of state %d, which is compared with)", err, r.before.Number)
	}
	r.differences = r.before.Differences(before.Synthesis)
	now.Synthesis.FindLooks(updates)
	r.change = synthesis.Compare(*before, *now)
	draws, wanted, err := looksDraws(c, now.Synthesis)
	if err != nil || !wanted {
		return err
	}
	for i := range r.change.Outcomes {
		o := &r.change.Outcomes[i]
		if o.Current == nil {
			continue
		}
		if o.Looks, err = o.Current.LookAgain(c.Context, updates, draws); err != nil {
			return err
		}
	}
	return nil
}

// deliver prints the report and returns what the exit code is chosen by.
func (r *changeReport) deliver(c *cli.Context, format answerFormat) error {
	text := words.Change(r.change)
	document := r.change.Document(version, text.Conclusion)
	previous := stateDocument(r.before)
	previous.Differs = differenceDocuments(r.differences)
	document.Previous, document.Current, document.Messages = &previous, stateDocument(r.now), append(document.Messages, r.messages...)
	if r.single {
		document.Current.Number = 0
	}
	var p page
	p.change(r, text)
	if format != asText {
		complain(c, r.messages)
	}
	if err := reply(c, format, &p, document, "outcomes", "triggers"); err != nil {
		return err
	}
	if c.Bool(flagTrigger) && r.change.Material() {
		return &triggered{}
	}
	return incomplete(r.change.Current.Synthesis)
}

func livingCompare(c *cli.Context) error {
	format, err := outputWanted(c)
	if err != nil {
		return err
	}
	l, err := openLedger(c)
	if err != nil {
		return err
	}
	report := &changeReport{messages: ledgerMessages(l)}
	if report.before, report.now, err = comparedStates(l, c.Args().Slice()); err != nil {
		return err
	}
	now, err := l.Again(c.Context, report.now)
	if err != nil {
		return err
	}
	for _, d := range report.now.Differences(now.Synthesis) {
		report.messages = append(report.messages, fmt.Sprintf("state %d is computed otherwise than when it was recorded: %s", report.now.Number, d))
	}
	updates, err := updatesTo(l, report.now)
	if err != nil {
		return err
	}
	if err := report.compute(c, l, now, updates); err != nil {
		return err
	}
	return report.deliver(c, format)
}

// comparedStates chooses the two states that a call compares.
func comparedStates(l *ledger.Ledger, names []string) (before, now *ledger.State, err error) {
	if len(names) > 2 {
		return nil, nil, &callError{fmt.Sprintf("two states are compared, %d are given: %q", len(names), names)}
	}
	now = l.Last()
	if now == nil {
		return nil, nil, fmt.Errorf("the ledger has no state that can be read; see: steelyard living verify")
	}
	if len(names) == 2 {
		if now, err = l.State(names[1]); err != nil {
			return nil, nil, livingError(err)
		}
	}
	if len(names) > 0 {
		before, err = l.State(names[0])
		return before, now, livingError(err)
	}
	if before = l.Before(now); before == nil && now.Number > 1 {
		return nil, nil, fmt.Errorf("the line that state %d follows cannot be read; name two states, or see: steelyard living verify", now.Number)
	}
	if before == nil {
		return nil, nil, &callError{"there is one state only: nothing to compare it with"}
	}
	return before, now, nil
}

// change writes the report.
func (p *page) change(r *changeReport, text words.ChangeText) {
	head := fmt.Sprintf("State %d (%s) against state %d (%s)", r.now.Number, r.now.When(), r.before.Number, r.before.When())
	if r.single {
		head = fmt.Sprintf("The sheet as it stands, not recorded, against state %d (%s)", r.before.Number, r.before.When())
	}
	p.line(head)
	if r.acknowledge != "" {
		p.item("·", r.acknowledge)
	}
	for _, m := range r.messages {
		p.item("·", m)
	}
	for _, d := range r.differences {
		p.item("·", fmt.Sprintf("state %d is computed otherwise than when it was recorded: %s", r.before.Number, d))
	}
	for _, s := range text.Settings {
		p.item("·", "the plan has changed: "+s)
	}
	for i := range text.Outcomes {
		p.line("")
		p.outcomeChange(&text.Outcomes[i])
	}
	findings := r.change.Current.Synthesis.CountFindings()
	p.line("")
	if findings.Errors+findings.Warnings > 0 {
		p.item("·", fmt.Sprintf("the sheet has %s and %s; see: steelyard check %s", words.Number(findings.Errors, "error", "errors"), words.Number(findings.Warnings, "warning", "warnings"), r.change.Current.Synthesis.Source.File))
	}
	for _, f := range r.change.Current.Synthesis.Findings {
		if f.Rule == synthesis.RuleLooks && f.Accepted == "" {
			p.item("·", findingText(f))
		}
	}
	if searched := r.now.Record.Searched; searched != "" {
		p.item("·", fmt.Sprintf("valid as of the search of %s; earlier states are superseded but kept", searched))
	}
	p.line("")
	p.wrapped("", text.Conclusion)
}

// mostGuide is the widest name of a row of a change report.
const mostGuide = 46

// outcomeChange writes what has changed in one outcome.
func (p *page) outcomeChange(t *words.OutcomeChangeText) {
	if t.Name != "" {
		p.line(t.Name)
	}
	for _, row := range t.Rows {
		p.item("·", row)
	}
	part := func(head string, columns []column, rows [][]string) {
		if len(rows) == 0 {
			return
		}
		p.line("")
		if head != "" {
			p.line(head)
		}
		p.tableNamed(columns, rows, narrowestName, mostGuide)
	}
	part("", []column{{head: "result"}, {head: "before"}, {head: "now"}}, t.Results)
	part("", []column{{head: "cell of"}, {head: "column"}, {head: "before"}, {head: "now"}}, t.Cells)
	part("", []column{{head: "weight of"}, {head: "before", right: true}, {head: "now", right: true}, {head: "change", right: true}}, t.Weights)
	part("", []column{{head: "input to certainty"}, {head: "before", right: true}, {head: "now", right: true}, {head: "guide"}}, t.Guides)
	p.line("")
	p.line("Triggers for a full update")
	triggers := block{kind: tableBlock, columns: []column{{head: "trigger"}, {head: "verdict"}, {head: "why"}}}
	for _, trigger := range t.Triggers {
		triggers.rows = append(triggers.rows, trigger)
		p.fold(pad(trigger[0], 23)+pad(trigger[1], 12), trigger[2])
	}
	p.record(triggers)
	if t.Looks != "" {
		p.line("")
		p.wrapped("", t.Looks)
	}
}
