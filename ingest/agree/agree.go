// Package agree sets two extractions of the same studies side by side: what is the
// same, what differs by rounding alone, what differs, and what each choice does to the
// pooled answer. It writes the disagreements as a workbook to settle them in.
package agree

import (
	"cmp"
	"fmt"
	"math"
	"slices"
	"strings"

	"steelyard/meta/choice"
	"steelyard/meta/effect"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// Kind says how two cells differ.
type Kind int

// The kinds of difference, gravest first.
const (
	Differs  Kind = iota
	Missing       // one of the two is blank
	Rounding      // numbers that may be one number before rounding
)

var kindNames = choice.Of[Kind]("kind of difference", "differs", "missing", "rounding")

// String returns "differs", "missing" or "rounding".
func (k Kind) String() string { return kindNames.String(k) }

// Cell is a cell in which two extractions differ.
type Cell struct {
	Kind          Kind
	Field         review.Field // NoField for a covariate
	Header        string
	First, Second string // as typed; blank where missing
}

// Pair is a row of the first extraction with its row of the second.
type Pair struct {
	First, Second *review.Study
	Cells         []Cell // empty: identical
	Large         bool   // the effects differ by 0.1 SD, 10 per cent, or 10 per cent of the standard error
	Effects       string // both effects, in words; blank where one is missing or they are the same
}

// Differing reports whether the rows differ in more than rounding.
func (p *Pair) Differing() bool {
	return slices.ContainsFunc(p.Cells, func(c Cell) bool { return c.Kind != Rounding })
}

// Comparison is two extractions side by side.
type Comparison struct {
	First, Second         *review.Extraction
	Pairs                 []Pair          // in the order of the first
	OnlyFirst, OnlySecond []*review.Study // rows without a partner
}

// Compare pairs the rows of two extractions, by outcome and id, else by folded name and
// year, and compares them cell by cell.
func Compare(first, second *review.Extraction) *Comparison {
	c := &Comparison{First: first, Second: second}
	waiting := map[string][]*review.Study{}
	for i := range second.Studies {
		s := &second.Studies[i]
		waiting[key(s)] = append(waiting[key(s)], s)
	}
	paired := map[*review.Study]bool{}
	for i := range first.Studies {
		s := &first.Studies[i]
		partners := waiting[key(s)]
		if len(partners) == 0 {
			c.OnlyFirst = append(c.OnlyFirst, s)
			continue
		}
		waiting[key(s)] = partners[1:]
		paired[partners[0]] = true
		c.Pairs = append(c.Pairs, Pair{First: s, Second: partners[0], Cells: cells(s, partners[0])})
	}
	for i := range second.Studies {
		if s := &second.Studies[i]; !paired[s] {
			c.OnlySecond = append(c.OnlySecond, s)
		}
	}
	return c
}

// key is what must be the same for two rows to be of one study and outcome.
func key(s *review.Study) string {
	who := "id " + choice.Fold(s.ID)
	if s.ID == "" {
		who = fmt.Sprintf("%s %d", review.FoldName(s.Name), s.Date.Year)
	}
	parts := []string{choice.Fold(s.Outcome), who}
	for _, f := range []review.Field{review.Comparison, review.TimePoint, review.Subgroup} {
		r, _ := s.Remark(f.String())
		parts = append(parts, choice.Fold(r.Text))
	}
	return strings.Join(parts, "\x00")
}

// aside are the context columns in which two people are free to differ.
var aside = map[string]bool{"note": true, "source": true, "accept": true, "how obtained": true}

// cells compares two rows.
func cells(a, b *review.Study) []Cell {
	var all []Cell
	for f := review.Estimate; int(f) < review.FieldCount; f++ {
		x, hasX := a.Number(f)
		y, hasY := b.Number(f)
		cell := Cell{Field: f, Header: f.String()}
		switch {
		case !hasX && !hasY, hasX && hasY && x.Value == y.Value:
			continue
		case !hasY:
			cell.Kind, cell.First = Missing, x.Typed()
		case !hasX:
			cell.Kind, cell.Second = Missing, y.Typed()
		default:
			cell.First, cell.Second = x.Typed(), y.Typed()
			if math.Abs(x.Value-y.Value) <= (x.HalfUnit()+y.HalfUnit())*(1+1e-9) && x.Decimals() != y.Decimals() {
				cell.Kind = Rounding
			}
		}
		all = append(all, cell)
	}
	if a.Measure != b.Measure {
		all = append(all, Cell{Field: review.MeasureField, Header: review.MeasureField.String(), First: a.Measure.String(), Second: b.Measure.String()})
	}
	for _, header := range headers(a, b) {
		x, _ := a.Remark(header)
		y, _ := b.Remark(header)
		if aside[header] || choice.Fold(x.Text) == choice.Fold(y.Text) {
			continue
		}
		field, _ := review.ParseField(header) // a covariate is none
		cell := Cell{Field: field, Header: header, First: x.Text, Second: y.Text}
		if x.Text == "" || y.Text == "" {
			cell.Kind = Missing
		}
		all = append(all, cell)
	}
	slices.SortStableFunc(all, func(x, y Cell) int { return cmp.Compare(x.Kind, y.Kind) })
	return all
}

// headers returns the headers of the context of two rows, those of the first before.
func headers(a, b *review.Study) []string {
	var all []string
	for _, r := range slices.Concat(a.Remarks, b.Remarks) {
		if !slices.Contains(all, r.Header) {
			all = append(all, r.Header)
		}
	}
	return all
}

// Weigh compares the effects that the rows' numbers give, each extraction pooled by
// the same plan.
func (c *Comparison) Weigh(first, second *synthesis.Synthesis) {
	a, b := effects(first), effects(second)
	for i := range c.Pairs {
		p := &c.Pairs[i]
		x, y := a[p.First.Row.Row], b[p.Second.Row.Row]
		if x == nil || y == nil || !p.Differing() {
			p.Large = p.Differing() && (x == nil) != (y == nil)
			continue
		}
		p.Large = large(x, y)
		reader := func(e *result) string {
			return fmt.Sprintf("%.3g (se %.3g)", effect.ToReader(e.measure, e.Y), e.SE)
		}
		if x.measure != y.measure || x.Estimate != y.Estimate {
			p.Effects = fmt.Sprintf("%s of %s against %s", x.measure, reader(x), reader(y))
		}
	}
	slices.SortStableFunc(c.Pairs, func(p, q Pair) int { return rank(&p) - rank(&q) })
}

// rank orders pairs: large differences, others, rounding, identical ones.
func rank(p *Pair) int {
	switch {
	case p.Large:
		return 0
	case p.Differing():
		return 1
	case len(p.Cells) > 0:
		return 2
	}
	return 3
}

// result is the effect of a row.
type result struct {
	effect.Estimate
	measure effect.Measure
	sd      float64 // of the control arm; 0 if unknown
}

// effects returns the effects of the pooled rows by row of the sheet.
func effects(s *synthesis.Synthesis) map[int]*result {
	all := map[int]*result{}
	for i := range s.Outcomes {
		o := &s.Outcomes[i]
		for j := range o.Studies {
			study := &o.Studies[j]
			sd, _ := study.Source.Number(review.SDControl)
			all[study.Source.Row.Row] = &result{study.Estimate, o.Analysis.Measure, sd.Value}
		}
	}
	return all
}

// large reports whether two effects differ by 0.1 standard deviations, by 10 per cent
// of a ratio or of any other effect, or have standard errors that differ by 10 per
// cent. The first is the tolerance of Gøtzsche et al. (2007), JAMA 298:430-437.
func large(x, y *result) bool {
	const share = 0.1
	apart := math.Abs(x.Y - y.Y)
	if math.Abs(x.SE-y.SE) > share*math.Min(x.SE, y.SE) {
		return true
	}
	switch {
	case x.measure.Log():
		return apart >= math.Log(1+share)
	case x.measure == effect.StandardisedMeanDifference:
		return apart >= share
	case x.sd > 0:
		return apart >= share*x.sd
	}
	return apart >= share*math.Abs(x.Y)
}

// Rule is the rule of findings about two extractions that differ.
const Rule = "A9"

// Findings returns one warning for each pair of rows that differs in more than
// rounding, with both readings, and one for each row without a partner.
func (c *Comparison) Findings() []review.Finding {
	var all []review.Finding
	for i := range c.Pairs {
		p := &c.Pairs[i]
		if !p.Differing() {
			continue
		}
		var texts []string
		first, second := review.Reading{Label: "by the first sheet"}, review.Reading{Label: "by the second sheet"}
		for _, cell := range p.Cells {
			if cell.Kind == Rounding {
				continue
			}
			texts = append(texts, fmt.Sprintf("%s %s against %s", cell.Header, orBlank(cell.First), orBlank(cell.Second)))
			first.Numbers = append(first.Numbers, numbersOf(p.First, cell.Field, p.First)...)
			second.Numbers = append(second.Numbers, numbersOf(p.Second, cell.Field, p.First)...)
		}
		message := "the two extractions differ: " + strings.Join(texts, "; ")
		if p.Effects != "" {
			message += "; " + p.Effects
		}
		var readings []review.Reading
		if len(first.Numbers) == len(second.Numbers) && len(first.Numbers) > 0 {
			readings = []review.Reading{first, second}
		}
		all = append(all, review.Finding{Severity: review.Warning, Rule: Rule, Place: p.First.Row, Study: p.First.Name, Outcome: p.First.Outcome,
			Message: message, Accepted: p.First.AcceptedReason(Rule), Readings: readings})
	}
	for _, s := range c.OnlyFirst {
		all = append(all, review.Finding{Severity: review.Warning, Rule: Rule, Place: s.Row, Study: s.Name, Outcome: s.Outcome,
			Message: "the row is in the first sheet only; was it missed, or is its name spelt otherwise?", Accepted: s.AcceptedReason(Rule)})
	}
	for _, s := range c.OnlySecond {
		all = append(all, review.Finding{Severity: review.Warning, Rule: Rule, Place: s.Row, Study: s.Name, Outcome: s.Outcome,
			Message: "the row is in the second sheet only; was it missed, or is its name spelt otherwise?"})
	}
	return all
}

func orBlank(text string) string {
	if text == "" {
		return "nothing"
	}
	return text
}

// numbersOf returns a row's number of a field, placed in the row of the first sheet.
func numbersOf(s *review.Study, f review.Field, in *review.Study) []review.Number {
	n, ok := s.Number(f)
	if !ok {
		return nil
	}
	n.Place.Row = in.Row.Row
	if own, has := in.Number(f); has {
		n.Place = own.Place
	}
	return []review.Number{n}
}
