package words

import (
	"fmt"
	"maps"
	"math"
	"slices"
	"strings"

	"steelyard/meta"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// smallNumbers are whole numbers that a sentence writes out.
var smallNumbers = [...]string{"no", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine", "ten", "eleven", "twelve"}

// NumberInSentence returns a count, the small ones written out: "nine", "1,871".
func NumberInSentence(n int) string {
	if n >= 0 && n < len(smallNumbers) {
		return smallNumbers[n]
	}
	return Count(n)
}

// PooledPeople returns what was pooled: "nine trials with 1,871 people".
func PooledPeople(s *synthesis.Synthesis, o *synthesis.Outcome) string {
	k := len(o.Studies)
	text := NumberInSentence(k) + " " + Noun(s, k)
	if o.Counts.Participants > 0 {
		text += fmt.Sprintf(" with %s people", Count(o.Counts.Participants))
	}
	return text
}

// MeanEstimate returns the pooled estimate as a reader sees it: "0.71".
func MeanEstimate(o *synthesis.Outcome) string { return ReaderValue(o, o.Result.Fit.Mean.Estimate) }

// MeanInterval returns the interval of the pooled estimate with its level: "95%
// interval 0.58 to 0.86".
func MeanInterval(o *synthesis.Outcome) string {
	m := o.Result.Fit.Mean
	return Level(o.Result.Fit.Model.Level) + " interval " + ReaderInterval(o, meta.Limits{Low: m.Low, High: m.High})
}

// Direction says on which side of no effect a pooled estimate lies, whether that side
// is wanted, and whether its interval holds no effect: "It lies below 1, the wanted
// side; the interval excludes 1."; blank without a null.
func Direction(o *synthesis.Outcome) string {
	if o.Analysis.NullMissing {
		return ""
	}
	m, null := o.Result.Fit.Mean, o.Result.Fit.Model.Null
	none := plain(effect.ToReader(o.Analysis.Measure, null))
	side := "below"
	switch {
	case m.Estimate == null:
		return fmt.Sprintf("It lies at %s, no effect.", none)
	case m.Estimate > null:
		side = "above"
	}
	text := fmt.Sprintf("It lies %s %s", side, none)
	switch wanted := wantedSide(o.Analysis.Better); {
	case wanted == side:
		text += ", the wanted side"
	case wanted != "":
		text += ", the unwanted side"
	}
	if m.Low <= null && null <= m.High {
		return text + fmt.Sprintf("; the interval includes %s.", none)
	}
	return text + fmt.Sprintf("; the interval excludes %s.", none)
}

// ModelShort names effects, measure and estimate for a reviewer: "Random-effects risk
// ratio 0.71 (0.58 to 0.86); t = −4.04 on 8 df, p = 0.004."
func ModelShort(o *synthesis.Outcome) string {
	fit := o.Result.Fit
	name := "Random-effects "
	switch {
	case fit.Mean.K == 1:
		name = "Its own "
	case fit.Model.Effects == meta.CommonEffect:
		name = "Common-effect "
	}
	text := name + Measure(o.Analysis.Measure) + " " + Reader(o, fit.Mean.Estimate, meta.Limits{Low: fit.Mean.Low, High: fit.Mean.High})
	if o.Analysis.NullMissing {
		return text + "."
	}
	return text + "; " + Test(fit.Mean) + "."
}

// SpreadSentence says how far the studies spread and where the next one's true effect
// may lie; blank for one study.
func SpreadSentence(s *synthesis.Synthesis, o *synthesis.Outcome) string {
	fit := o.Result.Fit
	if fit.Mean.K < 2 {
		return ""
	}
	if fit.Model.Effects == meta.CommonEffect {
		return fmt.Sprintf("One effect is assumed for all %s. %s.", Noun(s, 2), Scatter(fit))
	}
	text := "Spread between " + Noun(s, 2) + ": " + Spread(fit) + "."
	if p := fit.Prediction; p != nil {
		text += fmt.Sprintf(" The next %s’s true effect may lie between %s and %s.", Noun(s, 1), ReaderValue(o, p.Low), ReaderValue(o, p.High))
	}
	return text
}

// SideCount says how many estimates lie on the pooled one's side of no effect: "Eight
// of nine estimates lie below 1."; blank without a null or for one study.
func SideCount(o *synthesis.Outcome) string {
	k := len(o.Studies)
	if o.Analysis.NullMissing || k < 2 {
		return ""
	}
	null := o.Result.Fit.Model.Null
	below, side := 0, "below"
	for i := range o.Studies {
		if o.Studies[i].Estimate.Y < null {
			below++
		}
	}
	n := below
	if o.Result.Fit.Mean.Estimate > null {
		n, side = 0, "above"
		for i := range o.Studies {
			if o.Studies[i].Estimate.Y > null {
				n++
			}
		}
	}
	lie := "lie"
	if n == 1 {
		lie = "lies"
	}
	return Capital(fmt.Sprintf("%s of %s estimates %s %s %s.", NumberInSentence(n), NumberInSentence(k), lie, side, plain(effect.ToReader(o.Analysis.Measure, null))))
}

// PredictionSentence returns "The 95% prediction interval runs from 0.49 to 1.03.", or
// blank where there is none.
func PredictionSentence(o *synthesis.Outcome) string {
	p := o.Result.Fit.Prediction
	if p == nil {
		return ""
	}
	return fmt.Sprintf("The %s prediction interval runs from %s to %s.", Level(o.Result.Fit.Model.Level), ReaderValue(o, p.Low), ReaderValue(o, p.High))
}

// LatestArrival says what the latest arrivals did to the evidence: "Latest to arrive:
// Obradović 2024 (2024-08), +0.81 steps, to 29 : 1 for an effect."; blank without an
// order by date or a result before them.
func LatestArrival(o *synthesis.Outcome) string {
	a := o.Accrual
	if a == nil || len(a.Cumulative) < 2 || a.Order.By != synthesis.OrderByDate || o.Analysis.NullMissing {
		return ""
	}
	last := a.Cumulative[len(a.Cumulative)-1]
	if last.Problem != nil || last.Added == nil {
		return ""
	}
	return fmt.Sprintf("Latest to arrive: %s (%s), %s steps, to %s.", namesOf(o, last.Entered), last.At, StepsChange(*last.Added), Evidence(last.Mean.Evidence))
}

// BeforeLatest says what the result was before the latest arrivals: "Before it: 0.71
// (0.56 to 0.91), 10 : 1 for an effect."; blank where LatestArrival is.
func BeforeLatest(o *synthesis.Outcome) string {
	if LatestArrival(o) == "" {
		return ""
	}
	before := o.Accrual.Cumulative[len(o.Accrual.Cumulative)-2]
	if before.Problem != nil {
		return ""
	}
	return "Before that: " + Answer(o, before.Mean) + "."
}

// namesOf names studies by their rows, at most as many as a sentence names.
func namesOf(o *synthesis.Outcome, rows []int) string {
	var names []string
	for i, row := range rows {
		if i == mostNamed {
			names = append(names, fmt.Sprintf("%d more", len(rows)-i))
			break
		}
		names = append(names, nameInSentence(o.Studies[row].Source.Name))
	}
	return strings.Join(names, ", ")
}

// longestName is how many characters of a name stand in a sentence.
const longestName = 60

// nameInSentence cuts a name that would burst a sentence.
func nameInSentence(name string) string {
	runes := []rune(name)
	if len(runes) <= longestName {
		return name
	}
	return strings.TrimSpace(string(runes[:longestName-1])) + "…"
}

// CumulativeSentence says when the evidence first passed the step below where it
// stands and did not fall back: "At or above 14 : 1 since Obradović 2024 (2024-08)."
func CumulativeSentence(o *synthesis.Outcome) string {
	a := o.Accrual
	if a == nil || len(a.Cumulative) < 2 || o.Analysis.NullMissing {
		return ""
	}
	step := math.Floor(o.Result.Fit.Mean.Evidence.Steps())
	if step < 1 {
		highest := 0.0
		for _, e := range a.Cumulative {
			if e.Problem == nil {
				highest = max(highest, e.Mean.Evidence.Ln())
			}
		}
		return fmt.Sprintf("The highest point on the way was %s.", OddsInSentence(highest))
	}
	since := len(a.Cumulative) - 1
	for since > 0 && a.Cumulative[since-1].Problem == nil && a.Cumulative[since-1].Mean.Evidence.Steps() >= step {
		since--
	}
	e := a.Cumulative[since]
	text := fmt.Sprintf("At or above %s since %s", Odds(step*evidence.LnStep), namesOf(o, e.Entered))
	if e.At != "" {
		text += " (" + e.At + ")"
	}
	return text + "."
}

// LeaveOneOutSentence says between which odds the evidence lies without each study.
func LeaveOneOutSentence(s *synthesis.Synthesis, o *synthesis.Outcome) string {
	if o.Accrual == nil || o.Analysis.NullMissing {
		return ""
	}
	least, most := -1, -1
	all := o.Accrual.LeaveOneOut
	for i, x := range all {
		switch {
		case x.Problem != nil:
			continue
		case least < 0:
			least, most = i, i
		}
		if x.Mean.Evidence.Ln() < all[least].Mean.Evidence.Ln() {
			least = i
		}
		if x.Mean.Evidence.Ln() > all[most].Mean.Evidence.Ln() {
			most = i
		}
	}
	if least < 0 || least == most {
		return ""
	}
	name := func(i int) string { return nameInSentence(o.Studies[all[i].Row].Source.Name) }
	return fmt.Sprintf("Without any one %s the evidence lies between %s (without %s) and %s (without %s).", Noun(s, 1),
		OddsInSentence(all[least].Mean.Evidence.Ln()), name(least), OddsInSentence(all[most].Mean.Evidence.Ln()), name(most))
}

// RegionsSentence says what the data say of the effects large enough to matter; blank
// without an important difference.
func RegionsSentence(o *synthesis.Outcome, r synthesis.Region) string {
	text := fmt.Sprintf("%s (%s): %s", Capital(r.Name), RegionRange(o, r), RegionEvidence(r))
	if r.Settings >= 0 {
		text += fmt.Sprintf("; %s of settings predicted there", Probability(r.Settings))
	}
	return text + "."
}

// Capital returns text with its first letter as a capital.
func Capital(text string) string {
	for i, r := range text {
		return strings.ToUpper(string(r)) + text[i+len(string(r)):]
	}
	return text
}

// Changes says what a planned run changes: "only where risk of bias is low", "effects
// common".
func Changes(run review.Run) string {
	var all []string
	for _, name := range slices.Sorted(maps.Keys(run.Changes)) {
		if name == review.SettingWhere {
			all = append(all, "only where "+run.Changes[name])
		} else {
			all = append(all, name+" "+run.Changes[name])
		}
	}
	return strings.Join(all, ", ")
}
