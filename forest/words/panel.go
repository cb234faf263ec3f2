package words

import (
	"fmt"
	"math"
	"strings"

	"steelyard/meta"
	"steelyard/meta/effect"
	"steelyard/meta/panel"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// Card is a panel's card of one outcome in words. Text, page, Markdown and workbook
// print the same card.
type Card struct {
	Title     string
	Pooled    string   // what was pooled, and how
	Facts     []Fact   // the relative effect and its evidence
	Absolute  *Table   // by baseline; nil where the measure has no absolute form
	Large     []Fact   // what the data say of the important difference
	Sentences []string // estimate, threshold and certainty, one for each baseline
	Domains   []DomainCard
	Certainty DomainCard // the panel's overall rating
	Remarks   []string
}

// Fact is a label with what is to be said.
type Fact struct{ Label, Text string }

// Table is a table in words; the first column holds names, the others stand at the
// right.
type Table struct {
	Heads []string
	Rows  [][]string
}

// DomainCard is one domain: the numbers beside it, and the panel's own rating.
type DomainCard struct {
	Domain  string
	Numbers []string
	Rating  string // NotRated without one
	Reason  string // with who judged and when; blank without a rating
	Rated   bool
}

// NotRated stands where the panel has entered no rating.
const NotRated = "not yet rated"

// PanelCard returns the card of an outcome with a panel's part and a result.
func PanelCard(s *synthesis.Synthesis, o *synthesis.Outcome) Card {
	c := Card{Title: o.Name, Pooled: Pooled(s, o), Facts: panelFacts(o)}
	if c.Title == "" {
		c.Title = s.Source.File
	}
	c.Absolute = absoluteTable(s, o)
	c.Large = largeEnough(o)
	c.Domains = domainCards(s, o)
	c.Certainty = rated(o, review.DomainCertainty, nil)
	c.Sentences = panelSentences(s, o, c.Certainty)
	c.Remarks = panelRemarks(s, o)
	return c
}

// Rows says how many rows were pooled: "9 trials"; "12 estimates from 6 trials" where
// some give several.
func Rows(s *synthesis.Synthesis, o *synthesis.Outcome) string {
	k := len(o.Studies)
	if o.Result != nil && o.Result.Fit.Clustered != nil {
		c := o.Result.Fit.Clustered
		return fmt.Sprintf("%s estimates from %s %s", Count(k), Count(c.Clusters), Noun(s, c.Clusters))
	}
	return fmt.Sprintf("%s %s", Count(k), Noun(s, k))
}

// Pooled says how much was pooled, and how: "9 trials, 1,871 participants;
// random effects, …".
func Pooled(s *synthesis.Synthesis, o *synthesis.Outcome) string {
	text := Rows(s, o)
	if o.Counts.Participants > 0 {
		text += fmt.Sprintf(", %s participants", Count(o.Counts.Participants))
	}
	if o.Counts.Events > 0 {
		text += fmt.Sprintf(", %s events", Count(o.Counts.Events))
	}
	return text + "; " + ModelOf(o)
}

// panelFacts are the relative effect and what stands beside it.
func panelFacts(o *synthesis.Outcome) []Fact {
	fit := o.Result.Fit
	about := Measure(o.Analysis.Measure) + ", " + Level(fit.Model.Level) + " interval"
	if wanted := Wanted(o); wanted != "" {
		about += "; " + wanted
	}
	interval := meta.Limits{Low: fit.Mean.Low, High: fit.Mean.High}
	facts := []Fact{{"Effect", Reader(o, fit.Mean.Estimate, interval) + ", " + about}}
	if text := backTranslated(o, fit.Mean.Estimate, interval); text != "" {
		facts = append(facts, Fact{"In its unit", text})
	}
	if p := fit.Prediction; p != nil {
		facts = append(facts, Fact{"In a new setting", fmt.Sprintf("%s, %s prediction interval for the true effect", ReaderInterval(o, meta.Limits{Low: p.Low, High: p.High}), Level(fit.Model.Level))})
	}
	if o.Analysis.NullMissing {
		return append(facts, Fact{"Evidence", NotWeighed(o)})
	}
	text := Evidence(fit.Mean.Evidence) + ": " + Strength(fit.Mean.Evidence)
	if remark := BiasRemark(o); remark != "" {
		text += "; " + remark
	}
	facts = append(facts, Fact{"Evidence", text})
	if r := o.Result.Integrated; r != nil {
		facts = append(facts, Fact{"", Evidence(r.Effect()) + ": " + Strength(r.Effect()) + "; " + TauPrior(r.Prior)})
	}
	return facts
}

// backTranslated reads a standardised difference in the outcome's unit by a stated
// standard deviation; blank for another measure or without one.
func backTranslated(o *synthesis.Outcome, y float64, interval meta.Limits) string {
	p := o.Panel
	if o.Analysis.Measure != effect.StandardisedMeanDifference || p.SD == nil {
		return ""
	}
	sd := p.SD.Value
	decimals := Decimals(sd * (interval.High - interval.Low) / 4)
	n := Notation{Decimals: decimals}
	return fmt.Sprintf("%s, at a standard deviation of %s (%s): a reading by that value, not a measured difference",
		n.Estimate(sd*y, sd*interval.Low, sd*interval.High), plain(sd), Origin(review.SettingSD, *p.SD.Stated))
}

// Origin says where a setting's value came from: "plan!B7", "--baseline", "the default".
func Origin(setting string, v review.Value) string {
	switch v.From {
	case review.FromFlag:
		return "--" + setting
	case review.FromSheet:
		return v.Place.String()
	}
	return "the default"
}

// absoluteTable has a row for each baseline with an absolute form.
func absoluteTable(s *synthesis.Synthesis, o *synthesis.Outcome) *Table {
	unit := "per 1000"
	if o.Analysis.Measure == effect.RateRatio {
		unit = "per 1000 of person time"
	}
	t := &Table{Heads: []string{"baseline", Treatment(s) + ", " + unit, "difference " + unit, "number needed to treat"}}
	for i := range o.Panel.Rows {
		r := &o.Panel.Rows[i]
		if r.Absolute == nil {
			continue
		}
		treated := r.Absolute.Treated
		cells := []string{BaselineName(r.Baseline), treatedRisk(treated), absoluteOf(r), Missing}
		if r.Needed != nil {
			cells[3] = Needed(*r.Needed)
		}
		t.Rows = append(t.Rows, cells)
	}
	if len(t.Rows) == 0 {
		return nil
	}
	return t
}

// absoluteOf returns the difference per 1000 of a row with its interval.
func absoluteOf(r *synthesis.PanelRow) string {
	d := r.Absolute.Difference
	return Absolute(1000*d.Value, 1000*d.Low, 1000*d.High)
}

// treatedRisk writes a risk per 1000 with its limits, all with the same decimals.
func treatedRisk(r panel.Range) string {
	decimals := absoluteDecimals(1000 * r.High)
	return WithInterval(Linear(1000*r.Value, decimals), Linear(1000*r.Low, decimals), Linear(1000*r.High, decimals))
}

// Per1000 writes a risk per 1000 people; a small one with decimals.
func Per1000(risk float64) string { return Linear(1000*risk, absoluteDecimals(1000*risk)) }

// BaselineName names a baseline: "low, 150 per 1000".
func BaselineName(b review.Baseline) string {
	if b.Name == "" {
		return Per1000(b.Risk) + " per 1000"
	}
	return b.Name + ", " + Per1000(b.Risk) + " per 1000"
}

// Treatment returns what the sheet calls the treated arm after "with", such as "with
// Brindle"; "with treatment" where it has no name.
func Treatment(s *synthesis.Synthesis) string {
	if name := s.Arms[0]; name != "" && !strings.EqualFold(name, "treated") {
		return "with " + name
	}
	return "with treatment"
}

// panelSentences say estimate, threshold and certainty in one line for each baseline.
func panelSentences(s *synthesis.Synthesis, o *synthesis.Outcome, certainty DomainCard) []string {
	judged := "certainty: " + certainty.Rating
	if certainty.Rated {
		judged += " (the panel's rating)"
	}
	fit := o.Result.Fit
	var all []string
	for i := range o.Panel.Rows {
		r := &o.Panel.Rows[i]
		if r.Absolute == nil {
			effect := Reader(o, fit.Mean.Estimate, meta.Limits{Low: fit.Mean.Low, High: fit.Mean.High})
			if text := backTranslated(o, fit.Mean.Estimate, meta.Limits{Low: fit.Mean.Low, High: fit.Mean.High}); text != "" {
				effect += ", in its unit " + text
			}
			all = append(all, fmt.Sprintf("%s: %s %s; %s; %s.", capital(Treatment(s)), Measure(o.Analysis.Measure), effect, thresholdWords(o, r), judged))
			continue
		}
		all = append(all, fmt.Sprintf("From %s, %s: %s per 1000; %s; %s.", BaselineName(r.Baseline), Treatment(s), absoluteOf(r), thresholdWords(o, r), judged))
	}
	return all
}

func capital(text string) string {
	if text == "" {
		return text
	}
	return strings.ToUpper(text[:1]) + text[1:]
}

// thresholdWords says what the panel called important on the side that is better,
// "threshold 40 fewer", and on both sides where the estimate is not on that one.
func thresholdWords(o *synthesis.Outcome, r *synthesis.PanelRow) string {
	z := r.Zone
	if z == nil {
		return "no threshold was set"
	}
	y, null := o.Result.Fit.Mean.Estimate, o.Analysis.Model.Null
	switch better := o.Analysis.Better; {
	case better == review.BetterLower && y <= null:
		return "threshold " + boundaryName(o, r, z.Limits.Low)
	case better == review.BetterHigher && y >= null:
		return "threshold " + boundaryName(o, r, z.Limits.High)
	}
	return fmt.Sprintf("thresholds %s and %s", boundaryName(o, r, z.Limits.Low), boundaryName(o, r, z.Limits.High))
}

// boundaryName names a value of the effect as the row shows it: "40 fewer", "no
// difference", "0.87"; "out of reach" where no effect of the baseline is so large.
func boundaryName(o *synthesis.Outcome, r *synthesis.PanelRow, y float64) string {
	switch {
	case math.IsInf(y, 0):
		return "out of reach here"
	case y == o.Analysis.Model.Null && o.Analysis.Model.Null == 0:
		return "no effect"
	case r.Zone != nil && r.Zone.Per1000 != nil && y == r.Zone.Limits.Low:
		return AbsoluteValue(r.Zone.Per1000.Low)
	case r.Zone != nil && r.Zone.Per1000 != nil && y == r.Zone.Limits.High:
		return AbsoluteValue(r.Zone.Per1000.High)
	}
	return ReaderValue(o, y)
}
