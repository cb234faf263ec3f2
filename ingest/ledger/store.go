package ledger

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"strings"

	"steelyard/ingest"
)

// Store is a ledger held for writing; no other process writes until it is closed.
type Store struct {
	*Ledger
	dir  string
	lock *lockFile
	// write puts bytes into a file; a test lets it fail.
	write func(f *os.File, data []byte) (int, error)
}

// Entry is a state to be recorded; the store fills in what names the input files,
// and the joined ends of a fork.
type Entry struct {
	Record  Record
	Studies [][]StudyShare // of each of the record's results
	Files   *ingest.Files
}

const (
	attributesName = ".gitattributes"
	ignoreName     = ".gitignore"
)

var attributeLines = []string{"*.ledger text eol=lf merge=union", "sheets/* -text"}

var ignoreLines = []string{lockName, ".steelyard-*"}

// Start makes a folder into that of a new ledger, with a first state, and makes
// the folder itself if need be. who names the process to others that want to write. It returns an
// *ExistsError if the folder has a ledger, a *BusyError or a *WriteError.
func Start(ctx context.Context, dir, who string, e Entry) (*State, error) {
	s := &Store{Ledger: &Ledger{Dir: dir, byHash: map[string]int{}}, dir: dir, write: (*os.File).Write}
	return s.start(ctx, who, e)
}

func (s *Store) start(ctx context.Context, who string, e Entry) (*State, error) {
	if err := os.MkdirAll(s.dir, 0o777); err != nil {
		return nil, &WriteError{File: filepath.Base(s.dir), Err: err}
	}
	path := filepath.Join(s.dir, fileName)
	if _, err := os.Lstat(path); err == nil {
		return nil, &ExistsError{Dir: s.dir}
	}
	held, err := lock(ctx, s.dir, who, patience)
	if err != nil {
		return nil, err
	}
	defer held.release()
	if _, err := os.Lstat(path); err == nil { // begun while this process waited
		return nil, &ExistsError{Dir: s.dir}
	}
	if err := s.fill(&e); err != nil {
		return nil, err
	}
	line, sum, err := encode(root, e.Record, e.Studies)
	if err != nil {
		return nil, err
	}
	for name, lines := range map[string][]string{attributesName: attributeLines, ignoreName: ignoreLines} {
		file := filepath.Join(s.dir, name)
		if _, err := os.Lstat(file); errors.Is(err, fs.ErrNotExist) {
			if err := s.writeWhole(file, []byte(strings.Join(lines, "\n")+"\n")); err != nil {
				return nil, err
			}
		}
	}
	if err := s.writeWhole(path, fmt.Appendf(nil, "%s\n%s\n", header(), line)); err != nil {
		return nil, err
	}
	return &State{Number: 1, Hash: sum, Parent: root, Record: e.Record}, nil
}

// Hold opens the ledger of a folder for writing; who names the process to others.
// The caller closes the store. Its errors are those of Open, a *BusyError or a
// *WriteError.
func Hold(ctx context.Context, dir, who string) (*Store, error) {
	if info, err := os.Stat(filepath.Join(dir, fileName)); err != nil || info.IsDir() { // nothing is written into a wrong folder
		return nil, &NoLedgerError{Dir: dir}
	}
	held, err := lock(ctx, dir, who, patience)
	if err != nil {
		return nil, err
	}
	l, err := Open(dir)
	if err != nil {
		held.release()
		return nil, err
	}
	return &Store{Ledger: l, dir: dir, lock: held, write: (*os.File).Write}, nil
}

// Close lets other processes write.
func (s *Store) Close() { s.lock.release() }

// Append records a state after the last one. When it returns without an error the
// state is on the disk. It returns a *DamageError if a line is not as it was
// written, since what follows it would hide that, or a *WriteError; nothing is
// recorded then. setAside names the file that an unfinished line was put into,
// blank if there was none.
func (s *Store) Append(e Entry) (state *State, setAside string, err error) {
	if p := s.Damaged(); p != nil {
		return nil, "", &DamageError{Line: p.Line, Text: p.Text + ". Nothing was recorded"}
	}
	ends := s.Ends()
	parent := root
	for i, at := range ends {
		if hash := s.States[at].Hash; i == len(ends)-1 {
			parent = hash
		} else {
			e.Record.Joins = append(e.Record.Joins, hash)
		}
	}
	if err := s.fill(&e); err != nil {
		return nil, "", err
	}
	line, sum, err := encode(parent, e.Record, e.Studies)
	if err != nil {
		return nil, "", err
	}
	if setAside, err = s.putAside(); err != nil {
		return nil, "", err
	}
	if err := s.appendLine(line); err != nil {
		return nil, setAside, err
	}
	s.count++
	added := State{Number: s.count - 1, Hash: sum, Parent: parent, Record: e.Record}
	s.byHash[sum] = len(s.States)
	s.States = append(s.States, added)
	return &added, setAside, nil
}

// fill stores the input files and names them in the record.
func (s *Store) fill(e *Entry) error {
	var err error
	in := &e.Record.Input
	if in.Sheet, err = s.store(e.Files.Sheet); err != nil {
		return err
	}
	for _, one := range []struct {
		file *ingest.File
		to   **Stored
	}{{e.Files.Plan, &in.Plan}, {e.Files.Judgement, &in.Judgement}} {
		if one.file == nil {
			continue
		}
		name, err := s.store(*one.file)
		if err != nil {
			return err
		}
		*one.to = &name
	}
	return nil
}

// putAside copies an unfinished last line into a file of its own, makes that
// durable, and takes the line off the ledger.
func (s *Store) putAside() (name string, err error) {
	if s.Torn == nil {
		return "", nil
	}
	for n := 1; ; n++ {
		name = fmt.Sprintf("%s.torn-%d", fileName, n)
		if _, err := os.Lstat(filepath.Join(s.dir, name)); err != nil {
			break
		}
	}
	if err := s.writeWhole(filepath.Join(s.dir, name), s.Torn); err != nil {
		return "", err
	}
	f, err := os.OpenFile(filepath.Join(s.dir, fileName), os.O_RDWR, 0)
	if err == nil {
		err = errors.Join(f.Truncate(s.good), f.Sync(), f.Close())
	}
	if err != nil {
		return "", &WriteError{File: fileName, Err: err}
	}
	s.Torn = nil
	return name, nil
}

// appendLine writes a line at the end of the ledger with one call and makes it
// durable. What a failed call has written is taken off again.
func (s *Store) appendLine(line []byte) error {
	f, err := os.OpenFile(filepath.Join(s.dir, fileName), os.O_RDWR|os.O_APPEND, 0)
	if err != nil {
		return &WriteError{File: fileName, Err: err}
	}
	defer f.Close()
	info, err := f.Stat()
	if err != nil {
		return &WriteError{File: fileName, Err: err}
	}
	if info.Size() != s.good {
		return &BusyError{Who: "a process that does not hold the lock"}
	}
	data := append(bytes.Clone(line), '\n')
	if !s.ended {
		data = append([]byte{'\n'}, data...)
	}
	if _, err = s.write(f, data); err == nil {
		err = f.Sync()
	}
	if err != nil {
		_ = f.Truncate(s.good) // an unfinished line is set aside by the next update
		return &WriteError{File: fileName, Err: err}
	}
	s.good, s.ended = s.good+int64(len(data)), true
	return nil
}
