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
	existing, err := os.Lstat(path)
	switch {
	case err == nil && existing.IsDir():
		return &callError{fmt.Sprintf("%s is a folder; name a file in it", path)}
	case err == nil && !overwrite:
		return &callError{fmt.Sprintf("%s exists; add --overwrite to replace it, or choose another name", path)}
	}
	folder := filepath.Dir(path)
	temporary, err := os.CreateTemp(folder, ".steelyard-*")
	if err != nil {
		return &fileError{fmt.Errorf("cannot write in folder %s: %w; choose a folder that exists and that you may write to", folder, plainCause(err))}
	}
	defer os.Remove(temporary.Name()) // gone after the rename: then it does nothing
	_, err = temporary.ReadFrom(bytes.NewReader(content))
	err = errors.Join(err, temporary.Chmod(0o644), temporary.Sync(), temporary.Close())
	if err == nil {
		err = os.Rename(temporary.Name(), path)
	}
	if err != nil {
		return &fileError{fmt.Errorf("cannot write %s: %w", path, plainCause(err))}
	}
	syncFolder(folder)
	return nil
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
