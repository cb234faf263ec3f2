package ledger

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"syscall"
)

const fileName = "steelyard.ledger"

// mostBytes bounds what is read of a ledger.
const mostBytes = 1 << 30

// State is one state of the review, as its line says.
type State struct {
	Number int // of its line less one: the first state is 1
	Hash   string
	Parent string // checksum of the state before; zeros for the first
	Record Record

	studies []byte // JSON, read when asked for
}

// Studies returns the pooled studies of each of the record's results.
func (s *State) Studies() ([][]StudyShare, error) {
	var all [][]StudyShare
	if err := json.Unmarshal(s.studies, &all); err != nil {
		return nil, &DamageError{Line: s.Line(), Text: "the studies are not written as this format writes them: " + err.Error()}
	}
	return all, nil
}

// Line returns the 1-based number of the state's line.
func (s *State) Line() int { return s.Number + 1 }

// Short returns the first digits of the state's checksum.
func (s *State) Short() string { return s.Hash[:8] }

// Ledger is a ledger as it was read. Lines that are damaged are no states; Problems
// names them.
type Ledger struct {
	Dir      string
	States   []State
	Problems []Problem
	Torn     []byte // a last line that was never finished; nil if there is none

	byHash map[string]int
	good   int64 // bytes before the torn line
	ended  bool  // the last line has a line end
	count  int   // lines, a torn one left out
}

// Find returns the nearest folder, dir or one above, that holds a ledger. It
// returns a *NoLedgerError if none does.
func Find(dir string) (string, error) {
	at, err := filepath.Abs(dir)
	if err != nil {
		return "", err
	}
	for up := dir; ; up = filepath.Join(up, "..") {
		if info, err := os.Stat(filepath.Join(at, fileName)); err == nil && !info.IsDir() {
			return filepath.Clean(up), nil
		}
		if filepath.Dir(at) == at {
			return "", &NoLedgerError{}
		}
		at = filepath.Dir(at)
	}
}

// Open reads the ledger of a folder. It writes nothing. It returns a
// *NoLedgerError, a *NewerError, a *DamageError if the first line is not one of a
// ledger, or the system's error; whatever else is wrong is in Problems.
func Open(dir string) (*Ledger, error) {
	f, err := os.Open(filepath.Join(dir, fileName))
	if errors.Is(err, fs.ErrNotExist) || errors.Is(err, syscall.ENOTDIR) {
		return nil, &NoLedgerError{Dir: dir}
	}
	if err != nil {
		return nil, err
	}
	defer f.Close()
	if info, err := f.Stat(); err == nil && info.IsDir() {
		return nil, &NoLedgerError{Dir: dir}
	}
	data, err := io.ReadAll(io.LimitReader(f, mostBytes+1))
	switch {
	case err != nil:
		return nil, err
	case len(data) > mostBytes:
		return nil, &DamageError{Line: 1, Text: fmt.Sprintf("the ledger is larger than %d MB, the limit. Is it another file?", mostBytes>>20)}
	}
	return read(dir, data)
}

// read takes the lines of a ledger apart.
func read(dir string, data []byte) (*Ledger, error) {
	l := &Ledger{Dir: dir, byHash: map[string]int{}, ended: true}
	for number := 1; len(data) > 0; number++ {
		line, rest, ended := bytes.Cut(data, []byte("\n"))
		size := int64(len(data) - len(rest))
		data = rest
		line = bytes.TrimSuffix(line, []byte("\r"))
		if number == 1 {
			if err := checkHeader(string(line)); err != nil {
				return nil, err
			}
		} else if !l.add(number, line, ended) {
			l.Torn = line
			break
		}
		l.good += size
		l.ended, l.count = ended, number
	}
	if l.good == 0 {
		return nil, &DamageError{Line: 1, Text: fmt.Sprintf("the ledger is empty; it begins with %q. Restore the file", header())}
	}
	l.findForks()
	return l, nil
}

