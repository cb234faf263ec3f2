package rules

import (
	"slices"

	"steelyard/meta/review"
)

// Rule is an entry of the catalogue.
type Rule struct {
	ID        string
	Title     string
	Severity  string // in words, since some rules have two
	Threshold string // in words
	Source    string
	Needs     [][]review.Field // sets of columns, any one of which is enough; nil where every sheet can be checked
}

// Catalogue returns every rule, in the order of running: those of the file, which
// the reader checks, of identity, counts, means and intervals, and of the analysis,
// which need a fit.
func Catalogue() []Rule {
	return slices.Concat(fileRules, identityRules, countRules, meanRules, intervalRules, analysisRules)
}

// Unchecked is a rule that a sheet's columns do not suffice for, with the fewest
// columns that are missing.
type Unchecked struct {
	Rule
	Missing []review.Field
}

// NotChecked returns the rules that a sheet's columns do not suffice for.
func NotChecked(x *review.Extraction) []Unchecked {
	have := columnsOf(x)
	var all []Unchecked
	for _, r := range Catalogue() {
		if missing := r.missing(have); len(missing) > 0 {
			all = append(all, Unchecked{r, missing})
		}
	}
	return all
}

func columnsOf(x *review.Extraction) map[review.Field]bool {
	have := map[review.Field]bool{}
	for _, c := range x.Columns {
		have[c.Field] = true
	}
	for i := range x.Studies {
		for _, n := range x.Studies[i].Numbers {
			have[n.Field] = true // a column may be read as another, such as of logarithms
		}
	}
	return have
}

// missing returns the columns that the nearest of the rule's sets lacks; none where
// it can be checked.
func (r Rule) missing(have map[review.Field]bool) []review.Field {
	var fewest []review.Field
	for i, set := range r.Needs {
		missing := slices.DeleteFunc(slices.Clone(set), func(f review.Field) bool { return have[f] })
		if len(missing) == 0 {
			return nil
		}
		if i == 0 || len(missing) < len(fewest) {
			fewest = missing
		}
	}
	return fewest
}

const (
	practice  = "common practice"
	confirmed = " (to be confirmed)"
)

// Sets of columns that several rules need.
var (
	needCounts  = []review.Field{review.EventsTreated, review.TotalTreated, review.EventsControl, review.TotalControl}
	needMeans   = []review.Field{review.MeanTreated, review.SDTreated, review.TotalTreated, review.MeanControl, review.SDControl, review.TotalControl}
	needLimits  = []review.Field{review.Estimate, review.LimitLow, review.LimitHigh}
	needLogs    = []review.Field{review.AnalysisEstimate, review.AnalysisLow, review.AnalysisHigh}
	needBeside  = []review.Field{review.ReportedEstimate, review.ReportedLow, review.ReportedHigh}
	needSE      = []review.Field{review.Estimate, review.StandardError}
	needLogSE   = []review.Field{review.AnalysisEstimate, review.StandardError}
	needScale   = []review.Field{review.MeanTreated, review.ScaleLow, review.ScaleHigh}
	anyEstimate = [][]review.Field{needLimits, needLogs, needBeside, needSE, needLogSE}
)

// plus adds columns to each of several sets.
func plus(sets [][]review.Field, fields ...review.Field) [][]review.Field {
	var all [][]review.Field
	for _, set := range sets {
		all = append(all, slices.Concat(set, fields))
	}
	return all
}

// one returns the sets of one column each.
func one(fields ...review.Field) [][]review.Field {
	var all [][]review.Field
	for _, f := range fields {
		all = append(all, []review.Field{f})
	}
	return all
}

