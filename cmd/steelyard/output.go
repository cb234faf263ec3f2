package main

import (
	"bytes"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"

	"github.com/urfave/cli/v2"
)

// deliver writes a result to --out, or to the terminal without it or for "-".
func deliver(c *cli.Context, content []byte) error {
	path := c.String(flagOut)
	if path == "" || path == "-" {
		if _, err := c.App.Writer.Write(content); err != nil {
			return &fileError{fmt.Errorf("writing the output: %w", err)}
		}
		return nil
	}
	return writeWhole(path, content, c.Bool(flagOverwrite))
}

// writeWhole writes a file whole or not at all: to a temporary file in the same
// folder, synced, then renamed. It never replaces a file unless told to.
func writeWhole(path string, content []byte, overwrite bool) error {
	file, err := createWhole(path, overwrite)
	if err != nil {
		return err
	}
	defer file.discard()
	if _, err := file.ReadFrom(bytes.NewReader(content)); err != nil {
		return file.failed(err)
	}
	return file.commit()
}

// wholeFile is a file that appears under its name when it is complete, or never.
type wholeFile struct {
	*os.File
	path string
}

// createWhole begins a file in the folder of path.
func createWhole(path string, overwrite bool) (*wholeFile, error) {
	existing, err := os.Lstat(path)
	switch {
	case err == nil && existing.IsDir():
		return nil, &callError{fmt.Sprintf("%s is a folder; name a file in it", path)}
	case err == nil && !overwrite:
		return nil, &callError{fmt.Sprintf("%s exists; add --overwrite to replace it, or choose another name", path)}
	}
	folder := filepath.Dir(path)
	temporary, err := os.CreateTemp(folder, ".steelyard-*")
	if err != nil {
		return nil, &fileError{fmt.Errorf("cannot write in folder %s: %w; choose a folder that exists and that you may write to", folder, plainCause(err))}
	}
	return &wholeFile{temporary, path}, nil
}

// commit gives the file its name.
func (f *wholeFile) commit() error {
	err := errors.Join(f.Chmod(0o644), f.Sync(), f.Close())
	if err == nil {
		err = os.Rename(f.Name(), f.path)
	}
	if err != nil {
		return f.failed(err)
	}
	syncFolder(filepath.Dir(f.path))
	return nil
}

// failed words an error of writing.
func (f *wholeFile) failed(err error) error {
	return &fileError{fmt.Errorf("cannot write %s: %w", f.path, plainCause(err))}
}

// discard takes away what was not committed; after a commit it does nothing.
func (f *wholeFile) discard() {
	_ = f.Close()
	_ = os.Remove(f.Name())
}

// syncFolder makes a rename durable where the system can; a failure costs
// nothing but that.
func syncFolder(folder string) {
	if f, err := os.Open(folder); err == nil {
		_ = f.Sync()
		_ = f.Close()
	}
}

// plainCause takes the operation and path off a system error.
func plainCause(err error) error {
	var path *fs.PathError
	if errors.As(err, &path) {
		return path.Err
	}
	return err
}
