package forest

import (
	"bytes"
	"compress/zlib"
	"encoding/binary"
	"hash/crc32"
	"image"
	"io"
	"math"
	"sync"
)

// The filters of a row of pixels in a PNG that are used here.
const (
	asItIs       = 0
	sinceLastRow = 2
)

// pngSignature begins every PNG file.
const pngSignature = "\x89PNG\r\n\x1a\n"

// squeezers keeps compressors, whose tables are large, from file to file.
var squeezers = sync.Pool{New: func() any {
	z, err := zlib.NewWriterLevel(nil, zlib.BestSpeed)
	if err != nil {
		panic("forest: " + err.Error()) // only for a level that does not exist
	}
	return z
}}

// encodePNG writes an opaque picture as a PNG file that states its resolution. Source:
// W3C, Portable Network Graphics specification (third edition), chapters 5, 9 and 11.
//
// The general encoder of the standard library tries five filters on every row, which took
// twice as long as all the drawing. In a drawing of flat areas two do better: a row like
// the one above it becomes zeros, any other stays as it is.
func encodePNG(w io.Writer, picture *image.RGBA, dpi int) error {
	var file bytes.Buffer
	file.WriteString(pngSignature)
	width, height := picture.Rect.Dx(), picture.Rect.Dy()
	header := binary.BigEndian.AppendUint32(nil, uint32(width))
	header = binary.BigEndian.AppendUint32(header, uint32(height))
	chunk(&file, "IHDR", append(header, 8, 2, 0, 0, 0)) // 8 bits each of red, green and blue; not interlaced
	perMetre := uint32(math.Round(float64(dpi) / 0.0254))
	resolution := binary.BigEndian.AppendUint32(nil, perMetre)
	resolution = binary.BigEndian.AppendUint32(resolution, perMetre)
	chunk(&file, "pHYs", append(resolution, 1)) // 1: per metre
	var pixels bytes.Buffer
	if err := squeeze(&pixels, picture); err != nil {
		return err
	}
	chunk(&file, "IDAT", pixels.Bytes())
	chunk(&file, "IEND", nil)
	_, err := w.Write(file.Bytes())
	return err
}

// chunk adds a part of a PNG file: length, name, content and check sum.
func chunk(file *bytes.Buffer, name string, content []byte) {
	number := binary.BigEndian.AppendUint32(nil, uint32(len(content)))
	file.Write(number)
	sum := crc32.NewIEEE()
	both := io.MultiWriter(file, sum)
	io.WriteString(both, name)
	both.Write(content)
	file.Write(binary.BigEndian.AppendUint32(nil, sum.Sum32()))
}

// squeeze writes the compressed rows of a picture.
func squeeze(w io.Writer, picture *image.RGBA) error {
	z := squeezers.Get().(*zlib.Writer)
	defer squeezers.Put(z)
	z.Reset(w)
	width := picture.Rect.Dx()
	same := make([]byte, 1+3*width)
	same[0] = sinceLastRow
	row := make([]byte, 1+3*width)
	row[0] = asItIs
	var above []byte
	for y := range picture.Rect.Dy() {
		line := picture.Pix[y*picture.Stride:][:4*width]
		out := same
		if !bytes.Equal(line, above) {
			out = row
			for from, to := 0, 1; from < len(line); from, to = from+4, to+3 {
				row[to], row[to+1], row[to+2] = line[from], line[from+1], line[from+2]
			}
		}
		if _, err := z.Write(out); err != nil {
			return err
		}
		above = line
	}
	return z.Close()
}
