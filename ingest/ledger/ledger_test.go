package ledger

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"syscall"
	"testing"
	"time"

	"steelyard/ingest"
)

// sheetText is an input sheet of one study; n tells sheets apart.
func sheetText(n int) []byte { return fmt.Appendf(nil, "study,estimate,se\nA,%d,0.5\n", n) }

func entry(n int) Entry {
	return Entry{
		Record:  Record{At: fmt.Sprintf("2026-01-02T03:%02d:%02dZ", n/60%60, n%60), Program: "0.1", Note: fmt.Sprintf("note %d", n), Results: []OutcomeRecord{}},
		Studies: [][]StudyShare{},
		Files:   &ingest.Files{Sheet: ingest.File{Name: "t.csv", Data: sheetText(n)}},
	}
}

// started makes a ledger of n states.
func started(t *testing.T, n int) string {
	t.Helper()
	dir := filepath.Join(t.TempDir(), "review")
	if _, err := Start(t.Context(), dir, "test", entry(1)); err != nil {
		t.Fatal(err)
	}
	for i := 2; i <= n; i++ {
		add(t, dir, entry(i))
	}
	return dir
}

func add(t *testing.T, dir string, e Entry) (*State, string) {
	t.Helper()
	s, err := Hold(t.Context(), dir, "test")
	if err != nil {
		t.Fatal(err)
	}
	defer s.Close()
	state, setAside, err := s.Append(e)
	if err != nil {
		t.Fatal(err)
	}
	return state, setAside
}

func bytesOf(t *testing.T, dir string) []byte {
	t.Helper()
	data, err := os.ReadFile(filepath.Join(dir, fileName))
	if err != nil {
		t.Fatal(err)
	}
	return data
}

func put(t *testing.T, dir, name string, data []byte) {
	t.Helper()
	if err := os.WriteFile(filepath.Join(dir, name), data, 0o644); err != nil {
		t.Fatal(err)
	}
}

func opened(t *testing.T, dir string) *Ledger {
	t.Helper()
	l, err := Open(dir)
	if err != nil {
		t.Fatal(err)
	}
	return l
}

func verified(t *testing.T, l *Ledger) []Problem {
	t.Helper()
	all, err := l.Verify(t.Context())
	if err != nil {
		t.Fatal(err)
	}
	return all
}

// TestFormat pins the documented format: the line was put together, and its
// SHA-256 computed, by python3's hashlib.
func TestFormat(t *testing.T) {
	dir := filepath.Join(t.TempDir(), "a", "b")
	_, err := Start(t.Context(), dir, "test", Entry{
		Record:  Record{At: "2026-01-02T03:04:05Z", Program: "0.1", By: "Ada <a@b>", Note: "a\nb & c", Results: []OutcomeRecord{}},
		Studies: [][]StudyShare{{{Study: "A", Estimate: 1, SE: 0.5, Weight: 1}}},
		Files:   &ingest.Files{Sheet: ingest.File{Name: "t.csv", Data: sheetText(1)}},
	})
	if err != nil {
		t.Fatal(err)
	}
	want := "steelyard-ledger 1\n" +
		"f6cf9c9664988b639872c3e123dc8e77e6d51e87067e263197fb52ad856f5f11\t0000000000000000000000000000000000000000000000000000000000000000\t{\"at\":\"2026-01-02T03:04:05Z\",\"program\":\"0.1\",\"by\":\"Ada <a@b>\",\"note\":\"a\\nb & c\",\"input\":{\"sheet\":{\"file\":\"t.csv\",\"sha256\":\"63a095a1407f98cacf4697e5e3a84ed90490ebb9dbd79696c491918ab450ec2f\"},\"call\":{}},\"results\":[]}\t[[[\"A\",1,0.5,1]]]\n"
	if got := string(bytesOf(t, dir)); got != want {
		t.Errorf("the ledger is\n%s\nwant\n%s", got, want)
	}
	if data, err := os.ReadFile(filepath.Join(dir, "sheets", "63a095a1407f98cacf4697e5e3a84ed90490ebb9dbd79696c491918ab450ec2f.csv")); err != nil || !bytes.Equal(data, sheetText(1)) {
		t.Errorf("the sheet is stored as %q, %v", data, err)
	}
}

