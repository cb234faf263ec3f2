package ledger

import (
	"bytes"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"steelyard/ingest"
	"steelyard/ingest/grid"
)

// sheetsName is the folder of the input sheets.
const sheetsName = "sheets"

// stored returns how a record names a file.
func stored(f ingest.File) Stored { return Stored{File: f.Name, SHA256: checksum(f.Data)} }

// path returns where the file stands below the ledger's folder, by its content.
func (s Stored) path() string {
	ending := strings.ToLower(filepath.Ext(s.File))
	if !slices.Contains([]string{".csv", ".tsv", ".txt", ".xlsx", ".xlsm"}, ending) {
		ending = ""
	}
	return filepath.Join(sheetsName, s.SHA256+ending)
}

// SheetError reports an input sheet that is not as it was stored.
type SheetError struct {
	Stored
	Problem string
	Err     error
}

// Error names the file and what to do.
func (e *SheetError) Error() string {
	return fmt.Sprintf("%s (%s): %s; restore it from version control or another copy of the folder", filepath.ToSlash(e.path()), e.File, e.Problem)
}

// Unwrap returns the system's error, if one is the cause.
func (e *SheetError) Unwrap() error { return e.Err }

// Sheet returns an input file as it was when it was stored. Line ends that version
// control has changed in a text file are changed back. It returns a *SheetError if
// the file is missing, or is another.
func (l *Ledger) Sheet(s Stored) (ingest.File, error) {
	if len(s.SHA256) != len(root) || strings.Trim(s.SHA256, "0123456789abcdef") != "" {
		return ingest.File{}, &SheetError{Stored: Stored{File: s.File}, Problem: "its record names no checksum"}
	}
	path := filepath.Join(l.Dir, s.path())
	info, err := os.Stat(path)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return ingest.File{}, &SheetError{Stored: s, Problem: "the input sheet is missing", Err: err}
	case err == nil && (!info.Mode().IsRegular() || info.Size() > 2*grid.MaxFileBytes):
		return ingest.File{}, &SheetError{Stored: s, Problem: "it is no file of an input sheet's size"}
	}
	data, err := os.ReadFile(path)
	if err != nil {
		return ingest.File{}, &SheetError{Stored: s, Problem: "the input sheet cannot be read", Err: err}
	}
	if data, ok := restored(data, s.SHA256); ok {
		return ingest.File{Name: s.File, Data: data}, nil
	}
	return ingest.File{}, &SheetError{Stored: s, Problem: "the input sheet has been changed since it was stored"}
}

// restored returns the bytes that have the checksum: the data, or the data with
// other line ends.
func restored(data []byte, sum string) ([]byte, bool) {
	if checksum(data) == sum {
		return data, true
	}
	unix := bytes.ReplaceAll(data, []byte("\r\n"), []byte("\n"))
	if checksum(unix) == sum {
		return unix, true
	}
	dos := bytes.ReplaceAll(unix, []byte("\n"), []byte("\r\n"))
	return dos, checksum(dos) == sum
}

// store writes an input file by its content unless it stands there already.
func (s *Store) store(f ingest.File) (Stored, error) {
	name := stored(f)
	path := filepath.Join(s.dir, name.path())
	if have, err := os.ReadFile(path); err == nil && checksum(have) == name.SHA256 {
		return name, nil
	}
	if err := os.MkdirAll(filepath.Dir(path), 0o777); err != nil {
		return name, &WriteError{File: sheetsName, Err: err}
	}
	return name, s.writeWhole(path, f.Data)
}

// writeWhole writes a file whole or not at all: to a temporary file in its folder,
// made durable, then renamed.
func (s *Store) writeWhole(path string, data []byte) error {
	folder, base := filepath.Split(path)
	temporary, err := os.CreateTemp(folder, ".steelyard-*")
	if err != nil {
		return &WriteError{File: base, Err: err}
	}
	defer os.Remove(temporary.Name()) // gone after the rename: then it does nothing
	_, err = s.write(temporary, data)
	err = errors.Join(err, temporary.Chmod(0o644), temporary.Sync(), temporary.Close())
	if err == nil {
		err = os.Rename(temporary.Name(), path)
	}
	if err != nil {
		return &WriteError{File: base, Err: err}
	}
	syncFolder(folder)
	return nil
}

// syncFolder makes a rename durable where the system can; a failure costs nothing
// but that.
func syncFolder(folder string) {
	if f, err := os.Open(folder); err == nil {
		_ = f.Sync()
		_ = f.Close()
	}
}