var fileRules = []Rule{
	{"F1", "text turned into a date", "error", "a date, or text such as 3-Dec, in a column of numbers", "Ziemann 2016", nil},
	{"F2", "date stored as a number", "error", "a whole number from 20000 to 60000 where the column's other values have a median below 2000 and none reaches 10000", "Ziemann 2016", nil},
	{"F3", "decimal comma", "error where it may part thousands, else note", "a comma before three digits and nothing in the column tells what it means", practice, nil},
	{"F4", "two decimal marks in a column", "error", "points and commas both mark decimals", practice, nil},
	{"F5", "odd minus, blanks or points", "note", "signs that stand for a minus, a blank or a point are read as such", practice, nil},
	{"F6", "marks in a numeric cell", "error; warning where read as missing or a bound", "<, >, ~, *, letters, %, NS or n/a beside or in place of a number", "Cochrane Handbook 6.3", nil},
	{"F7", "code for a missing number", "warning", "-1, 9, 99, 999 or 9999, or one of them below 0, twice or more and beyond 5 median absolute deviations of the column", practice, nil},
	{"F8", "0 events without a source", "warning", "0 events where source, how obtained and note are blank or say not reported", "Xu 2022", [][]review.Field{{review.EventsTreated, review.SourceField}, {review.EventsTreated, review.HowObtained}, {review.Events, review.SourceField}}},
	{"F9", "header, sheet or row is not one to be read", "error, warning or note", "headers given twice, merged or hidden cells, a second table, formulas without a value, rows without a name or a full set of numbers", practice, nil},
	{"F10", "row of totals", "error", "named total, overall, pooled or the like; or every count the sum of the others, give or take one", practice, nil},
	{"F11", "number beyond any result", "error", "too large to be a result of a study", "Ziemann 2016", nil},
	{"F12", "year", "warning; note for a letter after it", "before 1800 or after 2100, not four digits, or against the date", practice, nil},
}

var identityRules = []Rule{
	{"D1", "same row twice", "error", "all numbers equal, and the same or nearly the same name (two edits), id or registration", "Tramèr 1997; Senn 2009", nil},
	{"D2", "same numbers under another name", "warning", "events and totals, or means, SDs and totals, equal with 20 people or more; estimate and limits equal in three digits each; or three of four counts equal within 3 years", "Tramèr 1997", [][]review.Field{needCounts, needMeans, needLimits}},
	{"D3", "overlapping reports", "warning", "the same first author or registration and comparison, sizes within 20%, dates within 5 years", "Cochrane Handbook 4.6" + confirmed, plus(one(review.TotalTreated, review.Total))},
	{"D4", "control arm used twice", "error", "two rows of one study in one outcome with the same control arm", "Senn 2009; Cochrane Handbook 6.2.9, 23.3.4" + confirmed, [][]review.Field{{review.EventsControl, review.TotalControl}, {review.MeanControl, review.SDControl, review.TotalControl}}},
	{"D5", "several times or scales of one study", "error; warning where nothing tells the rows apart", "one study twice in an outcome, at another time, unit or scale", "Cochrane Handbook 6.2; Tendal 2009", nil},
	{"D6", "parts and the whole", "error", "a row's people are those of the study's other rows together, give or take one", practice, plus(one(review.TotalTreated, review.Total))},
	{"D7", "clusters taken for people", "warning", "clusters were randomised, and no design effect, icc or adjusted estimate is given", "Cochrane Handbook 23.1", one(review.Design, review.Cluster)},
	{"D8", "cross-over taken for two groups", "error where no correlation is given; warning", "the standard error is within 5% of that of two separate groups", "Cochrane Handbook 23.2", one(review.Design)},
	{"D9", "parts of people counted", "warning", "the unit is eyes, limbs, teeth, lesions or the like", "Cochrane Handbook 6.2", one(review.Unit)},
}