// add takes a line of a state; false means that it was never finished.
func (l *Ledger) add(number int, line []byte, ended bool) bool {
	p, ok := parse(line)
	var record Record
	if ok {
		ok = json.Unmarshal(p.record, &record) == nil
	}
	switch {
	case len(bytes.TrimSpace(line)) == 0 && ended:
		l.find(number, Note, "the line is blank; delete it")
		return true
	case conflictMark(line):
		l.find(number, Damage, "version control has left its mark of a conflict here; delete the lines that begin with <<<<<<<, ======= and >>>>>>>, and keep all others")
		return true
	case !ok && !ended:
		return false
	case !ok:
		l.find(number, Damage, "the line is not as it was written: its checksum is another. Restore it from version control or another copy of the folder")
		return true
	}
	if p.stray > 0 {
		l.find(number, Damage, fmt.Sprintf("%d stray bytes follow the record, which is whole; delete them", p.stray))
	}
	if at, seen := l.byHash[p.sum]; seen {
		l.find(number, Note, fmt.Sprintf("the same as line %d; one of the two may be deleted", l.States[at].Line()))
		return true
	}
	state := State{Number: number - 1, Hash: p.sum, Parent: p.parent, Record: record, studies: p.studies}
	if at, known := l.byHash[p.parent]; known {
		if before := &l.States[at]; record.At < before.Record.At {
			l.find(number, Note, fmt.Sprintf("state %d was recorded at %s, before state %d (%s), which it follows: a clock was set back, or one of two computers is slow. The order is that of the lines", state.Number, record.At, before.Number, before.Record.At))
		}
	} else if p.parent != root || len(l.States) > 0 {
		l.find(number, Damage, fmt.Sprintf("state %d follows a state (%s) that stands in no line before it: a line is missing or damaged, or stands in another order", state.Number, p.parent[:8]))
	}
	l.byHash[p.sum] = len(l.States)
	l.States = append(l.States, state)
	return true
}

// findForks reports states with one parent that no later state joins.
func (l *Ledger) findForks() {
	children := map[string][]int{}
	for i := range l.States {
		children[l.States[i].Parent] = append(children[l.States[i].Parent], i)
	}
	open := l.Ends()
	for i := range l.States {
		those := children[l.States[i].Hash]
		if len(those) < 2 {
			continue
		}
		var numbers []string
		for _, j := range those {
			numbers = append(numbers, strconv.Itoa(l.States[j].Number))
		}
		text := fmt.Sprintf("a fork: states %s all follow state %d, as two people have updated apart from each other. All are kept", strings.Join(numbers, " and "), l.States[i].Number)
		if len(open) > 1 {
			text += "; the next update follows the last line and joins the others: put both sides' changes into the sheet before it"
		} else {
			text += ", and a later update has joined them"
		}
		l.find(l.States[those[1]].Line(), Note, text)
	}
}

// Ends returns the indices in States of those that no other follows or joins, in the
// order of the lines: one, or more while a fork is open.
func (l *Ledger) Ends() []int {
	followed := map[string]bool{}
	for i := range l.States {
		followed[l.States[i].Parent] = true
		for _, hash := range l.States[i].Record.Joins {
			followed[hash] = true
		}
	}
	var ends []int
	for i := range l.States {
		if !followed[l.States[i].Hash] {
			ends = append(ends, i)
		}
	}
	return ends
}

// Last returns the state of the last line, nil if there is none.
func (l *Ledger) Last() *State {
	if len(l.States) == 0 {
		return nil
	}
	return &l.States[len(l.States)-1]
}

// Before returns the state that another follows, nil for the first and where its
// line is missing.
func (l *Ledger) Before(s *State) *State {
	if at, known := l.byHash[s.Parent]; known {
		return &l.States[at]
	}
	return nil
}

// State returns a state by its number or the first digits, four or more, of its
// checksum. It returns an *UnknownStateError.
func (l *Ledger) State(name string) (*State, error) {
	unknown := &UnknownStateError{Name: name}
	if last := l.Last(); last != nil {
		unknown.Last = last.Number
	}
	if number, err := strconv.Atoi(strings.TrimPrefix(name, "#")); err == nil {
		for i := range l.States {
			if l.States[i].Number == number {
				return &l.States[i], nil
			}
		}
	}
	var found []int
	for i := range l.States {
		if len(name) >= 4 && strings.HasPrefix(l.States[i].Hash, strings.ToLower(name)) {
			found = append(found, i)
		}
	}
	if len(found) == 1 {
		return &l.States[found[0]], nil
	}
	for _, i := range found {
		unknown.Many = append(unknown.Many, l.States[i].Number)
	}
	return nil, unknown
}