// TestStates: states stand in the order of their lines, each follows the one
// before, and are called by number or checksum, wherever the folder is moved.
func TestStates(t *testing.T) {
	dir := started(t, 5)
	moved := filepath.Join(t.TempDir(), "elsewhere")
	if err := os.Rename(dir, moved); err != nil {
		t.Fatal(err)
	}
	l := opened(t, moved)
	if len(l.States) != 5 || len(verified(t, l)) != 0 {
		t.Fatalf("%d states, problems %v", len(l.States), verified(t, l))
	}
	for i := range l.States {
		s := &l.States[i]
		if want := fmt.Sprintf("note %d", i+1); s.Number != i+1 || s.Record.Note != want {
			t.Errorf("state %d is %d, %q", i+1, s.Number, s.Record.Note)
		}
		if before := l.Before(s); i > 0 && (before == nil || before.Number != i) || i == 0 && before != nil {
			t.Errorf("state %d follows %v", i+1, before)
		}
		for _, name := range []string{fmt.Sprint(i + 1), fmt.Sprintf("#%d", i+1), s.Short(), strings.ToUpper(s.Hash)} {
			if got, err := l.State(name); err != nil || got.Number != i+1 {
				t.Errorf("State(%q) = %v, %v", name, got, err)
			}
		}
		file, err := l.Sheet(s.Record.Input.Sheet)
		if err != nil || !bytes.Equal(file.Data, sheetText(i+1)) || file.Name != "t.csv" {
			t.Errorf("sheet of state %d: %q, %v", i+1, file.Data, err)
		}
	}
	var unknown *UnknownStateError
	for _, name := range []string{"0", "6", "-1", "", "zzzz", "last"} {
		if _, err := l.State(name); !errors.As(err, &unknown) || unknown.Last != 5 {
			t.Errorf("State(%q): %v", name, err)
		}
	}
}

// TestEveryByte changes every byte of a ledger: each change is found, in its line.
func TestEveryByte(t *testing.T) {
	dir := started(t, 3)
	whole := bytesOf(t, dir)
	line := 1
	for i, b := range whole {
		for _, other := range []byte{b ^ 1, b ^ 0x20, '\n', 0} {
			if other == b {
				continue
			}
			changed := bytes.Clone(whole)
			changed[i] = other
			if found := foundIn(changed); !slices.Contains(found, line) {
				t.Fatalf("byte %d (%q to %q) of line %d: found in lines %v", i, b, other, line, found)
			}
		}
		if b == '\n' {
			line++
		}
	}
}

// foundIn returns the lines in which something is found.
func foundIn(data []byte) []int {
	l, err := read("", data)
	var damage *DamageError
	var newer *NewerError
	switch {
	case errors.As(err, &damage):
		return []int{damage.Line}
	case errors.As(err, &newer):
		return []int{1}
	}
	var lines []int
	for _, p := range l.Problems {
		lines = append(lines, p.Line)
	}
	return lines
}

// TestLostLine: a line that is lost between others is found in the one after it.
func TestLostLine(t *testing.T) {
	lines := bytes.SplitAfter(bytesOf(t, started(t, 4)), []byte("\n"))
	data := slices.Concat(lines[0], lines[1], lines[3], lines[4])
	if found := foundIn(data); !slices.Equal(found, []int{3}) {
		t.Errorf("found in lines %v, want 3, which follows the lost one", found)
	}
	data = slices.Concat(lines[0], lines[1], lines[3], lines[2], lines[4])
	if found := foundIn(data); !slices.Equal(found, []int{3}) {
		t.Errorf("two lines in the other order: found in lines %v, want 3", found)
	}
}

// TestLineEnds: version control may end lines with CRLF, in the ledger and in
// sheets.
func TestLineEnds(t *testing.T) {
	dir := started(t, 3)
	put(t, dir, fileName, bytes.ReplaceAll(bytesOf(t, dir), []byte("\n"), []byte("\r\n")))
	l := opened(t, dir)
	sheet := l.States[1].Record.Input.Sheet
	put(t, dir, sheet.path(), bytes.ReplaceAll(sheetText(2), []byte("\n"), []byte("\r\n")))
	if all := verified(t, l); len(l.States) != 3 || len(all) != 0 {
		t.Fatalf("%d states, problems %v", len(l.States), all)
	}
	if file, err := l.Sheet(sheet); err != nil || !bytes.Equal(file.Data, sheetText(2)) {
		t.Errorf("the sheet is %q, %v", file.Data, err)
	}
	if state, _ := add(t, dir, entry(4)); state.Number != 4 {
		t.Errorf("the next state is %d", state.Number)
	}
	if l := opened(t, dir); len(l.States) != 4 || l.Damaged() != nil {
		t.Errorf("after an update: %d states, %v", len(l.States), l.Problems)
	}
}