var countRules = []Rule{
	{"C1", "events exceed people", "error", "more events than people, or a count below 0", practice, one(review.TotalTreated, review.Total, review.PersonTimeTreated, review.PersonTime)},
	{"C2", "broken count", "error", "events or people no whole number", practice, one(review.TotalTreated, review.Total)},
	{"C3", "percentages for counts", "error", "broken or excessive events, none above 100, of which 90% are whole numbers of people as a share of the total", practice, [][]review.Field{needCounts}},
	{"C4", "outcome or arms reversed", "warning", "risks above 0.5 in both arms where all other studies have less than 0.2, or the reverse; a reported ratio is that of the counts turned round", "Xu 2022; Cochrane Handbook 6.4", [][]review.Field{needCounts}},
	{"C5", "more analysed than randomised", "error; note for losses", "people analysed exceed people randomised; more than 20% lost, or 10 points more in one arm", practice, [][]review.Field{{review.TotalTreated, review.RandomisedTreated}, {review.TotalControl, review.RandomisedControl}}},
	{"C6", "arms do not add up", "warning", "the total is not that of both arms; arms differ by more than 10% between outcomes without a note; beyond 3:1 where the design says 1:1", practice, [][]review.Field{{review.TotalTreated, review.TotalControl}}},
	{"C7", "total in the wrong column", "warning", "a total is the year, the mean or the events of its row, or alone beyond 50 times the column's median or a fiftieth of it", practice, one(review.TotalTreated)},
	{"C8", "arms without events", "warning; note for a row left out", "no event, or nothing but events, in an arm of more than 20% of rows, or of any where fewer than 1% of people have the event", "Cochrane Handbook 10.4.4; BMJ 2020;368:l7078", [][]review.Field{needCounts}},
	{"C9", "hardly any events", "warning", "fewer than 5 events in an arm over all studies, or fewer than 10 in all", "BMJ 2020;368:l7078", [][]review.Field{needCounts}},
	{"C10", "result against counts or means", "warning", "a reported result differs by more than rounding and 2% from that of the row's own numbers, or by half a standard error if adjusted", "Cochrane Handbook 6.4.1", slices.Concat(plus([][]review.Field{needCounts, needMeans}, review.ReportedEstimate), plus([][]review.Field{needCounts, needMeans}, review.Estimate))},
	{"C11", "harms taken for none", "warning", "0 events in both arms without a source, in two studies or more", "Xu 2022", [][]review.Field{slices.Concat(needCounts, []review.Field{review.SourceField}), slices.Concat(needCounts, []review.Field{review.HowObtained})}},
}

var meanRules = []Rule{
	{"M1", "SE for SD, shown by the result", "error", "SD × √n is 0.8 to 1.25 times the SD that interval, standard error, test or p-value of the difference implies; 5 people or more", "Gøtzsche 2007; Kadlec 2023; Cochrane Handbook 6.5.2", slices.Concat(plus([][]review.Field{needMeans}, review.ReportedLow, review.ReportedHigh), plus([][]review.Field{needMeans}, review.LimitLow, review.LimitHigh), plus([][]review.Field{needMeans}, review.StandardError), plus([][]review.Field{needMeans}, review.TestStatistic), plus([][]review.Field{needMeans}, review.PValue), plus([][]review.Field{needMeans}, review.ReportedP))},
	{"M2", "SE for SD, shown by the other studies", "warning", "the SD is less than a third of the median and, times √n, within 1.5 times of it; 4 studies or more", "Kadlec 2023", [][]review.Field{needMeans}},
	{"M3", "SD for SE", "warning", "SE × √n is more than 3 times the median SD, and the SE itself within 1.5 times of it", practice, [][]review.Field{{review.SETreated}, {review.SEControl}}},
	{"M4", "implausible difference", "error above 5; warning above 3; note above 1.5 with 100 people", "a difference of so many SDs", "Kadlec 2023", [][]review.Field{needMeans}},
	{"M5", "impossible on its scale", "error", "a mean outside the scale, or an SD above √((mean − low)(high − mean)·n/(n − 1))", "Bhatia and Davis 2000", [][]review.Field{needScale}},
	{"M6", "SD of 0, or copied", "error for 0 or less; warning for copies", "an SD not above 0; the same SD in both arms of 3 studies or more", practice, one(review.SDTreated, review.StandardError)},
	{"M7", "mean that whole answers cannot have", "warning", "no whole sum of n people's answers to the items gives the mean within rounding", "Brown and Heathers 2017", [][]review.Field{{review.MeanTreated, review.TotalTreated, review.Items}}},
	{"M8", "skewed values", "warning below 1; note below 2", "the mean lies so many SDs above the lowest value", "Altman and Bland 1996; Cochrane Handbook 10.5.3", [][]review.Field{{review.MeanTreated, review.SDTreated, review.ScaleLow}}},
	{"M9", "range for SD", "warning", "an SD above 80% of its scale; or within 10% of 1.35 times the median of 8 studies or more that agree closely", "Cochrane Handbook 6.5.2.5", [][]review.Field{needMeans}},
	{"M10", "half an interval for SE or SD", "warning", "1.96 times the standard error that the row's other numbers imply, within 5%", practice, slices.Concat(plus([][]review.Field{needMeans}, review.ReportedLow, review.ReportedHigh), plus([][]review.Field{needLimits, needCounts, needMeans}, review.StandardError))},
	{"M11", "changes and final values", "error where impossible; warning where mixed", "an SD of differences that would need a correlation beyond −1 to 1; standardised changes beside standardised final values", "Cochrane Handbook 10.5.2, 6.5.2.8", [][]review.Field{{review.SDTreated, review.SDControl, review.SDDifference}, {review.MeanTreated, review.ResultType}}},
	{"M12", "another unit", "warning", "both means differ from the median by the factor between two units, within 3% and the scatter of the others, and the SDs with them; 4 studies or more", practice, [][]review.Field{needMeans}},
	{"M13", "direction of the scale", "warning", "another direction is better than in most rows of the outcome", "Cochrane Handbook 10.5.1; Gøtzsche 2007", one(review.BetterField)},
	{"M14", "arms differ before treatment", "note", "by more than 1.3 × 2√(1/n₁ + 1/n₂) SDs", practice, [][]review.Field{{review.BaselineMeanTreated, review.BaselineSDTreated, review.BaselineMeanControl, review.BaselineSDControl, review.TotalTreated}}},
	{"M15", "median for mean", "warning", "a note speaks of a median; the mean is the middle of the quartiles; or the median lies off the middle by more than 0.25", "Wan 2014; Luo 2018", [][]review.Field{{review.MeanTreated, review.NoteField}, {review.MeanTreated, review.HowObtained}, {review.MeanTreated, review.Q1Treated}, {review.MedianTreated}}},
	{"M16", "imputed number", "note", "source or how obtained says so", "Cochrane Handbook 6.5.2.7", one(review.SourceField, review.HowObtained)},
}

