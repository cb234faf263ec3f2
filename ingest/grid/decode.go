package grid

import (
	"bytes"
	"fmt"
	"strings"
	"unicode/utf16"
	"unicode/utf8"

	"golang.org/x/text/encoding/charmap"
)

const saveAsUTF8 = "save it as CSV in UTF-8, or as .xlsx"

// decodeText turns a text file's bytes into UTF-8 without a byte order mark.
// remark says what had to be assumed, blank if nothing.
func decodeText(data []byte, file string) (text, remark string, err error) {
	refuse := func(place, problem string) (string, string, error) {
		return "", "", &FileError{File: file, Place: place, Problem: problem, Remedy: saveAsUTF8}
	}
	rest, marked := bytes.CutPrefix(data, []byte("\xef\xbb\xbf"))
	switch {
	case marked:
		data = rest
	case bytes.HasPrefix(data, []byte("\xff\xfe\x00\x00")), bytes.HasPrefix(data, []byte("\x00\x00\xfe\xff")):
		return refuse("", "is written in UTF-32, which hardly any program reads")
	case bytes.HasPrefix(data, []byte("\xff\xfe")):
		return decodeUTF16(data[2:], littleEndian, file)
	case bytes.HasPrefix(data, []byte("\xfe\xff")):
		return decodeUTF16(data[2:], bigEndian, file)
	default:
		if order := sniffUTF16(data); order != nil {
			text, _, err = decodeUTF16(data, order, file)
			return text, "read as UTF-16, for every other byte is zero", err
		}
	}
	if i := bytes.IndexByte(data, 0); i >= 0 {
		return refuse(linePlace(data, i), "is a binary file: it holds zero bytes, as no text does")
	}
	bad := invalidUTF8(data)
	if bad < 0 {
		return string(data), "", nil
	}
	if marked || hasMultibyte(data) {
		return refuse(linePlace(data, bad), fmt.Sprintf("is damaged or mixes encodings: most is UTF-8, but byte %#x is not", data[bad]))
	}
	return decodeWindows1252(data, file)
}

// decodeWindows1252 reads bytes in the encoding older spreadsheet programs use.
func decodeWindows1252(data []byte, file string) (text, remark string, err error) {
	for i, c := range data {
		switch c {
		case 0x81, 0x8d, 0x8f, 0x90, 0x9d: // unassigned in Windows-1252
			return "", "", &FileError{File: file, Place: linePlace(data, i),
				Problem: fmt.Sprintf("is neither UTF-8 nor Windows-1252 text (byte %#x)", c), Remedy: saveAsUTF8}
		}
	}
	size := len(data)
	for _, c := range data {
		if c >= utf8.RuneSelf {
			size += utf8.RuneLen(charmap.Windows1252.DecodeByte(c)) - 1
		}
	}
	var b strings.Builder
	b.Grow(size)
	for _, c := range data {
		b.WriteRune(charmap.Windows1252.DecodeByte(c))
	}
	return b.String(), "is not UTF-8 and was read as Windows-1252; check that accented letters are right", nil
}

// invalidUTF8 returns the index of the first byte that is not UTF-8, or -1.
func invalidUTF8(data []byte) int {
	if utf8.Valid(data) {
		return -1
	}
	for i := 0; i < len(data); {
		r, size := utf8.DecodeRune(data[i:])
		if r == utf8.RuneError && size == 1 {
			return i
		}
		i += size
	}
	return -1
}

// hasMultibyte reports whether any character beyond ASCII is valid UTF-8, which
// hardly happens by chance.
func hasMultibyte(data []byte) bool {
	for i := 0; i < len(data); {
		if data[i] < utf8.RuneSelf {
			i++
			continue
		}
		if r, size := utf8.DecodeRune(data[i:]); r != utf8.RuneError {
			return true
		} else {
			i += size
		}
	}
	return false
}

// linePlace names the line of a byte.
func linePlace(data []byte, index int) string {
	before := data[:index]
	lines := bytes.Count(before, []byte("\n"))
	if lines == 0 {
		lines = bytes.Count(before, []byte("\r"))
	}
	return fmt.Sprintf("line %d", lines+1)
}

type byteOrder func(a, b byte) uint16

func littleEndian(a, b byte) uint16 { return uint16(b)<<8 | uint16(a) }
func bigEndian(a, b byte) uint16    { return uint16(a)<<8 | uint16(b) }

// sniffUTF16 tells UTF-16 without a byte order mark by its zero bytes: Latin text
// has one in every other place and hardly any elsewhere. It returns nil for
// anything else.
func sniffUTF16(data []byte) byteOrder {
	sample := data[:min(len(data), 4096)&^1]
	var zeros [2]int
	for i, c := range sample {
		if c == 0 {
			zeros[i%2]++
		}
	}
	few, many := len(sample)/100, len(sample)*2/5
	switch {
	case len(sample) < 4:
		return nil
	case zeros[1] > many && zeros[0] <= few:
		return littleEndian
	case zeros[0] > many && zeros[1] <= few:
		return bigEndian
	}
	return nil
}

// decodeUTF16 decodes and refuses what is not UTF-16.
func decodeUTF16(data []byte, order byteOrder, file string) (text, remark string, err error) {
	if len(data)%2 != 0 {
		return "", "", &FileError{File: file, Problem: "is cut short: UTF-16 text of an odd number of bytes",
			Remedy: "get the file again, or " + saveAsUTF8}
	}
	var b strings.Builder
	b.Grow(len(data)/2 + len(data)/16)
	line := 1
	for i := 0; i < len(data); i += 2 {
		r := rune(order(data[i], data[i+1]))
		if utf16.IsSurrogate(r) {
			var low rune
			if i+3 < len(data) {
				low = rune(order(data[i+2], data[i+3]))
			}
			if r = utf16.DecodeRune(r, low); r == utf8.RuneError {
				return "", "", &FileError{File: file, Place: fmt.Sprintf("line %d", line),
					Problem: "is damaged: half a UTF-16 character", Remedy: "get the file again, or " + saveAsUTF8}
			}
			i += 2
		}
		switch r {
		case 0:
			return "", "", &FileError{File: file, Place: fmt.Sprintf("line %d", line),
				Problem: "is a binary file: it holds zero characters, as no text does", Remedy: saveAsUTF8}
		case '\n':
			line++
		}
		b.WriteRune(r)
	}
	return b.String(), "", nil
}
