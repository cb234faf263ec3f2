package webpage

import (
	"steelyard/forest/words"
	"steelyard/meta"
	"steelyard/meta/synthesis"
)

// trials is the section of the forest chart and the heterogeneity.
func (v *view) trials(s *synthesis.Synthesis, o *synthesis.Outcome, id string) (*sectionView, error) {
	f, err := v.figure(s, o, id, kind("forest"))
	if err != nil {
		return nil, err
	}
	w := &sectionView{
		Items: "19, 20b, 20c", Heading: "What did the " + words.Noun(s, 2) + " find?",
		Under: keep(words.SideCount(o), words.PredictionSentence(o)), Figures: []figureView{f},
	}
	if len(o.Studies) > 1 {
		w.Tables = append(w.Tables, v.heterogeneity(o))
	}
	return w, nil
}

// accrual is the section of the cumulative chart; nil if there is no such analysis.
func (v *view) accrual(s *synthesis.Synthesis, o *synthesis.Outcome, id string) (*sectionView, error) {
	if o.Accrual == nil || len(o.Accrual.Cumulative) < 2 {
		return nil, nil
	}
	if v.extent != Whole {
		v.figures, v.tables = v.figures+1, v.tables+1
		return nil, nil
	}
	f, err := v.figure(s, o, id, kind("cumulative"))
	if err != nil {
		return nil, err
	}
	table := v.cumulativeTable(s, o)
	table.Folded, table.Summary = true, "Numbers of this figure"
	return &sectionView{
		Items: "20b", Heading: "How did the evidence arrive?",
		Under:   keep(words.CumulativeSentence(o), "Descriptive: not a rule for stopping."),
		Figures: []figureView{f}, Tables: []tableView{table},
	}, nil
}

// rests is the section of leave-one-out and of the planned runs; nil for one study.
func (v *view) rests(s *synthesis.Synthesis, o *synthesis.Outcome, id string) (*sectionView, error) {
	w := &sectionView{Items: "13f, 20d", Heading: "What does it rest on?", Under: keep(words.LeaveOneOutSentence(s, o))}
	without := o.Accrual != nil && len(o.Accrual.LeaveOneOut) > 1
	if v.extent != Whole {
		if without {
			v.figures, v.tables = v.figures+1, v.tables+1
		}
		if len(o.Studies) > 1 {
			v.tables++
		}
		return nil, nil
	}
	if without {
		f, err := v.figure(s, o, id, kind("leave-one-out"))
		if err != nil {
			return nil, err
		}
		table := v.leaveOneOutTable(s, o)
		table.Folded, table.Summary = true, "Numbers of this figure"
		w.Figures, w.Tables = []figureView{f}, []tableView{table}
	}
	if len(o.Studies) > 1 || len(o.Runs) > 0 {
		w.Tables = append(w.Tables, v.runsTable(o))
	}
	if len(w.Tables) == 0 {
		return nil, nil
	}
	return w, nil
}

// other is the section of other beliefs; nil where none were weighed.
func (v *view) other(s *synthesis.Synthesis, o *synthesis.Outcome, id string) (*sectionView, error) {
	b := o.Beliefs
	if b == nil {
		return nil, nil
	}
	f, err := v.figure(s, o, id, kind("prior-sensitivity"))
	if err != nil {
		return nil, err
	}
	w := &sectionView{
		Items: "20d", Heading: "Would another belief change the answer?",
		Under: keep(words.Capital(words.PriorBound(b))+".", words.Capital(words.Scepticism(o, b))+"."), Figures: []figureView{f},
	}
	for _, d := range b.Doubters {
		w.After = append(w.After, words.Capital(words.Doubter(d))+".")
	}
	w.Tables = []tableView{v.beliefTable(b)}
	return w, nil
}

func predictionText(o *synthesis.Outcome) string {
	p := o.Result.Fit.Prediction
	return words.ReaderInterval(o, meta.Limits{Low: p.Low, High: p.High})
}