var intervalRules = []Rule{
	{"I1", "limits out of order", "error", "the estimate does not lie between its limits", practice, [][]review.Field{needLimits, needLogs}},
	{"I2", "limits uneven", "error above 0.5 standard errors; warning above 0.1", "the middle of the limits and the estimate, on the analysis scale, lie apart beyond rounding", "Cochrane Handbook 6.3", [][]review.Field{needLimits, needLogs, needBeside}},
	{"I3", "ratios for logarithms", "error; warning where no measure is stated", "even as logarithms (0.02) and uneven as they stand (0.1); or so in half of a column whose limits are all above 0 around 0.3 to 3", "Cochrane Handbook 6.3", [][]review.Field{needLimits, needLogs}},
	{"I4", "logarithms for ratios", "error", "a ratio, or its limit, not above 0", practice, one(review.Estimate, review.LimitLow, review.Coefficient)},
	{"I5", "SE of the ratio", "error", "off by more than 10% for the logarithm and within 5% times the estimate", practice, slices.Concat(plus([][]review.Field{needLimits, needCounts}, review.StandardError))},
	{"I6", "level of the limits", "error for none; warning", "half the width is within 3% of 1.28, 1.645 or 2.576 standard errors and not of its own level's", "Cochrane Handbook 6.3", [][]review.Field{slices.Concat(needLimits, []review.Field{review.StandardError}), slices.Concat(needCounts, needLimits), slices.Concat(needMeans, needLimits)}},
	{"I7", "p against the estimate", "error across 0.05; else warning", "no values within rounding agree, by z or by t", "Cochrane Handbook 6.3", slices.Concat(plus([][]review.Field{needLimits, needLogs, needSE, needLogSE}, review.PValue), plus([][]review.Field{needBeside}, review.ReportedP))},
	{"I8", "p that may be a bound", "error beyond 0 to 1; warning", "p is 0.05, 0 or 1 just, and the standard error rests on it", "Cochrane Handbook 6.3", one(review.PValue)},
	{"I9", "one-sided p", "error for other numbers of sides; warning", "twice the p agrees within rounding or 5%", practice, slices.Concat(plus([][]review.Field{needLimits, needLogs, needSE, needLogSE}, review.PValue), plus([][]review.Field{needBeside}, review.ReportedP), one(review.PSides))},
	{"I10", "standard error too small", "error; warning if adjusted", "less than 97% of 4/√N for log odds ratios, 2/√events for log hazard ratios, 2/√N for standardised differences; 3% off 1/√(n − 3) for correlations", "algebra", slices.Concat(plus(anyEstimate, review.TotalTreated), plus(anyEstimate, review.Total), plus(anyEstimate, review.Events), plus(anyEstimate, review.EventsTreated))},
	{"I11", "standard error out of line", "warning", "ln(s√N) beyond 3.5 robust standard deviations of 6 studies or more, counts left out", practice, slices.Concat(plus(anyEstimate, review.TotalTreated), plus(anyEstimate, review.Total), [][]review.Field{needMeans})},
	{"I12", "ways to a hazard ratio disagree", "error on the other side of 1; else warning", "variance above a quarter of the events by 3%, or (O − E)/V apart from the logarithm beyond rounding and 0.02", "Parmar 1998; Tierney 2007", one(review.Variance)},
	{"I13", "hazard ratio from a curve", "note", "source or how obtained says so", "Tierney 2007", one(review.SourceField, review.HowObtained)},
	{"I14", "sign or inversion", "warning", "the studentised residual from the other studies exceeds 3, and turned round it is below 1", "Gøtzsche 2007", nil},
	{"I15", "outlier", "note", "the same residual exceeds 3 and turning round does not explain it", "Cochrane Handbook 10.10.2", nil},
	{"I16", "one study decides", "warning by weight; note by interval", "more than half of the common-effect weight and less than a quarter of the random-effects weight; or without it the interval leaves or reaches no effect", "PRISMA 2020 item 13f", nil},
	{"I17", "limits rounded too far", "note", "rounding leaves the standard error open by more than 10%", practice, [][]review.Field{needLimits, needLogs}},
	{"I18", "adjusted and unadjusted mixed", "note", "adjusted says both within an outcome", "Cochrane Handbook 24" + confirmed, one(review.Adjusted)},
	{"I19", "slip of a decimal place", "warning", "10 times or a tenth brings the robust z of ln(s√N), or the residual, from beyond 4 to below 1", practice, nil},
	{"I20", "two measures in a column", "error", "some rows report the odds ratio of their counts, others the risk ratio; or the header and the row name different measures", practice, slices.Concat(plus([][]review.Field{needCounts}, review.ReportedEstimate), plus([][]review.Field{needCounts}, review.Estimate), one(review.MeasureField))},
}

