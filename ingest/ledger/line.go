package ledger

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"fmt"
	"slices"
	"strconv"
	"strings"
)

// Version is the newest format of the ledger that this program reads, and the one
// that it writes.
const Version = 1

// headWord begins the ledger's first line; the version follows.
const headWord = "steelyard-ledger "

// root is the parent of the first state.
var root = strings.Repeat("0", hex.EncodedLen(sha256.Size))

// header returns the first line of a ledger, without its end.
func header() string { return headWord + strconv.Itoa(Version) }

// checkHeader returns an error unless the first line is one of a ledger that this
// program reads.
func checkHeader(line string) error {
	rest, ok := strings.CutPrefix(line, headWord)
	version, err := strconv.Atoi(rest)
	switch {
	case !ok || err != nil || version < 1 || strconv.Itoa(version) != rest:
		return &DamageError{Line: 1, Text: fmt.Sprintf("%q is not how a ledger begins; it begins with %q. Restore the line", shorten(line), header())}
	case version > Version:
		return &NewerError{Version: version}
	}
	return nil
}

func shorten(text string) string {
	const most = 40
	if len(text) > most {
		return strings.ToValidUTF8(text[:most], "") + "…"
	}
	return strings.ToValidUTF8(text, "?")
}

// encode returns the line of a state, without its end, and the state's checksum.
func encode(parent string, r Record, studies [][]StudyShare) (line []byte, sum string, err error) {
	var b bytes.Buffer
	b.WriteString(parent)
	e := json.NewEncoder(&b)
	e.SetEscapeHTML(false)
	for _, part := range []any{r, studies} {
		b.WriteByte(separator)
		if err := e.Encode(part); err != nil {
			return nil, "", fmt.Errorf("ledger: the state cannot be written as text: %w", err)
		}
		b.Truncate(b.Len() - 1) // the line end that the encoder writes
	}
	sum = checksum(b.Bytes())
	return slices.Concat([]byte(sum), []byte{separator}, b.Bytes()), sum, nil
}

// separator parts the fields of a line; JSON texts never hold it as it is.
const separator = '\t'

func checksum(body []byte) string {
	sum := sha256.Sum256(body)
	return hex.EncodeToString(sum[:])
}

// parsed is a line as it was read.
type parsed struct {
	sum, parent     string
	record, studies []byte
	stray           int // bytes after the end of the line's fields
}

// parse splits a line without its end; ok is false if its checksum is not right.
// Bytes after fields whose checksum is right are counted as stray.
func parse(line []byte) (p parsed, ok bool) {
	fields := bytes.SplitN(line, []byte{separator}, 4)
	if len(fields) != 4 || len(fields[0]) != len(root) || len(fields[1]) != len(root) {
		return p, false
	}
	p = parsed{sum: string(fields[0]), parent: string(fields[1]), record: fields[2], studies: fields[3]}
	body := line[len(root)+1:]
	if checksum(body) == p.sum {
		return p, true
	}
	d := json.NewDecoder(bytes.NewReader(p.studies))
	var list json.RawMessage
	if d.Decode(&list) != nil {
		return p, false
	}
	end := int(d.InputOffset())
	p.stray = len(p.studies) - end
	p.studies = p.studies[:end]
	return p, p.stray > 0 && checksum(body[:len(body)-p.stray]) == p.sum
}

// conflictMark reports whether a line is one that version control leaves between
// the two sides of a conflict.
func conflictMark(line []byte) bool {
	for _, mark := range []string{"<<<<<<<", "=======", ">>>>>>>", "|||||||"} {
		if bytes.HasPrefix(line, []byte(mark)) {
			return true
		}
	}
	return false
}