// TestTorn cuts the last line short everywhere: the states before it are whole,
// nothing of it is counted, and the next update sets it aside.
func TestTorn(t *testing.T) {
	dir := started(t, 3)
	whole := bytesOf(t, dir)
	start := bytes.LastIndexByte(whole[:len(whole)-1], '\n') + 1
	for end := start + 1; end < len(whole)-1; end += 7 {
		put(t, dir, fileName, whole[:end])
		l := opened(t, dir)
		if len(l.States) != 2 || !bytes.Equal(l.Torn, whole[start:end]) || l.Damaged() != nil {
			t.Fatalf("cut at %d: %d states, torn %q, %v", end, len(l.States), l.Torn, l.Problems)
		}
		if all := verified(t, l); len(all) != 1 || all[0].Line != 4 {
			t.Fatalf("cut at %d: verify says %v, want line 4", end, all)
		}
		state, aside := add(t, dir, entry(9))
		kept, err := os.ReadFile(filepath.Join(dir, aside))
		if err != nil || !bytes.Equal(kept, whole[start:end]) || state.Number != 3 {
			t.Fatalf("cut at %d: state %d, set aside %q in %q, %v", end, state.Number, kept, aside, err)
		}
		if l := opened(t, dir); len(l.States) != 3 || len(verified(t, l)) != 0 {
			t.Fatalf("cut at %d: afterwards %d states, %v", end, len(l.States), verified(t, l))
		}
	}
	put(t, dir, fileName, whole[:len(whole)-1]) // the record is whole, the line end lost
	if l := opened(t, dir); len(l.States) != 3 || l.Torn != nil {
		t.Fatalf("without the last line end: %d states, torn %q", len(l.States), l.Torn)
	}
	if state, aside := add(t, dir, entry(9)); state.Number != 4 || aside != "" {
		t.Errorf("without the last line end: next state %d, set aside %q", state.Number, aside)
	}
	if l := opened(t, dir); len(l.States) != 4 || l.Damaged() != nil {
		t.Errorf("without the last line end: %d states, %v", len(l.States), l.Problems)
	}
}

// TestFork: two lines with one parent are both kept, the fork is named, and the next
// update joins it.
func TestFork(t *testing.T) {
	dir := started(t, 2)
	common := bytesOf(t, dir)
	add(t, dir, entry(3))
	ours := bytesOf(t, dir)
	put(t, dir, fileName, common)
	add(t, dir, entry(4))
	theirs := bytesOf(t, dir)[len(common):]
	put(t, dir, fileName, slices.Concat(ours, theirs))

	l := opened(t, dir)
	if ends := l.Ends(); len(l.States) != 4 || !slices.Equal(ends, []int{2, 3}) {
		t.Fatalf("%d states, ends %v", len(l.States), l.Ends())
	}
	if all := verified(t, l); len(all) != 1 || all[0].Line != 5 || !strings.Contains(all[0].Text, "states 3 and 4 all follow state 2") {
		t.Fatalf("verify says %v", all)
	}
	state, _ := add(t, dir, entry(5))
	l = opened(t, dir)
	if !slices.Equal(state.Record.Joins, []string{l.States[2].Hash}) || state.Parent != l.States[3].Hash || len(l.Ends()) != 1 {
		t.Errorf("the next state joins %v, follows %s; ends %v", state.Record.Joins, state.Parent, l.Ends())
	}

	marked := slices.Concat(common, []byte("<<<<<<< ours\n"), ours[len(common):], []byte("=======\n"), theirs, []byte(">>>>>>> theirs\n"))
	if found := foundIn(marked); !slices.Equal(found, []int{4, 6, 8, 7}) {
		t.Errorf("marks of a conflict, and the fork in line 7, found in lines %v", found)
	}
	put(t, dir, fileName, slices.Concat(ours, ours[len(common):]))
	if l := opened(t, dir); len(l.States) != 3 || l.Damaged() != nil || len(l.Problems) != 1 || l.Problems[0].Line != 5 {
		t.Errorf("a line given twice: %d states, %v", len(l.States), l.Problems)
	}
	put(t, dir, "steelyard (conflicted copy).ledger", common)
	if all := verified(t, opened(t, dir)); !strings.Contains(fmt.Sprint(all), "conflicted copy") {
		t.Errorf("a second ledger is not reported: %v", all)
	}
}

