package main

import (
	"bytes"
	"encoding/json"
	"math"
	"strconv"
	"strings"

	"steelyard/meta"
	"steelyard/meta/effect"
)

// bulkColumns returns the names of the columns of results.
func bulkColumns(scaled, collection bool) string {
	names := []string{"set", "k", "estimate", "se", "ci_low", "ci_high"}
	if scaled {
		names = append(names, "effect", "effect_low", "effect_high")
	}
	names = append(names, "tau2", "i2", "ln_evidence", "steps", "word", "p", "ln_p")
	if collection {
		names = append(names, "p_adjusted", "ln_p_adjusted", "local_rate", "collection_ln_evidence", "collection_steps")
	}
	return strings.Join(names, ",") + "\n"
}

// write appends the row of a set's results, in full precision.
func (w *bulkWorker) write(r *bulkResult, set []byte, m *meta.Mean) {
	row := bulkRow{out: r.out, json: w.json}
	row.begin(set)
	row.whole("k", m.K)
	row.number("estimate", m.Estimate)
	row.number("se", m.SE)
	row.number("ci_low", m.Low)
	row.number("ci_high", m.High)
	if w.scaled {
		row.number("effect", effect.ToReader(w.rule.Measure, m.Estimate))
		row.number("effect_low", effect.ToReader(w.rule.Measure, m.Low))
		row.number("effect_high", effect.ToReader(w.rule.Measure, m.High))
	}
	row.number("tau2", m.Tau2)
	row.number("i2", w.pooler.I2())
	row.number("ln_evidence", m.Evidence.Ln())
	row.number("steps", m.Evidence.Steps())
	row.text("word", m.Evidence.Word().String())
	row.number("p", math.Exp(m.LnP))
	row.number("ln_p", m.LnP)
	r.out = row.end()
}

// bulkRow writes one row of results as CSV or as a JSON object.
type bulkRow struct {
	out  []byte
	json bool
}

func (r *bulkRow) begin(set []byte) {
	if r.json {
		r.out = append(r.out, `{"set":`...)
		quoted, _ := json.Marshal(string(set)) // a string can be written
		r.out = append(r.out, quoted...)
		return
	}
	r.out = appendCSV(r.out, set)
}

// key begins the next value.
func (r *bulkRow) key(name string) {
	r.out = append(r.out, ',')
	if r.json {
		r.out = append(append(append(r.out, '"'), name...), `":`...)
	}
}

func (r *bulkRow) whole(name string, n int) {
	r.key(name)
	r.out = strconv.AppendInt(r.out, int64(n), 10)
}

// number writes a number; one beyond the range of a float64, a ratio of an extreme
// logarithm, is null or blank.
func (r *bulkRow) number(name string, x float64) {
	r.key(name)
	switch {
	case !math.IsInf(x, 0) && !math.IsNaN(x):
		r.out = strconv.AppendFloat(r.out, x, 'g', -1, 64)
	case r.json:
		r.out = append(r.out, "null"...)
	}
}

// text writes a plain word.
func (r *bulkRow) text(name, word string) {
	r.key(name)
	if r.json {
		r.out = append(append(append(r.out, '"'), word...), '"')
		return
	}
	r.out = append(r.out, word...)
}

func (r *bulkRow) end() []byte {
	if r.json {
		r.out = append(r.out, '}')
	}
	return append(r.out, '\n')
}

// appendCSV appends a text cell: quoted where it must be, and with an apostrophe where
// a spreadsheet would take it for a formula.
func appendCSV(out, cell []byte) []byte {
	if _, err := strconv.ParseFloat(string(cell), 64); err != nil && len(cell) > 0 && strings.IndexByte("=+-@\t\r", cell[0]) >= 0 {
		cell = append([]byte{'\''}, cell...)
	}
	if bytes.ContainsAny(cell, "\",\r\n") {
		out = append(out, '"')
		out = append(out, bytes.ReplaceAll(cell, []byte{'"'}, []byte(`""`))...)
		return append(out, '"')
	}
	return append(out, cell...)
}
