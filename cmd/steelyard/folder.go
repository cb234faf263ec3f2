package main

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"steelyard/forest/report"
)

// manifestName is the file of a folder of results that lists the others.
const manifestName = "manifest.json"

// manifest lists the files of a folder of results: no other is ever replaced there.
type manifest struct {
	Writer string         `json:"writer"`
	Files  []manifestFile `json:"files"`
}

// manifestFile is a file with its name below the folder, "/" between folders.
type manifestFile struct {
	Name   string `json:"name"`
	SHA256 string `json:"sha256"`
}

// manifestWriter marks a manifest as ours.
const manifestWriter = "steelyard"

// checkFolder refuses a folder into which nothing may be written.
func checkFolder(folder string, overwrite bool) error {
	info, err := os.Stat(folder)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return nil
	case err != nil:
		return &fileError{fmt.Errorf("folder %s: %w", folder, plainCause(err))}
	case !info.IsDir():
		return &callError{fmt.Sprintf("--out %s is a file; name a folder", folder)}
	}
	if _, err := os.Lstat(filepath.Join(folder, manifestName)); err == nil && !overwrite {
		return &callError{fmt.Sprintf("%s holds an earlier report; add --overwrite to replace it, or choose another folder", folder)}
	}
	return nil
}

// writeFolder writes files to a folder: first aside, in a temporary folder inside it,
// then each is moved to its place, and the manifest last. A file that is in the way is
// replaced only with overwrite and only if the folder's manifest names it; files that
// an earlier manifest names and this one does not are removed.
func writeFolder(ctx context.Context, folder string, files []report.File, overwrite bool) error {
	if err := os.MkdirAll(folder, 0o755); err != nil {
		return &fileError{fmt.Errorf("cannot make folder %s: %w", folder, plainCause(err))}
	}
	ours, err := readManifest(folder)
	if err != nil {
		return err
	}
	for _, f := range files {
		_, err := os.Lstat(place(folder, f.Name))
		switch {
		case err != nil:
		case !slices.Contains(ours, f.Name):
			return &callError{fmt.Sprintf("%s exists in %s and is not of an earlier report; move it away, or choose another folder", f.Name, folder)}
		case !overwrite:
			return &callError{fmt.Sprintf("%s exists in %s; add --overwrite to replace it, or choose another folder", f.Name, folder)}
		}
	}
	aside, err := os.MkdirTemp(folder, ".steelyard-*")
	if err != nil {
		return &fileError{fmt.Errorf("cannot write in folder %s: %w; choose a folder that you may write to", folder, plainCause(err))}
	}
	defer os.RemoveAll(aside) // gone, or what an error left behind
	list := manifest{Writer: manifestWriter}
	for _, f := range files {
		if ctx.Err() != nil {
			return ctx.Err()
		}
		if err := writeAside(place(aside, f.Name), f.Content); err != nil {
			return err
		}
		sum := sha256.Sum256(f.Content)
		list.Files = append(list.Files, manifestFile{f.Name, hex.EncodeToString(sum[:])})
	}
	content, err := indented(list)
	if err != nil {
		return err
	}
	if err := writeAside(filepath.Join(aside, manifestName), content); err != nil {
		return err
	}
	return putInPlace(folder, aside, files, ours)
}

// putInPlace moves the files from aside to the folder, the manifest last.
func putInPlace(folder, aside string, files []report.File, ours []string) error {
	var names []string
	for _, f := range files {
		names = append(names, f.Name)
	}
	for _, name := range append(slices.Clone(names), manifestName) {
		target := place(folder, name)
		err := os.MkdirAll(filepath.Dir(target), 0o755)
		if err == nil {
			err = os.Rename(place(aside, name), target)
		}
		if err != nil {
			return &fileError{fmt.Errorf("cannot write %s: %w", target, plainCause(err))}
		}
	}
	for _, name := range ours {
		if !slices.Contains(names, name) {
			_ = os.Remove(place(folder, name)) // gone already, or no longer ours to judge
		}
	}
	syncFolder(folder)
	return nil
}

// place is where a file of a folder stands.
func place(folder, name string) string { return filepath.Join(folder, filepath.FromSlash(name)) }

// writeAside writes a new file and makes it durable.
func writeAside(path string, content []byte) error {
	err := os.MkdirAll(filepath.Dir(path), 0o755)
	var f *os.File
	if err == nil {
		f, err = os.OpenFile(path, os.O_WRONLY|os.O_CREATE|os.O_EXCL, 0o644)
	}
	if err == nil {
		_, err = f.Write(content)
		err = errors.Join(err, f.Sync(), f.Close())
	}
	if err != nil {
		return &fileError{fmt.Errorf("cannot write %s: %w", path, plainCause(err))}
	}
	return nil
}

// readManifest returns the names of the files that an earlier report wrote to a folder.
// Names that lead out of the folder are not believed.
func readManifest(folder string) ([]string, error) {
	path := filepath.Join(folder, manifestName)
	content, err := os.ReadFile(path)
	if errors.Is(err, fs.ErrNotExist) {
		return nil, nil
	}
	if err != nil {
		return nil, &fileError{fmt.Errorf("%s: %w", path, plainCause(err))}
	}
	var list manifest
	if err := json.Unmarshal(content, &list); err != nil || list.Writer != manifestWriter {
		return nil, &callError{fmt.Sprintf("%s is not the manifest of a report; move it away, or choose another folder", path)}
	}
	var names []string
	for _, f := range list.Files {
		if filepath.IsLocal(filepath.FromSlash(f.Name)) && !strings.Contains(f.Name, "\\") {
			names = append(names, f.Name)
		}
	}
	return names, nil
}