// TestClockBack: a state recorded before the one it follows is noted and kept.
func TestClockBack(t *testing.T) {
	dir := started(t, 3)
	add(t, dir, entry(1))
	l := opened(t, dir)
	if len(l.States) != 4 || len(l.Problems) != 1 || l.Problems[0].Line != 5 || l.Problems[0].Gravity != Note {
		t.Errorf("%d states, %v", len(l.States), l.Problems)
	}
}

// TestRefused: a newer format, other files and damage end in errors, and nothing is
// written.
func TestRefused(t *testing.T) {
	dir := started(t, 2)
	whole := bytesOf(t, dir)
	var newer *NewerError
	var damage *DamageError
	var none *NoLedgerError
	var exists *ExistsError
	for text, target := range map[string]any{
		"steelyard-ledger 2\n" + string(whole[19:]):  &newer,
		"steelyard-ledger 12\n":                      &newer,
		"steelyard-ledger 01\n" + string(whole[19:]): &damage,
		"study,estimate,se\n":                        &damage,
		"":                                           &damage,
	} {
		put(t, dir, fileName, []byte(text))
		if _, err := Open(dir); !errors.As(err, target) {
			t.Errorf("%.30q: %v", text, err)
		}
		if _, err := Hold(t.Context(), dir, "test"); !errors.As(err, target) {
			t.Errorf("to write, %.30q: %v", text, err)
		}
		if got := bytesOf(t, dir); string(got) != text {
			t.Errorf("%.30q was changed", text)
		}
	}
	changed := bytes.Clone(whole)
	changed[200] ^= 1
	put(t, dir, fileName, changed)
	s, err := Hold(t.Context(), dir, "test")
	if err != nil {
		t.Fatal(err)
	}
	_, _, err = s.Append(entry(3))
	s.Close()
	if !errors.As(err, &damage) || damage.Line != 2 || !bytes.Equal(bytesOf(t, dir), changed) {
		t.Errorf("an update beside damage: %v", err)
	}
	if _, err := Start(t.Context(), dir, "test", entry(1)); !errors.As(err, &exists) {
		t.Errorf("started anew: %v", err)
	}
	empty := t.TempDir()
	if _, err := Hold(t.Context(), empty, "test"); !errors.As(err, &none) {
		t.Errorf("without a ledger: %v", err)
	}
	if entries, _ := os.ReadDir(empty); len(entries) != 0 {
		t.Errorf("a wrong folder was written into: %v", entries)
	}
	if _, err := Open(filepath.Join(dir, fileName)); err == nil {
		t.Error("a file was taken for a folder")
	}
}

// TestFind looks for the ledger upwards.
func TestFind(t *testing.T) {
	dir := started(t, 1)
	deep := filepath.Join(dir, "a", "b")
	if err := os.MkdirAll(deep, 0o755); err != nil {
		t.Fatal(err)
	}
	if got, err := Find(deep); err != nil || got != dir {
		t.Errorf("Find = %q, %v, want %q", got, err, dir)
	}
	var none *NoLedgerError
	if _, err := Find(filepath.Dir(dir)); !errors.As(err, &none) {
		t.Errorf("above it: %v", err)
	}
}

// TestLock: a second process is refused by the name of the first, or waits.
func TestLock(t *testing.T) {
	dir := started(t, 1)
	first, err := lock(t.Context(), dir, "Ada, process 7", 0)
	if err != nil {
		t.Fatal(err)
	}
	var busy *BusyError
	if _, err := lock(t.Context(), dir, "Bob", 40*time.Millisecond); !errors.As(err, &busy) || busy.Who != "Ada, process 7" {
		t.Fatalf("the second is told: %v", err)
	}
	ctx, cancel := context.WithCancel(t.Context())
	cancel()
	if _, err := lock(ctx, dir, "Bob", time.Minute); !errors.Is(err, context.Canceled) {
		t.Errorf("interrupted while waiting: %v", err)
	}
	got := make(chan error)
	go func() {
		second, err := lock(t.Context(), dir, "Bob", time.Minute)
		if err == nil {
			second.release()
		}
		got <- err
	}()
	time.Sleep(30 * time.Millisecond)
	first.release()
	if err := <-got; err != nil {
		t.Errorf("the second waited in vain: %v", err)
	}
}

