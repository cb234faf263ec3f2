package grid

import (
	"archive/zip"
	"bytes"
	"compress/flate"
	"context"
	"encoding/xml"
	"errors"
	"fmt"
	"io"
	"net/url"
	"path"
	"strings"
)

const (
	getAgain       = "get the file again, or open and save it in a spreadsheet program"
	saveAsWorkbook = "save it as .xlsx or .csv"
)

// archive is the zip package of a workbook. Parts are opened by name one at a
// time, and what they unpack to is counted together.
type archive struct {
	ctx      context.Context
	file     string
	entries  map[string]*zip.File // by lower-case name with forward slashes
	repeated map[string]bool      // names that stand twice
	unzipped int64
}

// openArchive reads the package's directory.
func openArchive(ctx context.Context, data []byte, file string) (*archive, error) {
	// The directory's own count can lie, and the zip package reads all of it.
	if n := bytes.Count(data, []byte("PK\x01\x02")); n > MaxEntries {
		return nil, &FileError{File: file, Problem: fmt.Sprintf("holds %d packed parts, more than the limit of %d", n, MaxEntries), Remedy: saveAsWorkbook + " without pictures and embedded files"}
	}
	z, err := zip.NewReader(bytes.NewReader(data), int64(len(data)))
	if err != nil {
		return nil, &FileError{File: file, Problem: "is cut short or damaged: the directory of its packed parts cannot be read", Remedy: getAgain, Err: err}
	}
	a := &archive{ctx: ctx, file: file, entries: map[string]*zip.File{}, repeated: map[string]bool{}}
	for _, entry := range z.File {
		name := partKey(entry.Name)
		if a.entries[name] != nil {
			a.repeated[name] = true
		}
		a.entries[name] = entry
	}
	return a, nil
}

// partKey brings a part's name to the form in which names are compared.
func partKey(name string) string {
	return strings.ToLower(strings.TrimPrefix(strings.ReplaceAll(name, `\`, "/"), "/"))
}

func (a *archive) has(part string) bool { return a.entries[partKey(part)] != nil }

// refuse blames a part.
func (a *archive) refuse(part, problem string) *FileError {
	return &FileError{File: a.file, Part: part, Problem: problem, Remedy: getAgain}
}

// open opens a part, which must exist once.
func (a *archive) open(part string) (*partReader, error) {
	key := partKey(part)
	entry := a.entries[key]
	switch {
	case entry == nil:
		return nil, a.refuse(part, "is missing in the workbook")
	case a.repeated[key]:
		return nil, a.refuse(part, "stands twice in the workbook, so that it is not clear which counts")
	case entry.Flags&1 != 0:
		return nil, &FileError{File: a.file, Part: part, Problem: "is encrypted", Remedy: "remove the password and save it again"}
	case entry.UncompressedSize64 > MaxPartBytes:
		return nil, a.tooLarge(part, MaxPartBytes)
	}
	r, err := entry.Open()
	if err != nil {
		e := a.refuse(part, "cannot be unpacked: "+err.Error())
		e.Err = err
		return nil, e
	}
	return &partReader{archive: a, part: part, r: r, packed: max(int64(entry.CompressedSize64), 1)}, nil
}

func (a *archive) tooLarge(part string, limit int64) *FileError {
	return &FileError{File: a.file, Part: part, Problem: fmt.Sprintf("unpacks to more than %d MB, the limit", limit>>20),
		Remedy: "save the sheet of studies alone, or as .csv"}
}

// explain puts an error met while reading a part into a *FileError.
func (a *archive) explain(part string, err error) *FileError {
	var known *FileError
	var syntax *xml.SyntaxError
	var corrupt flate.CorruptInputError
	e := a.refuse(part, "cannot be read: "+err.Error())
	e.Err = err
	switch {
	case errors.As(err, &known):
		return known
	case a.ctx.Err() != nil:
		return interrupted(a.file, a.ctx.Err())
	case errors.Is(err, zip.ErrChecksum):
		e.Problem = "is damaged: its checksum is not that of its content, so that values may have changed"
	case errors.As(err, &corrupt), errors.Is(err, io.ErrUnexpectedEOF), errors.Is(err, zip.ErrFormat):
		e.Problem = "is damaged or cut short: it cannot be unpacked to its end"
	case errors.As(err, &syntax):
		e.Place = fmt.Sprintf("line %d", syntax.Line)
		e.Problem = "is damaged or cut short: " + syntax.Msg
	}
	return e
}

// partReader unpacks a part and enforces the limits.
type partReader struct {
	archive *archive
	part    string
	r       io.ReadCloser
	packed  int64
	offset  int64 // unpacked so far
	err     error
}

// Read unpacks on.
func (p *partReader) Read(b []byte) (int, error) {
	if p.err == nil {
		p.err = p.archive.ctx.Err()
	}
	if p.err != nil {
		return 0, p.err
	}
	n, err := p.r.Read(b)
	p.offset += int64(n)
	p.archive.unzipped += int64(n)
	switch {
	case p.offset > MaxPartBytes:
		err = p.archive.tooLarge(p.part, MaxPartBytes)
	case p.archive.unzipped > MaxUnzippedBytes:
		err = p.archive.tooLarge("", MaxUnzippedBytes)
	case p.offset > RatioFreeBytes && p.offset > MaxRatio*p.packed:
		err = &FileError{File: p.archive.file, Part: p.part, Problem: fmt.Sprintf("unpacks to more than %d times its size, as only files made to exhaust a computer do", MaxRatio),
			Remedy: "get the file from a source you trust"}
	default:
		p.err = err
		return n, err
	}
	p.err = err
	return 0, err
}

func (p *partReader) close() { p.r.Close() }

// relation is a reference from one part of a package to another.
type relation struct {
	id, kind, target string // kind is the last word of the type, such as "worksheet"; target a part's name
	external         bool
}

// relations reads the references of a part; a part without any has none.
func (a *archive) relations(part string) ([]relation, error) {
	dir, base := path.Split(part)
	rels := dir + "_rels/" + base + ".rels"
	if !a.has(rels) {
		return nil, nil
	}
	var list []relation
	err := a.read(rels, "", []string{"http://schemas.openxmlformats.org/package/2006/relationships"}, "Relationships", func(x *xmlPart) error {
		return x.children(func(e xml.StartElement) error {
			if e.Name.Local == "Relationship" {
				list = append(list, relation{
					id:       attribute(e, "Id"),
					kind:     path.Base(attribute(e, "Type")),
					target:   resolve(dir, attribute(e, "Target")),
					external: attribute(e, "TargetMode") == "External",
				})
			}
			return x.skip()
		})
	})
	return list, err
}

// resolve returns the name of the part that a target means.
func resolve(dir, target string) string {
	if unescaped, err := url.PathUnescape(target); err == nil {
		target = unescaped
	}
	target = strings.ReplaceAll(target, `\`, "/")
	if !strings.HasPrefix(target, "/") {
		target = path.Join("/", dir, target)
	}
	return strings.TrimPrefix(path.Clean(target), "/")
}
