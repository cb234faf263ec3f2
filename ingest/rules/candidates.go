package rules

import (
	"encoding/binary"
	"hash/fnv"
	"math"
	"strings"
	"unicode"

	"steelyard/meta/review"
)

// print is the hash of some of a row's numbers, or of its folded name: rows are
// compared only within one print, so that a sheet is gone through once however
// many rows it has.
type print uint64

// printOf hashes the numbers of some fields; ok is false where one is missing.
func (r *row) printOf(fields ...review.Field) (p print, ok bool) {
	h := fnv.New64a()
	var bytes [9]byte
	for _, f := range fields {
		n, ok := r.number(f)
		if !ok {
			return 0, false
		}
		bytes[0] = byte(f)
		binary.LittleEndian.PutUint64(bytes[1:], math.Float64bits(n.Value))
		_, _ = h.Write(bytes[:]) // a hash never fails to be written to
	}
	return print(h.Sum64()), true
}

// fields returns the fields of which the row has a number, in order.
func (r *row) fields() []review.Field {
	fields := make([]review.Field, len(r.Numbers))
	for i, n := range r.Numbers {
		fields[i] = n.Field
	}
	return fields
}

// equal reports whether two rows have the same numbers of some fields.
func equal(a, b *row, fields ...review.Field) bool {
	for _, f := range fields {
		x, okA := a.number(f)
		y, okB := b.number(f)
		if !okA || !okB || x.Value != y.Value {
			return false
		}
	}
	return len(fields) > 0
}

// mostCompanions bounds how many earlier rows of the same print a row is compared
// with.
const mostCompanions = 30

// index holds the rows seen so far by print.
type index map[print][]*row

// before returns the earlier rows of the print, and adds the row to them.
func (x index) before(p print, r *row) []*row {
	earlier := x[p]
	if len(earlier) < mostCompanions {
		x[p] = append(earlier, r)
	}
	return earlier
}

// textPrint hashes texts.
func textPrint(texts ...string) print {
	h := fnv.New64a()
	for _, text := range texts {
		_, _ = h.Write([]byte(text)) // a hash never fails to be written to
		_, _ = h.Write([]byte{0})
	}
	return print(h.Sum64())
}

// foldedWords returns the words by which names are compared.
func foldedWords(name string) []string { return strings.Fields(review.FoldName(name)) }

// identity returns what tells one study from another: its id, else its name
// without what stands in parentheses.
func (r *row) identity() string {
	if r.ID != "" {
		return "id " + r.ID
	}
	name := r.Name
	if open := strings.IndexByte(name, '('); open > 0 {
		name = name[:open]
	}
	return strings.Join(foldedWords(name), " ")
}

// registration returns the row's folded registration number.
func (r *row) registration() string { return r.remark(review.Registration) }

// firstAuthor returns the first word of a study's name that is no common word;
// blank where there is none.
func (r *row) firstAuthor() string {
	for _, word := range foldedWords(r.Name) {
		if len(word) > 2 && !commonWords[word] && !strings.ContainsAny(word, "0123456789") {
			return word
		}
	}
	return ""
}

// commonWords stand in names of studies and are no author's.
var commonWords = map[string]bool{"trial": true, "study": true, "group": true, "centre": true, "center": true, "site": true, "cohort": true,
	"school": true, "hospital": true, "the": true, "van": true, "von": true, "der": true, "den": true, "row": true, "arm": true, "paper": true}

// similar reports whether two rows may be of one study by name: the same id or
// registration, or folded names with the same digits and letters that differ by two
// edits at most.
func similar(a, b *row) bool {
	if reg := a.registration(); reg != "" && reg == b.registration() {
		return true
	}
	if a.ID != "" && a.ID == b.ID {
		return true
	}
	lettersA, digitsA := lettersAndDigits(a.Name)
	lettersB, digitsB := lettersAndDigits(b.Name)
	return digitsA == digitsB && len(lettersA) > 4 && len(lettersB) > 4 && edits(lettersA, lettersB) <= 2
}

func lettersAndDigits(name string) (letters, digits string) {
	var l, d strings.Builder
	for _, r := range strings.Join(foldedWords(name), "") {
		if unicode.IsDigit(r) {
			d.WriteRune(r)
		} else {
			l.WriteRune(r)
		}
	}
	return l.String(), d.String()
}

// edits returns how many letters must be added, taken out or replaced to turn one
// text into the other (Levenshtein's distance).
func edits(a, b string) int {
	from, to := []rune(a), []rune(b)
	last := make([]int, len(to)+1)
	for j := range last {
		last[j] = j
	}
	for i := range from {
		diagonal := last[0]
		last[0] = i + 1
		for j := range to {
			cost := 1
			if from[i] == to[j] {
				cost = 0
			}
			diagonal, last[j+1] = last[j+1], min(last[j+1]+1, last[j]+1, diagonal+cost)
		}
	}
	return last[len(to)]
}

// year returns the year of the row's date, else the one in its name, 0 if none.
func (r *row) year() int {
	if r.Date.Year != 0 {
		return r.Date.Year
	}
	for _, word := range foldedWords(r.Name) {
		if len(word) >= 4 && (word[:2] == "19" || word[:2] == "20") && unicode.IsDigit(rune(word[2])) && unicode.IsDigit(rune(word[3])) {
			return int(word[0]-'0')*1000 + int(word[1]-'0')*100 + int(word[2]-'0')*10 + int(word[3]-'0')
		}
	}
	return 0
}
