package ingest

import (
	"bytes"
	"context"
	"errors"
	"io/fs"
	"path/filepath"

	"steelyard/ingest/grid"
	"steelyard/meta/review"
)

// File is an input file: its base name and its bytes.
type File struct {
	Name string
	Data []byte
}

// Files are a sheet and what stands beside a text file; nil where there is none.
type Files struct {
	Sheet           File
	Plan, Judgement *File
}

// beside holds the books of the files beside a text file, nil where there is none.
type beside struct{ plan, judgement *grid.Book }

// besideFile is a file that may stand beside a text file, and how an empty one is
// complained of.
type besideFile struct {
	path                func(sheet string) string
	file                func(*Files) **File
	book                func(*beside) **grid.Book
	what, head, without string
}

var besideFiles = []besideFile{
	{
		planPath, func(f *Files) **File { return &f.Plan }, func(b *beside) **grid.Book { return &b.plan },
		"the plan", "setting and value", "a plan",
	},
	{
		judgementPath, func(f *Files) **File { return &f.Judgement }, func(b *beside) **grid.Book { return &b.judgement },
		"the file of judgements", "outcome, domain, rating and reason", "judgements",
	},
}

// Load returns the bytes that Open reads. The error is a *grid.FileError.
func Load(ctx context.Context, path string) (*Files, error) {
	data, err := grid.Load(ctx, path)
	if err != nil {
		return nil, err
	}
	f := &Files{Sheet: File{Name: filepath.Base(path), Data: data}}
	if bytes.HasPrefix(data, []byte("PK\x03\x04")) { // a workbook has sheets for these
		return f, nil
	}
	for _, one := range besideFiles {
		data, err := grid.Load(ctx, one.path(path))
		switch {
		case err == nil:
			*one.file(f) = &File{Name: filepath.Base(one.path(path)), Data: data}
		case !errors.Is(err, fs.ErrNotExist):
			return nil, err
		}
	}
	return f, nil
}

// Read reads the files as Open does; path is what the user calls the sheet, for
// messages.
func (f *Files) Read(ctx context.Context, path string, o Options) (*review.Extraction, *review.Plan, error) {
	book, err := grid.Read(ctx, f.Sheet.Data, f.Sheet.Name)
	if err != nil {
		return nil, nil, err
	}
	var with beside
	for _, one := range besideFiles {
		file := *one.file(f)
		if file == nil || !book.Text {
			continue
		}
		read, err := grid.Read(ctx, file.Data, file.Name)
		if err != nil {
			return nil, nil, besideError(err, one)
		}
		*one.book(&with) = read
	}
	x, p, err := read(ctx, book, with, o)
	var unknown *HeaderError
	if errors.As(err, &unknown) {
		unknown.Call = Call{Path: path, Sheet: o.Sheet}
	}
	return x, p, err
}

// besideError says of an empty file beside a sheet what belongs into it.
func besideError(err error, of besideFile) error {
	var file *grid.FileError
	if errors.As(err, &file) && file.Problem == "is empty" {
		empty := *file
		empty.Problem = of.what + " beside the sheet is empty"
		empty.Remedy = "write " + of.head + " above its rows, or delete the file to go without " + of.without
		return &empty
	}
	return err
}
