package layout

import (
	"fmt"
	"math"

	"steelyard/forest/words"
	"steelyard/meta"
	"steelyard/meta/explain"
	"steelyard/meta/synthesis"
)

// SubgroupsOf returns the forest chart of a pooled outcome by subgroups: a block for
// each with its pooled effect, and one without for studies that have no entry in the
// column. It returns an error if the outcome has no result or no subgroups.
func SubgroupsOf(s *synthesis.Synthesis, o *synthesis.Outcome) (ForestInput, error) {
	in, err := ForestOf(s, o)
	if err != nil {
		return in, err
	}
	if o.Explain == nil || o.Explain.Subgroups == nil {
		return in, fmt.Errorf("%s has no subgroups to draw: name a column with --subgroups", o.Called())
	}
	r := o.Explain.Subgroups
	if r.Problem != "" {
		return in, fmt.Errorf("%s has no subgroups to draw: %s", o.Called(), r.Problem)
	}
	rows := in.Rows
	in.Rows = nil
	take := func(indices []int) (weight float64) {
		for _, row := range indices {
			in.Rows = append(in.Rows, rows[row])
			weight += rows[row].Weight
		}
		return min(weight, 1)
	}
	for _, g := range r.Groups {
		block := ForestBlock{Name: g.Name, Rows: len(g.Rows), Weight: take(g.Rows)}
		if len(g.Rows) > 1 || r.Shared {
			m := g.Mean
			block.Pooled = &ForestPooled{
				Estimate: drawn(o, m.Estimate), Low: drawn(o, m.Low), High: drawn(o, m.High),
				LnEvidence: m.Evidence.Ln(), Unwanted: unwanted(o, m.Estimate), K: len(g.Rows),
			}
		}
		in.Blocks = append(in.Blocks, block)
	}
	var left []int
	for _, m := range r.Omitted {
		left = append(left, m.Row)
	}
	if len(left) > 0 {
		in.Blocks = append(in.Blocks, ForestBlock{Name: "No entry in " + r.Column, Rows: len(left), Weight: take(left)})
	}
	in.Subtitle += ", by " + r.Column
	in.Notes = append([]Note{betweenNote(o, r)}, in.Notes...)
	return in, nil
}

// betweenNote words the test between groups.
func betweenNote(o *synthesis.Outcome, r *synthesis.SubgroupsResult) Note {
	t := r.Test
	text := fmt.Sprintf("%s; %s. ", words.Difference(t.Evidence), words.FTest(t.F, t.DF1, t.DF2, t.LnP))
	text += spreadOfGroups(o, r.Subgroups) + " Whether they differ is answered here, not by which group’s bar passes a step; the comparison is observational"
	if !o.Explain.Planned {
		text += ", and not stated to have been planned"
	}
	return Note{Head: "Between groups", Text: text + "."}
}

// spreadOfGroups says what spread the groups have.
func spreadOfGroups(o *synthesis.Outcome, g *explain.Subgroups) string {
	switch {
	case o.Analysis.Model.Effects == meta.CommonEffect:
		return "Each group has one common effect."
	case g.Shared:
		return fmt.Sprintf("The groups share one spread, τ %s.", words.Tau(math.Sqrt(g.Tau2)))
	}
	text := "Spread τ of each group: "
	for i, group := range g.Groups {
		if i > 0 {
			text += ", "
		}
		tau := words.Missing
		if group.Mean.K > 1 {
			tau = words.Tau(math.Sqrt(group.Mean.Tau2))
		}
		text += group.Name + " " + tau
	}
	return text + "."
}