var analysisRules = []Rule{
	{"A1", "few studies", "remark beside the result", "fewer than 5 studies under random effects; two leave one degree of freedom", "IntHout 2014; Röver 2015", nil},
	{"A2", "narrower than the ordinary interval", "warning", "the Hartung–Knapp factor is below 1 and the interval without floor is asked for", "Röver 2015", nil},
	{"A3", "estimators of the spread disagree", "warning", "τ² is 0 by one of DerSimonian–Laird, restricted maximum likelihood, Paule–Mandel and maximum likelihood and above 0 by another, or the interval leaves no effect by one and not by another", "Veroniki 2016", nil},
	{"A4", "common and random effects differ", "warning", "ratios apart by a factor above 1.2, or one interval leaves no effect and the other does not", "Higgins and Spiegelhalter 2002", nil},
	{"A5", "small studies differ", "warning", "Egger's test has p below 0.1, or Harbord's score test where an odds ratio is above 2 or below 0.5 and there are counts; from 10 studies on, if the largest standard error is 1.5 times the smallest", "Sterne 2011; Egger 1997", nil},
	{"A6", "prediction interval imprecise", "remark beside the result", "none below 3 studies; degrees of freedom are stated", "Higgins 2009; Cochrane Handbook 10.10.4.3" + confirmed, nil},
	{"A7", "studies of one date", "remark beside the cumulative result", "two studies or more of one date; the rule for ties is printed", practice, one(review.DateField)},
	{"A8", "repeated looks", "warning", "a living review has looked more than once at new studies, with an interval of 95% or less", "Simmonds 2017; Cochrane Handbook 22", nil},
	{"A9", "two extractions differ", "warning", "rows of one study differ by more than rounding; first those whose effects differ by 0.1 SD or 10%, or their standard errors by 10%", "Buscemi 2006; Gøtzsche 2007", nil},
}
