package webpage

import (
	"fmt"

	"steelyard/forest/words"
	"steelyard/meta"
	"steelyard/meta/synthesis"
)

// smallStudy is the section on small studies; nil where it was not looked at.
func (v *view) smallStudy(s *synthesis.Synthesis, o *synthesis.Outcome, id string) (*sectionView, error) {
	a := o.SmallStudy
	if a == nil {
		return nil, nil
	}
	w := &sectionView{Items: "14, 21", Heading: "Do small " + words.Noun(s, 2) + " show other effects?"}
	if len(o.Studies) > 1 {
		f, err := v.figure(s, o, id, kind("funnel"))
		if err != nil {
			return nil, err
		}
		w.Figures = []figureView{f}
	}
	if a.Refused != "" {
		w.Under = []string{"Not tested: " + a.Refused + "."}
		w.After = []string{synthesis.SmallStudyCaution}
		return w, nil
	}
	if a.Few {
		w.Under = []string{fmt.Sprintf("Run on request with %d %s: below 10 such tests find little and mislead easily.", len(o.Studies), words.Noun(s, 2))}
	}
	w.Tables = []tableView{v.asymmetryTable(a), v.adjustedTable(o, a)}
	w.After = []string{synthesis.SmallStudyCaution, synthesis.NoProofCaution}
	return w, nil
}

// asymmetryTable lists the tests; one that could not be run says why.
func (v *view) asymmetryTable(a *synthesis.SmallStudy) tableView {
	t := v.table("Tests of asymmetry", heads("Test", "#k", "Shows", "p", "#Asymmetry : none", "#Steps")...)
	for _, test := range a.Tests {
		row := rowView{Cells: []cellView{text(test.Method.Title())}}
		if test.Problem != "" {
			row.Cells = append(row.Cells, number("", 0), text("not run: "+test.Problem))
		} else {
			ln := test.Evidence.Ln()
			row.Cells = append(row.Cells, number(words.Count(test.K), float64(test.K)), text(words.AsymmetryStatistic(test)), text(words.PValue(test.LnP)),
				number(oddsCell(ln), ln), number(words.Steps(test.Evidence.Steps()), ln))
		}
		t.Rows = append(t.Rows, row)
	}
	t.pad()
	return t
}

// adjustedTable sets the results under each assumption side by side.
func (v *view) adjustedTable(o *synthesis.Outcome, a *synthesis.SmallStudy) tableView {
	t := v.table("The effect under ideas of what is missing", heads("Adjusted by", estimateHead(o), "#Effect : none", "#Steps", "#Change")...)
	cells := func(name string, m meta.Mean) rowView {
		row := rowView{Cells: []cellView{text(name), {Text: words.AdjustedInterval(o, m), Number: true}}}
		if !o.Analysis.NullMissing {
			ln := m.Evidence.Ln()
			row.Cells = append(row.Cells, number(oddsCell(ln), ln), number(words.Steps(m.Evidence.Steps()), ln),
				number(words.StepsChange(m.Evidence.Steps()-a.Pooled.Evidence.Steps()), 0))
		}
		return row
	}
	main := cells("Not adjusted", a.Pooled)
	main.Main = true
	t.Rows = append(t.Rows, main)
	for _, r := range a.Adjusted {
		if r.Problem != "" {
			t.Rows = append(t.Rows, rowView{Cells: []cellView{text(words.AdjustedName(r)), text("no result: " + r.Problem)}})
			continue
		}
		t.Rows = append(t.Rows, cells(words.AdjustedName(r), r.Mean))
		t.Notes = append(t.Notes, fmt.Sprintf("%s: %s (%s).", r.Method.Title(), r.Method.Assumption(), r.Method.Source()))
	}
	t.pad()
	return t
}
