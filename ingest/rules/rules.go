// Package rules is the second pair of eyes: it looks through a sheet as read for
// the errors that extraction makes, and says of each what was found, why it is
// suspect, what its likely cause is and what to check. It changes no number.
package rules

import (
	"cmp"
	"fmt"
	"slices"

	"steelyard/meta/choice"
	"steelyard/meta/dependence"
	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// Check returns what the catalogue finds in a sheet, beyond what the reader has
// found already, in the order of the catalogue. A finding that a row's accept cell
// accepts carries the reason.
func Check(x *review.Extraction, plan *review.Plan) []review.Finding {
	c := newChecker(x, plan)
	c.cells()
	c.identity()
	c.counts()
	c.means()
	c.intervals()
	c.quieten()
	slices.SortStableFunc(c.found, func(a, b found) int {
		return cmp.Compare(letterOrder(a.Rule), letterOrder(b.Rule))
	})
	all := make([]review.Finding, len(c.found))
	for i, f := range c.found {
		all[i] = f.Finding
	}
	return all
}

// Apply adds what Check finds to the sheet's findings. A finding of the reader that
// one of these explains better gives way to it, so that a row has one message for
// each cause.
func Apply(x *review.Extraction, plan *review.Plan) {
	more := Check(x, plan)
	allowed := allowedRepeats(x, plan)
	if len(more) == 0 && len(allowed) == 0 {
		return
	}
	kept := make([]review.Finding, 0, len(x.Findings)+len(more))
	better := explained(x, more)
	for _, f := range x.Findings {
		if !better[place{f.Place.Row, f.Rule}] && !(f.Rule == "D5" && f.Severity == review.Warning && allowed[f.Place.Row]) {
			kept = append(kept, f)
		}
	}
	x.Findings = append(kept, more...)
}

// allowedRepeats returns the rows of outcomes whose plan allows for several estimates
// from one study.
func allowedRepeats(x *review.Extraction, plan *review.Plan) map[int]bool {
	rows := map[int]bool{}
	for i := range x.Studies {
		if s := &x.Studies[i]; allowsRepeats(plan, s.Outcome) {
			rows[s.Row.Row] = true
		}
	}
	return rows
}

func allowsRepeats(plan *review.Plan, outcome string) bool {
	way, err := dependence.ParseWay(plan.Value(review.SettingDependence, outcome).Text)
	return err == nil && way != dependence.Independent
}

type place struct {
	row  int
	rule string
}

// explained returns the rows and rules of the reader's findings that the new ones
// explain better: rows of one study by a shared control, several times or a total
// among them, broken counts by a column of percentages, and excessive ones by a date.
func explained(x *review.Extraction, more []review.Finding) map[place]bool {
	better := map[place]bool{}
	for _, f := range more {
		switch f.Rule {
		case "F2":
			better[place{f.Place.Row, "C1"}] = true
		case "D4", "D5", "D6":
			better[place{f.Place.Row, "D5"}] = true
		case "C3":
			if f.Accepted != "" {
				continue
			}
			for i := range x.Studies {
				if x.Studies[i].Outcome == f.Outcome {
					better[place{x.Studies[i].Row.Row, "C2"}] = true
					better[place{x.Studies[i].Row.Row, "C1"}] = true
				}
			}
		}
	}
	return better
}

// letterOrder is the order of running: the file, identity, numbers, results.
func letterOrder(rule string) int {
	return slices.Index([]byte("FDCMI"), rule[0])
}

// row is a row of the sheet as the rules see it.
type row struct {
	*review.Study
	index   int            // in the extraction
	measure effect.Measure // of its reported result: its own, else the plan's
	bad     []int          // columns with a number that the reader refuses
	named   bool           // the column of clusters names the group an estimate belongs to
}

// number returns the row's number of a field unless the reader refuses it.
func (r *row) number(f review.Field) (review.Number, bool) {
	n, ok := r.Number(f)
	if ok && slices.Contains(r.bad, n.Place.Col) {
		return n, false
	}
	return n, ok
}

func (r *row) has(fields ...review.Field) bool {
	for _, f := range fields {
		if _, ok := r.number(f); !ok {
			return false
		}
	}
	return true
}

// value returns the row's number of a field, 0 where it has none.
func (r *row) value(f review.Field) float64 {
	n, ok := r.number(f)
	if !ok {
		return 0
	}
	return n.Value
}

// remark returns the folded text of a context column, blank if none.
func (r *row) remark(f review.Field) string {
	remark, _ := r.Remark(f.String())
	return choice.Fold(remark.Text)
}

// people returns how many people the row's result rests on, 0 if unknown.
func (r *row) people() float64 {
	if r.has(review.TotalTreated, review.TotalControl) {
		return r.value(review.TotalTreated) + r.value(review.TotalControl)
	}
	return r.value(review.Total)
}

// found is a finding with the index of its row, -1 for a column or an outcome.
type found struct {
	review.Finding
	row int
}

// checker goes through a sheet.
type checker struct {
	x        *review.Extraction
	rows     []row
	outcomes [][]*row // rows by outcome, in the order of the sheet
	columns  [review.FieldCount]int
	planned  map[string]effect.Measure // by outcome
	repeats  map[string]bool           // outcomes that allow for several estimates from one study
	found    []found
	fired    map[place]bool // by index of the row and rule
}

func newChecker(x *review.Extraction, plan *review.Plan) *checker {
	c := &checker{x: x, rows: make([]row, len(x.Studies)), planned: map[string]effect.Measure{}, repeats: map[string]bool{}, fired: map[place]bool{}}
	for _, column := range x.Columns {
		c.columns[column.Field] = column.Place.Col
	}
	bad := map[int][]int{}
	for _, f := range x.Findings {
		if f.Blocks() && f.Place.Row > 0 && f.Place.Col > 0 {
			bad[f.Place.Row] = append(bad[f.Place.Row], f.Place.Col)
		}
	}
	for _, name := range x.Outcomes() {
		c.repeats[name] = allowsRepeats(plan, name)
		if a, err := plan.Analysis(name); err == nil && a.MeasureSet {
			c.planned[name] = a.Measure
		}
	}
	named := slices.ContainsFunc(x.Studies, func(s review.Study) bool {
		r, ok := s.Remark(review.Cluster.String())
		return ok && review.NamesCluster(r.Text)
	})
	byName := map[string]int{}
	for i := range x.Studies {
		s := &x.Studies[i]
		c.rows[i] = row{Study: s, index: i, measure: s.Measure, bad: bad[s.Row.Row], named: named}
		if s.Measure == effect.Unspecified {
			c.rows[i].measure = c.planned[s.Outcome]
		}
		at, known := byName[s.Outcome]
		if !known {
			at = len(c.outcomes)
			byName[s.Outcome] = at
			c.outcomes = append(c.outcomes, nil)
		}
		c.outcomes[at] = append(c.outcomes[at], &c.rows[i])
	}
	return c
}

// hasColumn reports whether the sheet has a column of a field.
func (c *checker) hasColumn(f review.Field) bool { return c.columns[f] > 0 }

// add records a finding about a row, at the number or the column of a field;
// NoField is the whole row.
func (c *checker) add(r *row, severity review.Severity, rule string, at review.Field, message string, readings ...review.Reading) {
	where := r.Row
	if n, ok := r.Number(at); ok {
		where = n.Place.In(r.Row)
	} else if at != review.NoField && c.columns[at] > 0 {
		where.Col = c.columns[at]
		if remark, ok := r.Remark(at.String()); ok {
			where.Text = remark.Text
		} else if at == review.StudyName {
			where.Text = r.Name
		}
	}
	if severity == review.Error {
		message += fmt.Sprintf(", or accept it by writing \"%s reason\" in the accept column", rule)
	}
	c.fired[place{r.index, rule}] = true
	c.found = append(c.found, found{row: r.index, Finding: review.Finding{
		Severity: severity, Rule: rule, Place: where, Study: r.Name, Outcome: r.Outcome,
		Message: message, Accepted: r.AcceptedReason(rule), Readings: readings,
	}})
}

// addOutcome records a finding about an outcome, at the column of a field. It is
// accepted when one of the outcome's rows accepts its rule.
func (c *checker) addOutcome(rows []*row, severity review.Severity, rule string, at review.Field, message string, readings ...review.Reading) {
	f := review.Finding{
		Severity: severity, Rule: rule, Outcome: rows[0].Outcome, Message: message, Readings: readings,
		Place: review.Place{File: rows[0].Row.File, Sheet: rows[0].Row.Sheet, Col: c.columns[at]},
	}
	if severity == review.Error {
		f.Message += fmt.Sprintf(", or accept it by writing \"%s reason\" in the accept column of one of its rows", rule)
	}
	for _, r := range rows {
		if reason := r.AcceptedReason(rule); reason != "" {
			f.Accepted = reason
			break
		}
	}
	c.found = append(c.found, found{row: -1, Finding: f})
}

// hides lists the rules whose findings are hidden in a row where another rule has
// found the cause already.
var hides = map[string][]string{
	"F2":  {"C6", "C7", "I11", "I10"},
	"F7":  {"C5", "C6", "C7", "M4", "I10", "I11", "I19"},
	"D1":  {"D2", "D3"},
	"D2":  {"D3"},
	"D4":  {"D2", "D3", "D5"},
	"D6":  {"D2", "D3", "D5"},
	"C4":  {"C10"},
	"C7":  {"C6", "I11"},
	"C11": {"F8"},
	"I20": {"C10"},
	"M1":  {"M2", "M4", "M9", "M10", "I7", "I10", "I11", "I19"},
	"M2":  {"M4", "M9", "I11", "I19"},
	"M3":  {"I11", "I19"},
	"M5":  {"M8", "M9"},
	"M10": {"I6", "I7", "I11", "I19"},
	"M12": {"M2", "M9", "M4", "M5", "I11", "I19"},
	"M15": {"M8"},
	"I3":  {"I2", "I7", "I10"},
	"I5":  {"I6", "I7", "I10", "I11", "I19"},
	"I6":  {"I7"},
	"I9":  {"I7"},
	"I10": {"I11", "I12"},
	"I19": {"I11"},
}

// quieten leaves one message for each cause in a row: those that another explains
// are dropped.
func (c *checker) quieten() {
	hidden := map[place]bool{}
	for at := range c.fired {
		for _, rule := range hides[at.rule] {
			hidden[place{at.row, rule}] = true
		}
	}
	c.found = slices.DeleteFunc(c.found, func(f found) bool { return f.row >= 0 && hidden[place{f.row, f.Rule}] })
}
