package ingest

import (
	"archive/zip"
	"bytes"
	"context"
	"errors"
	"hash/crc32"
	"io"
	"math/rand/v2"
	"os"
	"strings"
	"testing"

	"steelyard/ingest/grid"
)

// mutator damages a workbook in many ways, the same ones for the same seed.
type mutator struct {
	random *rand.Rand
	whole  []byte
	names  []string
	parts  map[string][]byte
}

func newMutator(t testing.TB, data []byte) *mutator {
	t.Helper()
	z, err := zip.NewReader(bytes.NewReader(data), int64(len(data)))
	if err != nil {
		t.Fatal(err)
	}
	m := &mutator{random: rand.New(rand.NewPCG(1, 2)), whole: data, parts: map[string][]byte{}}
	for _, f := range z.File {
		r, err := f.Open()
		if err != nil {
			t.Fatal(err)
		}
		content, err := io.ReadAll(r)
		if err != nil {
			t.Fatal(err)
		}
		m.names = append(m.names, f.Name)
		m.parts[f.Name] = content
	}
	return m
}

// next returns another damaged workbook: the packed bytes changed, or a part
// changed and packed soundly again.
func (m *mutator) next() []byte {
	if m.random.IntN(4) == 0 {
		return m.damage(m.whole)
	}
	name := m.names[m.random.IntN(len(m.names))]
	var b bytes.Buffer
	z := zip.NewWriter(&b)
	for _, other := range m.names {
		content := m.parts[other]
		if other == name {
			content = m.damage(content)
		}
		h := &zip.FileHeader{Name: other, CRC32: crc32.ChecksumIEEE(content), CompressedSize64: uint64(len(content)), UncompressedSize64: uint64(len(content))}
		w, err := z.CreateRaw(h)
		if err == nil {
			_, err = w.Write(content)
		}
		if err != nil {
			panic(err)
		}
	}
	if err := z.Close(); err != nil {
		panic(err)
	}
	return b.Bytes()
}

// pieces are put where they do not belong.
var pieces = []string{"<", ">", "/>", `"`, "</row>", "<row r=\"1\">", "<c r=\"XFD1\"><v>1e308</v></c>", "&#x202e;", "999999999", "-1", "NaN", "\x00", "\xff", "]]>", "<!DOCTYPE a>", "t=\"s\"", "t=\"e\"", "_x0000_"}

// damage changes a copy of data in one to four places.
func (m *mutator) damage(data []byte) []byte {
	out := bytes.Clone(data)
	for range 1 + m.random.IntN(4) {
		if len(out) == 0 {
			return out
		}
		i := m.random.IntN(len(out))
		n := min(1+m.random.IntN(40), len(out)-i)
		switch m.random.IntN(6) {
		case 0:
			out[i] ^= 1 << m.random.IntN(8)
		case 1:
			out = append(out[:i:i], out[i+n:]...)
		case 2:
			out = append(out[:i+n:i+n], out[i:]...)
		case 3:
			out = append(out[:i:i], append([]byte(pieces[m.random.IntN(len(pieces))]), out[i:]...)...)
		case 4:
			out = out[:i]
		default: // digits become others, so that numbers and references change
			for j := i; j < i+n; j++ {
				if '0' <= out[j] && out[j] <= '9' {
					out[j] = byte('0' + m.random.IntN(10))
				}
			}
		}
	}
	return out
}

// tryMutants reads n damaged workbooks: each is an extraction whose numbers are in
// order, or an error; never both, neither or a fault of the program.
func tryMutants(t *testing.T, n int) {
	demo, err := os.ReadFile(demoFile)
	if err != nil {
		t.Fatal(err)
	}
	m := newMutator(t, demo)
	read, refused := 0, 0
	for range n {
		data := m.next()
		x, plan, err := Read(context.Background(), data, "a.csv", Options{})
		if (err == nil) != (x != nil) || (err == nil) != (plan != nil) {
			t.Fatalf("extraction %v and plan %v with error %v", x != nil, plan != nil, err)
		}
		if err != nil {
			var fault *grid.FileError
			if errors.As(err, &fault) && strings.Contains(fault.Problem, "fault of this program") {
				t.Fatal(err)
			}
			refused++
			continue
		}
		read++
		for i := range x.Studies {
			checkStudy(t, &x.Studies[i])
		}
	}
	if read < n/20 || refused < n/20 {
		t.Errorf("%d mutants were read and %d refused; the damage is too small or too great to test anything", read, refused)
	}
}

// TestMutants tries a thousand damaged workbooks; make soak tries ten thousand.
func TestMutants(t *testing.T) { tryMutants(t, 1000) }
