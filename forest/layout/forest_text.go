package layout

import (
	"strconv"
	"unicode"
	"unicode/utf8"

	"steelyard/forest/words"
)

// texts writes the texts of all rows.
func (f *forest) texts() {
	for _, r := range f.in.Rows {
		t := rowText{fullName: joinName(r.Name, r.tail()), weight: weightText(r.Weight)}
		t.name = t.fullName
		t.counts = shownCounts(r.Counts)
		t.setNumbers(f.in.Scale, r.Estimate, r.Low, r.High, r.LnEvidence)
		if f.in.Blocks != nil {
			t.indent = blockIndent
		}
		f.rows = append(f.rows, t)
	}
	f.subtotalTexts()
	p := f.in.Pooled
	if p == nil {
		return
	}
	name := "All " + words.Count(p.K) + " " + f.in.plural(p.K)
	if p.Clusters > 0 {
		name = "All " + words.Number(p.K, "estimate", "estimates") + ", " + words.Count(p.Clusters) + " " + f.in.plural(p.Clusters)
	}
	t := rowText{fullName: name, weight: weightText(1), bold: true}
	t.name = t.fullName
	t.counts = [2]Count{{Total: p.Totals[0]}, {Total: p.Totals[1]}}
	t.setNumbers(f.in.Scale, p.Estimate, p.Low, p.High, p.LnEvidence)
	f.pooled = &t
}

func (t *rowText) setNumbers(scale EffectScale, estimate, low, high, ln float64) {
	t.estimate = effectText(scale, estimate)
	t.between = "(" + intervalText(scale, low, high) + ")"
	t.odds = oddsParts(ln)
}

// weightText writes a share as a percentage with one decimal; the whole is
// "100".
func weightText(share float64) string {
	if share == 1 {
		return "100"
	}
	return words.Weight(share)
}

// tail is what follows a name and is never cut: the year and the dagger.
func (r ForestRow) tail() string {
	if r.Dagger {
		return joinName(r.Year, "†")
	}
	return r.Year
}

// shownCounts puts a dash for events that were not reported beside a total.
func shownCounts(c [2]Count) [2]Count {
	for arm := range c {
		if c[arm].Total != "" && c[arm].Events == "" {
			c[arm].Events = "–"
		}
	}
	return c
}

// cutNames shortens the names that are wider than their column.
func (f *forest) cutNames() {
	for i, r := range f.in.Rows {
		f.rows[i].name, _ = cut(r.Name, r.tail(), f.columns.nameWidth-f.rows[i].indent+0.01, f.metrics.row)
	}
	for i, t := range f.subtotals {
		f.subtotals[i].name, _ = cut(t.fullName, "", f.columns.nameWidth-t.indent+0.01, f.metrics.row)
	}
}

// afterRow is a row under the pooled one.
type afterRow struct {
	label, below      string // below: second line of the narrow form
	estimate, between string
	prediction        *ForestPrediction // its bar
}

// afterRows returns the rows under the pooled one.
func (f *forest) afterRows() []afterRow {
	var rows []afterRow
	one, many := f.in.plural(1), f.in.plural(2)
	if p := f.in.Prediction; p != nil && f.pooled != nil {
		r := afterRow{label: "Prediction interval, next " + one, prediction: p}
		if p.Reason == "" {
			between := intervalText(f.in.Scale, p.Low, p.High)
			r.between, r.below = "("+between+")", between
		} else {
			r.label, r.below, r.prediction = "Prediction interval: "+Clean(p.Reason), Clean(p.Reason), nil
		}
		if f.metrics.twoLine {
			r.label = "Next " + one + " (" + f.level() + ")"
		}
		rows = append(rows, r)
	}
	if s := f.in.Spread; s != nil && f.pooled != nil {
		r := afterRow{label: "Spread between " + many + ", τ", estimate: words.Tau(s.Tau)}
		r.below = "τ " + r.estimate
		if s.HasLimits {
			r.between = "(" + words.Interval(words.Tau(s.Low), words.Tau(s.High)) + ")"
			r.below += " " + r.between
		}
		if f.metrics.twoLine {
			r.label = "Spread between " + many
		}
		rows = append(rows, r)
	}
	return rows
}

// labelWidth is the widest label at the left of the pooled block on a chart of a
// width, of which it may take two fifths.
func (f *forest) labelWidth(width float64) float64 {
	most := 0.0
	for _, r := range f.afterRows() {
		most = max(most, Width(r.label, f.metrics.row, false))
		if f.metrics.twoLine {
			most = max(most, Width(r.below, f.metrics.second, false))
		}
	}
	if f.pooled != nil {
		most = max(most, Width(f.pooled.name, f.metrics.row, true))
	}
	return min(most, 0.4*width)
}

// railLines is the number of lines beside the rail under the pooled bar: word
// and steps (in the narrow form they stand in the pooled row), and the line on
// bias.
func (f *forest) railLines() int {
	lines := 0
	if _, ok := f.shownEvidence(); ok && !(f.metrics.twoLine && f.pooled != nil) {
		lines++
	}
	if f.in.BiasOpen {
		lines++
	}
	return lines
}

func (f *forest) level() string { return levelText(f.in.Level) }

// levelText writes the level of the intervals, such as "95%".
func levelText(level float64) string {
	return strconv.FormatFloat(float64(int64(level*1e6+0.5))/1e4, 'f', -1, 64) + "%"
}

// capital returns text with its first letter in upper case.
func capital(text string) string {
	r, n := utf8.DecodeRuneInString(text)
	return string(unicode.ToUpper(r)) + text[n:]
}

// armName is the name of an arm over its counts.
func (f *forest) armName(arm int) string { return f.in.Sides.Arms[arm] }
