package main

import (
	"bytes"
	"errors"
	"fmt"
	"slices"
	"strings"

	"steelyard/ingest/stream"
	"steelyard/meta"
	"steelyard/meta/effect"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// bulkFields are where the commonest numbers stand among those of a row.
type bulkFields struct {
	estimate, se int // indices in Table.Numbers; −1 unless every row may be read from these two alone
	logged       bool
	measure      effect.Measure // of the estimates, as the header says
}

// besideSE are the fields that change nothing where an estimate has its standard error.
var besideSE = []review.Field{review.LimitLow, review.LimitHigh, review.AnalysisLow, review.AnalysisHigh, review.LimitLevel, review.PValue}

// newBulkPooling settles how the sets of a table are pooled.
func newBulkPooling(t *stream.Table, asked review.Analysis) (*bulkPooling, error) {
	sample := &review.Study{Name: "each row", Measure: t.Measure}
	f := bulkFields{estimate: -1, se: -1, measure: t.Measure}
	simple := true
	for i, c := range t.Numbers {
		sample.Numbers = append(sample.Numbers, review.Number{Field: c.Field, Value: 1})
		switch {
		case c.Field == review.StandardError:
			f.se = i
		case (c.Field == review.Estimate || c.Field == review.AnalysisEstimate) && f.estimate < 0:
			f.estimate, f.logged = i, c.Field == review.AnalysisEstimate
		default:
			simple = simple && slices.Contains(besideSE, c.Field)
		}
	}
	if !simple || f.estimate < 0 {
		f.se = -1
	}
	rule, err := synthesis.NewSetRule(asked, sample)
	if err != nil {
		return nil, err
	}
	return &bulkPooling{rule: rule, fields: f, scaled: effect.ToReader(rule.Measure, 0.5) != 0.5}, nil
}

// bulkResult is what a worker makes of a block.
type bulkResult struct {
	sets []bulkSet
	bad  []badSet
	out  []byte   // the rows of results
	ends []int    // where each ends in out
	mean []tested // of each
}

// tested is what a collection weighs.
type tested struct{ statistic, lnP float64 }

// bulkSet is a set of the block, pooled or not.
type bulkSet struct {
	name []byte // good as long as the block
	line int    // of its first row
}

// badSet is a set that could not be pooled.
type badSet struct {
	line   int
	set    string // blank where the row does not say
	reason string
}

// bulkWorker pools the sets of one block after another in its own room.
type bulkWorker struct {
	*bulkPooling
	table  *stream.Table
	json   bool
	rows   *stream.Rows
	row    review.Study
	pooler meta.Pooler
	y, s   []float64
	lines  []int // of the rows in y and s
	wrong  bool  // the set has been reported
}

func (p *bulkPooling) worker(t *stream.Table, json bool) func(*stream.Block, *bulkResult) {
	w := &bulkWorker{bulkPooling: p, table: t, json: json}
	w.row.Measure = p.fields.measure
	return w.do
}

// do pools all sets of a block.
func (w *bulkWorker) do(b *stream.Block, r *bulkResult) {
	*r = bulkResult{sets: r.sets[:0], out: r.out[:0], ends: r.ends[:0], mean: r.mean[:0]}
	if w.rows == nil {
		w.rows = w.table.Rows(b)
	}
	w.rows.Reset(b)
	for w.rows.Next() {
		row := &w.rows.Row
		if len(row.Set) == 0 {
			r.bad = append(r.bad, badSet{line: row.Line, reason: row.Problem})
			continue
		}
		if n := len(r.sets); n == 0 || !bytes.Equal(r.sets[n-1].name, row.Set) {
			w.close(r)
			r.sets = append(r.sets, bulkSet{row.Set, row.Line})
			w.y, w.s, w.lines, w.wrong = w.y[:0], w.s[:0], w.lines[:0], false
		}
		if !w.wrong {
			w.take(r, row)
		}
	}
	w.close(r)
}

// take adds a row to the set that is being read.
func (w *bulkWorker) take(r *bulkResult, row *stream.Row) {
	if row.Problem != "" {
		w.refuse(r, row.Line, row.Problem)
		return
	}
	e, err := w.effect(row)
	switch {
	case errors.Is(err, effect.ErrNothingToCompare):
	case err != nil:
		w.refuse(r, row.Line, err.Error())
	default:
		w.y, w.s, w.lines = append(w.y, e.Y), append(w.s, e.SE), append(w.lines, row.Line)
	}
}

// refuse reports the set that is being read.
func (w *bulkWorker) refuse(r *bulkResult, line int, reason string) {
	w.wrong = true
	r.bad = append(r.bad, badSet{line: line, set: string(r.sets[len(r.sets)-1].name), reason: reason})
}

// effect returns a row's effect.
func (w *bulkWorker) effect(row *stream.Row) (effect.Estimate, error) {
	f := &w.fields
	if f.se >= 0 && row.Present[f.se] && row.Present[f.estimate] {
		if e, ok := w.rule.FromSE(f.measure, f.logged, row.Values[f.estimate], row.Values[f.se]); ok {
			return e, nil
		}
	}
	w.row.Numbers = w.row.Numbers[:0]
	level := 0.0
	for i, c := range w.table.Numbers {
		if !row.Present[i] {
			continue
		}
		w.row.Numbers = append(w.row.Numbers, review.Number{Field: c.Field, Value: row.Values[i]})
		if c.Level != 0 && level == 0 {
			level = c.Level
		}
	}
	if _, own := w.row.Number(review.LimitLevel); level != 0 && !own {
		w.row.Numbers = append(w.row.Numbers, review.Number{Field: review.LimitLevel, Value: level})
	}
	return w.rule.Effect(&w.row)
}

// close pools the set that has been read.
func (w *bulkWorker) close(r *bulkResult) {
	if len(r.sets) == 0 || w.wrong {
		return
	}
	set := r.sets[len(r.sets)-1]
	if len(w.y) == 0 {
		w.refuse(r, set.line, "no row carries an effect: in each, all or nobody in both arms had the event")
		return
	}
	mean, err := w.pooler.Pool(w.rule.Model, w.y, w.s)
	if err != nil {
		line := set.line
		if input := (*meta.InputError)(nil); errors.As(err, &input) && input.Index >= 0 {
			line = w.lines[input.Index]
		}
		w.refuse(r, line, err.Error())
		return
	}
	w.write(r, set.name, &mean)
	r.ends = append(r.ends, len(r.out))
	r.mean = append(r.mean, tested{mean.Statistic, mean.LnP})
}

// mostBadShown is how many sets that were left out are named.
const mostBadShown = 20

// bulkReport tells of sets that were left out.
type bulkReport struct {
	to        interface{ Write([]byte) (int, error) }
	sets, bad int
}

// take reports the bad sets of a block.
func (p *bulkReport) take(r *bulkResult) {
	p.sets += len(r.sets)
	for _, bad := range r.bad {
		p.bad++
		if p.bad > mostBadShown {
			continue
		}
		name := "a row"
		if bad.set != "" {
			name = fmt.Sprintf("set %q", bad.set)
		}
		fmt.Fprintf(p.to, "steelyard: line %d: %s is left out: %s\n", bad.line, name, strings.TrimSpace(bad.reason))
	}
}

// close sums up.
func (p *bulkReport) close() error {
	if p.sets == 0 && p.bad == 0 {
		return errors.New("no row follows the header; add the studies below it")
	}
	if p.bad == 0 {
		return nil
	}
	more := ""
	if p.bad > mostBadShown {
		more = fmt.Sprintf("; the first %d are named above", mostBadShown)
	}
	fmt.Fprintf(p.to, "steelyard: %d of %d sets or rows are left out%s\n", p.bad, max(p.sets, p.bad), more)
	return &rowsLeftOut{}
}
