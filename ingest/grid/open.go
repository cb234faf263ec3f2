package grid

import (
	"bytes"
	"context"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
)

// Open reads the file at path, see Read. "-" has no special meaning here.
func Open(ctx context.Context, path string) (*Book, error) {
	data, err := Load(ctx, path)
	if err != nil {
		return nil, err
	}
	return Read(ctx, data, filepath.Base(path))
}

// Load returns the bytes of the file at path, at most MaxFileBytes. The error is a
// *FileError.
func Load(ctx context.Context, path string) ([]byte, error) {
	name := filepath.Base(path)
	info, err := os.Stat(path)
	if err != nil {
		return nil, openError(name, err)
	}
	switch mode := info.Mode(); {
	case mode.IsDir():
		return nil, &FileError{File: name, Problem: "is a folder, not a file", Remedy: "name the workbook or text file in it"}
	case mode.Type()&^fs.ModeNamedPipe != 0:
		return nil, &FileError{File: name, Problem: "is a device or socket, not a file", Remedy: "name a workbook or text file"}
	}
	if info.Size() > MaxFileBytes {
		return nil, tooLarge(name)
	}
	f, err := os.Open(path)
	if err != nil {
		return nil, openError(name, err)
	}
	defer f.Close()
	return loadSized(ctx, f, name, info.Size())
}

// ReadFrom reads r to its end, see Read. It stops at MaxFileBytes.
func ReadFrom(ctx context.Context, r io.Reader, name string) (*Book, error) {
	data, err := loadSized(ctx, r, name, 0)
	if err != nil {
		return nil, err
	}
	return Read(ctx, data, name)
}

// loadSized reads r, of which size is the length if it is known.
func loadSized(ctx context.Context, r io.Reader, name string, size int64) ([]byte, error) {
	var data bytes.Buffer
	data.Grow(int(size) + bytes.MinRead)
	_, err := data.ReadFrom(io.LimitReader(contextReader{ctx, r}, MaxFileBytes+1))
	switch {
	case ctx.Err() != nil:
		return nil, interrupted(filepath.Base(name), ctx.Err())
	case err != nil:
		return nil, &FileError{File: filepath.Base(name), Problem: "cannot be read: " + err.Error(), Remedy: "check the disk or the connection and try again", Err: err}
	}
	return data.Bytes(), nil
}

func tooLarge(name string) *FileError {
	return &FileError{File: name, Problem: fmt.Sprintf("is larger than %d MB, the limit", MaxFileBytes>>20),
		Remedy: "keep only the sheet of studies, or split it"}
}

// contextReader ends with the context.
type contextReader struct {
	ctx context.Context
	r   io.Reader
}

func (c contextReader) Read(p []byte) (int, error) {
	if err := c.ctx.Err(); err != nil {
		return 0, err
	}
	return c.r.Read(p)
}

// openError puts a system error into words.
func openError(name string, err error) error {
	e := &FileError{File: name, Problem: "cannot be opened", Remedy: "check the name and the folder", Err: err}
	var pathErr *fs.PathError
	switch {
	case errors.Is(err, fs.ErrNotExist):
		e.Problem = "there is no such file"
	case errors.Is(err, fs.ErrPermission):
		e.Problem, e.Remedy = "you have no permission to read it", "change its permissions or copy it to a folder of your own"
	case errors.As(err, &pathErr):
		e.Problem += ": " + pathErr.Err.Error()
	}
	return e
}

func interrupted(name string, err error) *FileError {
	if errors.Is(err, context.DeadlineExceeded) {
		return &FileError{File: name, Problem: fmt.Sprintf("takes longer to read than %v, the limit", timeLimit),
			Remedy: "keep only the sheet of studies, or save it as .csv", Err: err}
	}
	return &FileError{File: name, Problem: "reading was interrupted (" + err.Error() + ")", Remedy: "run it again, or with more time", Err: err}
}

// timeLimit is MaxTime, but for tests.
var timeLimit = MaxTime

// Limited returns a context that ends with ctx and after MaxTime.
func Limited(ctx context.Context) (context.Context, context.CancelFunc) {
	return context.WithTimeout(ctx, timeLimit)
}

// Interrupted returns the error of a file whose reading the context has ended.
func Interrupted(ctx context.Context, file string) error { return interrupted(file, ctx.Err()) }

// readContent decides what the bytes are and has them read.
func readContent(ctx context.Context, data []byte, name string) (*Book, error) {
	ctx, cancel := Limited(ctx)
	defer cancel()
	name = filepath.Base(name)
	if len(data) > MaxFileBytes {
		return nil, tooLarge(name)
	}
	if err := refuseForeign(data, name); err != nil {
		return nil, err
	}
	sum := sha256.Sum256(data)
	book := &Book{File: name, SHA256: hex.EncodeToString(sum[:])}
	var err error
	if isZip(data) {
		err = readWorkbook(ctx, data, book)
	} else {
		err = readText(ctx, data, book)
	}
	if err != nil {
		return nil, err
	}
	return book, nil
}