// TestWriteFails: a full disk or a folder that may not be written to leaves what was
// recorded as it was, and says what to do.
func TestWriteFails(t *testing.T) {
	dir := started(t, 2)
	whole := bytesOf(t, dir)
	for _, cause := range []error{syscall.ENOSPC, syscall.EROFS, os.ErrPermission} {
		for _, failing := range []string{".steelyard-", fileName} {
			s, err := Hold(t.Context(), dir, "test")
			if err != nil {
				t.Fatal(err)
			}
			s.write = func(f *os.File, data []byte) (int, error) {
				if strings.Contains(f.Name(), failing) {
					n, _ := f.Write(data[:len(data)/2])
					return n, &os.PathError{Op: "write", Path: f.Name(), Err: cause}
				}
				return f.Write(data)
			}
			_, _, err = s.Append(entry(7))
			s.Close()
			var failed *WriteError
			if !errors.As(err, &failed) || !errors.Is(err, cause) {
				t.Fatalf("%v at %s: %v", cause, failing, err)
			}
			want := "may not be written to"
			if cause == syscall.ENOSPC {
				want = "the disk is full: make room"
			}
			if !strings.Contains(err.Error(), want) || strings.Contains(err.Error(), dir) {
				t.Errorf("the message is %q, want %q and no path", err, want)
			}
			if l := opened(t, dir); !bytes.Equal(bytesOf(t, dir), whole) || len(verified(t, l)) != 0 {
				t.Errorf("%v at %s changed the ledger: %v", cause, failing, verified(t, l))
			}
		}
		if left, _ := filepath.Glob(filepath.Join(dir, "sheets", ".steelyard-*")); len(left) > 0 {
			t.Errorf("left behind: %v", left)
		}
		if err := os.RemoveAll(filepath.Join(dir, stored(entry(7).Files.Sheet).path())); err != nil {
			t.Fatal(err)
		}
	}
	if state, _ := add(t, dir, entry(3)); state.Number != 3 {
		t.Errorf("the next state is %d", state.Number)
	}
	at := filepath.Join(dir, fileName, "below a file")
	var failed *WriteError
	if _, err := Start(t.Context(), at, "test", entry(1)); !errors.As(err, &failed) {
		t.Errorf("started below a file: %v", err)
	}
}

// TestSheets: a sheet that is missing or changed is found, in the line of the state.
func TestSheets(t *testing.T) {
	dir := started(t, 3)
	l := opened(t, dir)
	sheet := l.States[1].Record.Input.Sheet
	for _, spoil := range []func() error{
		func() error { return os.WriteFile(filepath.Join(dir, sheet.path()), []byte("study\n"), 0o644) },
		func() error { return os.Remove(filepath.Join(dir, sheet.path())) },
		func() error { return os.Mkdir(filepath.Join(dir, sheet.path()), 0o755) },
	} {
		if err := spoil(); err != nil {
			t.Fatal(err)
		}
		var wrong *SheetError
		if _, err := l.Sheet(sheet); !errors.As(err, &wrong) {
			t.Errorf("the sheet is read: %v", err)
		}
		if all := verified(t, l); len(all) != 1 || all[0].Line != 3 || all[0].Gravity != Damage {
			t.Errorf("verify says %v, want line 3", all)
		}
	}
	if _, err := l.Sheet(Stored{File: "x.csv", SHA256: "../../etc/passwd"}); err == nil {
		t.Error("a record without a checksum names a file")
	}
	os.Remove(filepath.Join(dir, sheet.path()))
	if _, err := Hold(t.Context(), dir, "test"); err != nil {
		t.Fatal(err)
	}
}

// TestAttributes: what version control needs is written, and its want is noted.
func TestAttributes(t *testing.T) {
	dir := started(t, 1)
	text, err := os.ReadFile(filepath.Join(dir, attributesName))
	if err != nil || !strings.Contains(string(text), "*.ledger text eol=lf merge=union\n") {
		t.Fatalf("%q, %v", text, err)
	}
	if err := os.Remove(filepath.Join(dir, attributesName)); err != nil {
		t.Fatal(err)
	}
	if all := verified(t, opened(t, dir)); len(all) != 1 || all[0].Gravity != Note || !strings.Contains(all[0].Text, "merge=union") {
		t.Errorf("verify says %v", all)
	}
}

// TestTwoAppends records two states while the store is held.
func TestTwoAppends(t *testing.T) {
	dir := started(t, 1)
	s, err := Hold(t.Context(), dir, "test")
	if err != nil {
		t.Fatal(err)
	}
	defer s.Close()
	for n := 2; n <= 3; n++ {
		state, _, err := s.Append(entry(n))
		if err != nil || state.Number != n {
			t.Fatalf("state %v, %v", state, err)
		}
	}
	if l := opened(t, dir); len(l.States) != 3 || l.Damaged() != nil || len(l.Ends()) != 1 {
		t.Errorf("%d states, %v", len(l.States), l.Problems)
	}
}
