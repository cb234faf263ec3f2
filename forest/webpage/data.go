package webpage

import (
	"slices"

	"steelyard/meta"
	"steelyard/meta/synthesis"
)

// Data is what the page's script reads: one JSON island, <script
// type="application/json" id="data">. The texts are those of package words, so that the
// script shows numbers and makes none.
type Data struct {
	Outcomes []OutcomeData `json:"outcomes"`
}

// OutcomeData is the data of one outcome. ID is the prefix of its elements' ids.
type OutcomeData struct {
	ID    string `json:"id"`
	Title string `json:"title"`
	// Span is the width of the beam's scale in steps, From its start.
	Span float64 `json:"span"`
	From float64 `json:"from"`
	// Priors are the stops of the slider of beliefs; Prior is where it starts.
	Priors []priorStop `json:"priors"`
	Prior  int         `json:"prior"`
	// Rows are the marks of the studies in the charts: the rows of the chart of that
	// name, from the first, as "o1-3".
	Rows map[string][]string `json:"rows"`
	// Studies are the pooled rows by their marks, Left those that are not pooled.
	Studies []StudyRow `json:"studies"`
	Left    []StudyRow `json:"left"`
	// Baselines are the stops of the slider of baseline risks; absent without one.
	Baselines []BaselineStop `json:"baselines,omitempty"`
	Baseline  int            `json:"baseline"`
}

// StudyRow is a study with its row in the sheet and its mark; blank if it is not pooled.
type StudyRow struct {
	Mark string `json:"mark,omitempty"`
	Row  int    `json:"row"`
	Name string `json:"name"`
}

// BaselineStop is a baseline risk and the texts and places that go with it, by the
// names of the slots that they fill.
type BaselineStop struct {
	Texts map[string]string  `json:"texts"`
	Bars  map[string]float64 `json:"bars"` // per cent of the widest, by the name of the bar
}

// outcomeData returns the data of an outcome; one without a result has none but its rows.
func (v *view) outcomeData(o *synthesis.Outcome, w *outcomeView) OutcomeData {
	d := OutcomeData{ID: w.ID, Title: w.Name, Span: v.spans[w.ID], From: beamFrom, Priors: []priorStop{}, Rows: map[string][]string{}, Studies: []StudyRow{}, Left: []StudyRow{}}
	for i := range o.Studies {
		d.Studies = append(d.Studies, StudyRow{studyMark(w.ID, i), o.Studies[i].Source.Row.Row, o.Studies[i].Source.Name})
	}
	for _, e := range o.Excluded {
		d.Left = append(d.Left, StudyRow{Row: e.Place.Row, Name: e.Study})
	}
	if o.Result == nil {
		return d
	}
	if w.Answer.Beliefs != nil {
		d.Priors, d.Prior = w.Answer.Beliefs.Stops, w.Answer.Beliefs.Start
	}
	var sheet []string
	for i := range o.Studies {
		sheet = append(sheet, studyMark(w.ID, i))
	}
	d.Rows["forest"] = sheet
	if o.Accrual != nil && len(o.Accrual.LeaveOneOut) > 0 {
		for _, x := range drawnOrder(byCarried(o)) {
			d.Rows["leave-one-out"] = append(d.Rows["leave-one-out"], studyMark(w.ID, x.Row))
		}
	}
	if b, ok := v.baselines[w.ID]; ok {
		d.Baselines, d.Baseline = b.stops, b.start
	}
	return d
}

// drawnOrder puts analyses without a result last, as the chart does.
func drawnOrder(all []meta.Omission) []meta.Omission {
	slices.SortStableFunc(all, func(a, b meta.Omission) int {
		switch {
		case a.Problem == nil && b.Problem != nil:
			return -1
		case a.Problem != nil && b.Problem == nil:
			return 1
		}
		return 0
	})
	return all
}
