package main

import (
	"errors"
	"fmt"
	"os"
	"slices"
	"strings"
	"time"

	"github.com/urfave/cli/v2"

	"steelyard/ingest"
	"steelyard/ingest/ledger"
	"steelyard/meta/accrual"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// Names of the flags of a living review.
const (
	flagIn       = "in"
	flagSearched = "searched"
	flagBy       = "by"
	flagNote     = "note"
	flagTrigger  = "fail-on-trigger"
	flagAnew     = "anew"
	flagChart    = "chart"
	flagQuick    = "quick"
)

// clock tells the time of a record; the ledger itself has none.
var clock = time.Now

// usualLooks is how many sequences an update simulates of repeated looks.
const usualLooks = 400

func livingCommand() *cli.Command {
	command := &cli.Command{
		Name:      "living",
		Usage:     "a living review: keep every state, say what changed, lose nothing",
		UsageText: "steelyard living start|update|watch FILE --in DIR [flags]\n  steelyard living history|compare|show|verify --in DIR [flags]",
		Description: "The record is a folder that a team keeps in version control or on a shared drive: a ledger of one\n" +
			"checksummed line for each state, and the input sheets. Without --in it is the nearest folder upwards\n" +
			"that holds a ledger. Begin with: steelyard living start FILE --in DIR",
		Action: func(*cli.Context) error {
			return &callError{"what of the living review? start, update, watch, history, compare, show or verify; see: steelyard living --help"}
		},
	}
	for _, kind := range livingKinds {
		command.Subcommands = append(command.Subcommands, &cli.Command{
			Name: kind.name, Usage: kind.usage, UsageText: "steelyard living " + kind.call, Description: kind.about,
			Flags: slices.Concat([]cli.Flag{inFlag()}, kind.flags), Action: kind.run,
		})
	}
	return command
}

// livingKind is a subcommand of living.
type livingKind struct {
	name, usage, call, about string
	flags                    []cli.Flag
	run                      cli.ActionFunc
}

var livingKinds = []livingKind{
	{
		name: "start", usage: "begin the record with a first state", call: "start FILE --in DIR [flags]",
		about: "DIR is made if it is not there. Flags that set something are part of the state; later updates take\nthem over.",
		flags: slices.Concat(recordFlags(), livingSheetFlags(), outputFormatFlags()), run: livingStart,
	},
	{
		name: "update", usage: "record a new state and say what changed", call: "update FILE [--in DIR] [flags]",
		about: "Settings and columns that flags gave to the state before are taken over; give one anew to change it.",
		flags: slices.Concat(recordFlags(), []cli.Flag{anewFlag(), triggerFlag(), livingLooksFlag()}, livingSheetFlags(), outputFormatFlags(), workFlags()), run: livingUpdate,
	},
	{
		name: "watch", usage: "read the sheet whenever it is saved and print what changed; record nothing", call: "watch FILE [--in DIR] [flags]",
		about: "The sheet is held against the last state of the record. End it with ctrl-C.",
		flags: slices.Concat([]cli.Flag{anewFlag()}, livingSheetFlags(), []cli.Flag{formatFlag()}), run: livingWatch,
	},
	{
		name: "history", usage: "list the states", call: "history [--in DIR] [flags]",
		flags: slices.Concat([]cli.Flag{outcomeFlag(),
			&cli.StringFlag{Name: flagChart, Usage: "besides, draw the cumulative evidence with a mark for each update: F.svg, F.pdf or F.png"},
			&cli.IntFlag{Name: flagWidth, Value: 180, Usage: "width of the chart in millimetres: 180 for a page, 85 for a column (default: 180)"},
			&cli.BoolFlag{Name: flagMono, Usage: "shades of grey only"},
			&cli.BoolFlag{Name: flagNoTitle, Usage: "leave title and subtitle of the chart to the caption"},
			&cli.IntFlag{Name: flagDPI, Value: 300, Usage: "dots per inch of a .png (default: 300)"},
		}, outputFormatFlags()), run: livingHistory,
	},
	{
		name: "compare", usage: "say what changed between two states", call: "compare [A B] [--in DIR] [flags]",
		about: "A and B are states by their number, or by the first digits of their checksum. Without B: the\nlast one; without both: the last two.",
		flags: slices.Concat([]cli.Flag{triggerFlag(), livingLooksFlag()}, outputFormatFlags(), workFlags()), run: livingCompare,
	},
	{
		name: "show", usage: "compute a state again and print it", call: "show N [--in DIR] [flags]",
		about: "What this program computes otherwise than the one that recorded the state is said with both numbers.",
		flags: outputFormatFlags(), run: livingShow,
	},
	{
		name: "verify", usage: "look through the record for lost or changed bytes", call: "verify [--in DIR] [flags]",
		about: "Checks every line, the chain, and the input sheets, and computes every state again. " + "Exit code 1 if\nsomething is not as it was written, or is computed otherwise.",
		flags: slices.Concat([]cli.Flag{&cli.BoolFlag{Name: flagQuick, Usage: "do not compute the states again"}}, outputFormatFlags(), workFlags()), run: livingVerify,
	},
}

func inFlag() cli.Flag {
	return &cli.StringFlag{Name: flagIn, Usage: "folder of the record (default: the nearest folder upwards that holds one)"}
}

func recordFlags() []cli.Flag {
	return []cli.Flag{
		&cli.StringFlag{Name: flagSearched, Usage: "date of the search behind this state, such as 2026-11-30"},
		&cli.StringFlag{Name: flagBy, Usage: "who records it"},
		&cli.StringFlag{Name: flagNote, Usage: "what is to be remembered of it"},
	}
}

func triggerFlag() cli.Flag {
	return &cli.BoolFlag{Name: flagTrigger, Usage: "end with exit code 4 if a trigger is met, or a result came or went"}
}

func anewFlag() cli.Flag {
	return &cli.BoolFlag{Name: flagAnew, Usage: "take over no settings and columns from the state before"}
}

func livingLooksFlag() cli.Flag {
	return &cli.IntFlag{Name: flagLooks, Value: usualLooks, Usage: "sequences to simulate of the repeated looks, 100 or more, or 0 for none (default: 400)"}
}

func outcomeFlag() cli.Flag {
	return &cli.StringSliceFlag{Name: flagOutcome, Usage: "only this outcome; may be given more than once (default: all)"}
}

// livingSheetFlags say how the sheet is to be read and pooled.
func livingSheetFlags() []cli.Flag {
	return slices.Concat(slices.DeleteFunc(sheetFlags(), func(f cli.Flag) bool { return f.Names()[0] == flagOutcome }),
		settingFlags(review.Living), slices.DeleteFunc(settingFlags("panel"), isGeneral))
}

// isGeneral reports whether a flag sets what every command uses.
func isGeneral(f cli.Flag) bool {
	s, err := review.FindSetting(f.Names()[0])
	return err == nil && s.Needs == ""
}

func outputFormatFlags() []cli.Flag { return append([]cli.Flag{formatFlag()}, outputFlags()...) }

// ledgerFolder returns the folder of the record.
func ledgerFolder(c *cli.Context) (string, error) {
	if dir := c.String(flagIn); dir != "" {
		return dir, nil
	}
	if c.IsSet(flagIn) {
		return "", &callError{"--in needs the name of a folder"}
	}
	dir, err := ledger.Find(".")
	return dir, livingError(err)
}

// openLedger reads the record, and says on the error stream what is wrong with it.
func openLedger(c *cli.Context) (*ledger.Ledger, error) {
	dir, err := ledgerFolder(c)
	if err != nil {
		return nil, err
	}
	l, err := ledger.Open(dir)
	return l, livingError(err)
}

// ledgerMessages says what is to be known of the record before its states are read.
func ledgerMessages(l *ledger.Ledger) []string {
	messages := []string{}
	for _, p := range l.Problems {
		messages = append(messages, p.String())
	}
	if text := l.TornText(); text != "" {
		messages = append(messages, text)
	}
	return messages
}

// complain writes messages to the error stream.
func complain(c *cli.Context, messages []string) {
	for _, m := range messages {
		fmt.Fprintln(c.App.ErrWriter, "steelyard: "+m)
	}
}

// livingError gives an error of the ledger the kind by which the exit code is chosen.
func livingError(err error) error {
	var none *ledger.NoLedgerError
	var exists *ledger.ExistsError
	var unknown *ledger.UnknownStateError
	var newer *ledger.NewerError
	var busy *ledger.BusyError
	var write *ledger.WriteError
	switch {
	case errors.As(err, &none), errors.As(err, &exists), errors.As(err, &unknown):
		return &callError{err.Error()}
	case errors.As(err, &newer), errors.As(err, &busy), errors.As(err, &write):
		return &fileError{err}
	}
	return err
}

// livingCall returns what the call's flags say of the reading and pooling, over what
// the state before was given.
func livingCall(c *cli.Context, before *ledger.State) (call ledger.Call, messages []string, err error) {
	call = ledger.Call{Sheet: c.String(flagSheet), Columns: map[string]string{}, Settings: map[string]string{}}
	for _, text := range c.StringSlice(flagColumn) {
		field, header, err := ingest.ParseColumn(text)
		if err != nil {
			return call, nil, &callError{"--column: " + err.Error()}
		}
		call.Columns[field] = header
	}
	for _, s := range review.Settings() {
		if c.IsSet(s.Name) {
			text := strings.TrimSpace(c.String(s.Name))
			if err := s.Check(text); err != nil {
				return call, nil, &callError{fmt.Sprintf("--%s: %v", s.Name, err)}
			}
			call.Settings[s.Name] = text
		}
	}
	if before == nil || c.Bool(flagAnew) {
		return call, nil, nil
	}
	var taken []string
	old := before.Record.Input.Call
	if call.Sheet == "" && old.Sheet != "" {
		call.Sheet = old.Sheet
		taken = append(taken, "--sheet "+old.Sheet)
	}
	for _, part := range []struct {
		now, before map[string]string
		flag        string
	}{{call.Columns, old.Columns, "--column %s=%s"}, {call.Settings, old.Settings, "--%s %s"}} {
		for _, name := range sortedKeys(part.before) {
			if _, given := part.now[name]; !given {
				part.now[name] = part.before[name]
				taken = append(taken, fmt.Sprintf(part.flag, name, part.before[name]))
			}
		}
	}
	if len(taken) > 0 {
		messages = append(messages, fmt.Sprintf("taken over from state %d: %s (--%s takes nothing over)", before.Number, strings.Join(taken, ", "), flagAnew))
	}
	return call, messages, nil
}

func sortedKeys(m map[string]string) []string {
	var keys []string
	for key := range m {
		keys = append(keys, key)
	}
	slices.Sort(keys)
	return keys
}

// livingEntry reads and pools the call's sheet and makes the entry of a new state.
func livingEntry(c *cli.Context, path string, call ledger.Call) (*synthesis.State, ledger.Entry, error) {
	var e ledger.Entry
	if path == "-" {
		return nil, e, &callError{"the record keeps the sheet itself: name a file, not standard input"}
	}
	searched, err := searchedDate(c)
	if err != nil {
		return nil, e, err
	}
	files, err := ingest.Load(c.Context, path)
	if err != nil {
		return nil, e, err
	}
	state, err := ledger.Compute(c.Context, files, path, call)
	if err != nil {
		return nil, e, err
	}
	if err := somethingPooled(state.Synthesis); err != nil {
		return nil, e, err
	}
	e = ledger.Entry{Files: files}
	results, studies := ledger.ResultsOf(state.Synthesis)
	e.Studies = studies
	e.Record = ledger.Record{
		At: clock().UTC().Format(time.RFC3339), Program: version, Searched: searched, By: strings.TrimSpace(c.String(flagBy)), Note: strings.TrimSpace(c.String(flagNote)),
		Input: ledger.Input{Call: call}, Plan: ledger.PlanOf(state.Synthesis.Plan, state.Extraction.Outcomes()), Results: results,
	}
	return state, e, nil
}

// somethingPooled returns an error with every outcome's problem if no outcome has a
// result.
func somethingPooled(s *synthesis.Synthesis) error {
	var problems []string
	for _, o := range s.Outcomes {
		if o.Result != nil {
			return nil
		}
		problem := o.Problem
		if o.Name != "" {
			problem = o.Name + ": " + problem
		}
		problems = append(problems, problem)
	}
	if len(problems) == 0 {
		problems = append(problems, "the sheet has no rows")
	}
	return fmt.Errorf("nothing can be pooled, so nothing is recorded: %s", strings.Join(problems, "; "))
}

// searchedDate reads --searched: a whole date, at most a day ahead of the clock.
func searchedDate(c *cli.Context) (string, error) {
	text := strings.TrimSpace(c.String(flagSearched))
	if text == "" {
		if c.IsSet(flagSearched) {
			return "", &callError{"--searched needs a date, such as 2026-11-30"}
		}
		return "", nil
	}
	day, err := time.Parse(time.DateOnly, text)
	switch {
	case err != nil:
		return "", &callError{fmt.Sprintf("--searched: %q is no date; write year, month and day, such as 2026-11-30", text)}
	case day.After(clock().UTC().AddDate(0, 0, 1)):
		return "", &callError{fmt.Sprintf("--searched: %s lies ahead of this computer's clock (%s); is the year right?", text, clock().UTC().Format(time.DateOnly))}
	}
	return text, nil
}

// whoWrites names this process to others that want to write.
func whoWrites(c *cli.Context) string {
	host, err := os.Hostname()
	if err != nil {
		host = "a computer without a name"
	}
	who := fmt.Sprintf("process %d on %s, since %s", os.Getpid(), host, clock().UTC().Format(time.RFC3339))
	if by := strings.TrimSpace(c.String(flagBy)); by != "" {
		who = by + ", " + who
	}
	return who
}

// looksDraws reads --looks; ok is false where nothing is to be simulated.
func looksDraws(c *cli.Context, s *synthesis.Synthesis) (draws accrual.Draws, ok bool, err error) {
	n := c.Int(flagLooks)
	if n == 0 {
		return draws, false, nil
	}
	if n < leastDraws || n > mostDraws {
		return draws, false, &callError{fmt.Sprintf("--looks %d: give 0 for none, or %d to %d sequences to simulate", n, leastDraws, mostDraws)}
	}
	work, err := work(c)
	if err != nil {
		return draws, false, err
	}
	a, err := s.Plan.Analysis("")
	if err != nil {
		return draws, false, err
	}
	return accrual.Draws{N: n, Seed: a.Model.Seed, Work: work}, true, nil
}

// triggered says that a trigger was met and --fail-on-trigger given; the output has
// said which.
type triggered struct{}

func (*triggered) Error() string { return "a trigger is met" }
