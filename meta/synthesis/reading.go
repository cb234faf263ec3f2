package synthesis

import (
	"context"
	"fmt"
	"slices"

	"steelyard/meta/review"
)

// ReadingEffect is what an outcome's pooled answer is under one reading of a
// finding.
type ReadingEffect struct {
	Finding int     // index in Synthesis.Findings
	Label   string  // of the reading
	Outcome Outcome // pooled with that reading; without a Result its Problem says why
}

// mostReadings bounds how many readings are worked out, since each pools its
// outcome anew.
const mostReadings = 100

// read pools every outcome that a finding with readings concerns once for each
// of them.
func (s *Synthesis) read(ctx context.Context, x *review.Extraction, plan *review.Plan) error {
	for i := range s.Findings {
		for _, reading := range s.Findings[i].Readings {
			changed := applied(x, s.Findings[i], reading)
			for _, name := range concerned(s.Outcomes, changed, s.Findings[i].Place, reading) {
				if err := ctx.Err(); err != nil {
					return err
				}
				if len(s.Readings) == mostReadings {
					s.Findings = append(s.Findings, review.Finding{Severity: review.Note, Rule: s.Findings[i].Rule,
						Message: fmt.Sprintf("only the first %d readings of findings were worked out; mend some of them and run again", mostReadings)})
					return nil
				}
				o, _, err := runOutcome(changed, plan, name, blockedRows(changed.Findings))
				if err != nil {
					return err
				}
				s.Readings = append(s.Readings, ReadingEffect{Finding: i, Label: reading.Label, Outcome: *o})
			}
		}
	}
	return nil
}

// applied returns the extraction with a reading's numbers in place, and without
// the errors at the cells that it settles; a finding about a whole column is settled
// by each of its readings.
func applied(x *review.Extraction, f review.Finding, reading review.Reading) *review.Extraction {
	changed := *x
	changed.Studies = slices.Clone(x.Studies)
	settled := map[rowKey]map[review.Field]review.Number{}
	for _, n := range reading.Numbers {
		key := keyOf(n.Place.In(f.Place))
		if settled[key] == nil {
			settled[key] = map[review.Field]review.Number{}
		}
		settled[key][n.Field] = n
	}
	for i := range changed.Studies {
		study := &changed.Studies[i]
		numbers := settled[keyOf(study.Row)]
		if numbers == nil {
			continue
		}
		study.Numbers = slices.DeleteFunc(slices.Clone(study.Numbers), func(n review.Number) bool {
			_, replaced := numbers[n.Field]
			return replaced
		})
		for field := review.Estimate; int(field) < review.FieldCount; field++ {
			if n, ok := numbers[field]; ok {
				study.Numbers = append(study.Numbers, n)
			}
		}
	}
	changed.Findings = slices.DeleteFunc(slices.Clone(x.Findings), func(g review.Finding) bool {
		if f.Place.Row == 0 && g.Rule == f.Rule && g.Place == f.Place && g.Outcome == f.Outcome {
			return true
		}
		for _, n := range settled[keyOf(g.Place)] {
			if n.Place.Col == g.Place.Col {
				return true
			}
		}
		return false
	})
	return &changed
}

func keyOf(p review.Place) rowKey { return rowKey{p.File, p.Sheet, p.Row} }

// concerned returns the outcomes that hold a row of a reading of a finding there.
func concerned(outcomes []Outcome, x *review.Extraction, beside review.Place, reading review.Reading) []string {
	rows := map[rowKey]bool{}
	for _, n := range reading.Numbers {
		rows[keyOf(n.Place.In(beside))] = true
	}
	with := map[string]bool{}
	for i := range x.Studies {
		if rows[keyOf(x.Studies[i].Row)] {
			with[x.Studies[i].Outcome] = true
		}
	}
	var names []string
	for i := range outcomes {
		if with[outcomes[i].Name] {
			names = append(names, outcomes[i].Name)
		}
	}
	return names
}
