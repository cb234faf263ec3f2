package ingest

import (
	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// fieldHelp explains a column of the template.
type fieldHelp struct {
	text    string   // what to write
	example string   // as typed
	limit   limit    // of a number
	choices []string // of a drop-down
	open    bool     // another text than one of the choices will do
}

// limit is the range in which a number is expected.
type limit int

const (
	noLimit       limit = iota // no number
	anyNumber                  // any finite number
	positive                   // above 0
	wholeFromZero              // a count
	wholeFromOne               // a number of people
	openUnit                   // between 0 and 1, both excluded
	closedUnit                 // from 0 to 1
	correlation                // between -1 and 1
)

// helpOfField has the help of every column that a template may have.
var helpOfField = map[review.Field]fieldHelp{
	review.StudyName:    {text: "Name of the study, such as first author and year. The same study has the same name in all its rows.", example: "Dvorak 2016"},
	review.Registration: {text: "Number in a trial registry. It tells whether two reports are of the same trial.", example: "REG-000123"},
	review.DateField:    {text: "When the study was published or ended: year, year-month or year-month-day. Cumulative analyses follow it.", example: "2016-03"},
	review.OutcomeField: {text: "What was measured. Spell an outcome the same way in every row: each outcome is pooled by itself.", example: "flare within 24 weeks"},
	review.Comparison:   {text: "What is compared with what, if the sheet holds more than one comparison.", example: "brindle extract or none"},
	review.TimePoint:    {text: "When the outcome was measured.", example: "24 weeks"},
	review.Subgroup:     {text: "The part of the study that the row is about, if it is not the whole study.", example: "women"},

	review.EventsTreated:     {text: "How many events the treated arm had: people with the event, or events if person time is given. " + countNot, example: "12", limit: wholeFromZero},
	review.TotalTreated:      {text: "How many people of the treated arm were analysed.", example: "60", limit: wholeFromOne},
	review.PersonTimeTreated: {text: "Time that the people of the treated arm were followed, added up; the same unit in all rows.", example: "120.5", limit: positive},
	review.EventsControl:     {text: "How many events the control arm had: people with the event, or events if person time is given. " + countNot, example: "20", limit: wholeFromZero},
	review.TotalControl:      {text: "How many people of the control arm were analysed.", example: "61", limit: wholeFromOne},
	review.PersonTimeControl: {text: "Time that the people of the control arm were followed, added up; the same unit in all rows.", example: "118", limit: positive},
	review.Events:            {text: "How many events there were in all. " + countNot, example: "32", limit: wholeFromZero},
	review.Total:             {text: "How many people were analysed in all.", example: "121", limit: wholeFromOne},
	review.PersonTime:        {text: "Time that people were followed, added up; the same unit in all rows.", example: "238.5", limit: positive},

	review.MeanTreated:         {text: "Mean of the treated arm.", example: "4.2", limit: anyNumber},
	review.SDTreated:           {text: "Standard deviation of the treated arm. Not its standard error.", example: "2.1", limit: positive},
	review.SETreated:           {text: "Standard error of the treated arm's mean, if the report gives it instead of the standard deviation.", example: "0.27", limit: positive},
	review.MeanControl:         {text: "Mean of the control arm.", example: "5.0", limit: anyNumber},
	review.SDControl:           {text: "Standard deviation of the control arm. Not its standard error.", example: "2.3", limit: positive},
	review.SEControl:           {text: "Standard error of the control arm's mean, if the report gives it instead of the standard deviation.", example: "0.29", limit: positive},
	review.BaselineMeanTreated: {text: "Mean of the treated arm at the start.", example: "6.1", limit: anyNumber},
	review.BaselineSDTreated:   {text: "Standard deviation of the treated arm at the start.", example: "2.0", limit: positive},
	review.BaselineMeanControl: {text: "Mean of the control arm at the start.", example: "6.0", limit: anyNumber},
	review.BaselineSDControl:   {text: "Standard deviation of the control arm at the start.", example: "2.2", limit: positive},
	review.MedianTreated:       {text: "Median of the treated arm.", example: "4.0", limit: anyNumber},
	review.Q1Treated:           {text: "Lower quartile of the treated arm.", example: "2.5", limit: anyNumber},
	review.Q3Treated:           {text: "Upper quartile of the treated arm.", example: "5.5", limit: anyNumber},
	review.MinTreated:          {text: "Smallest value of the treated arm.", example: "0", limit: anyNumber},
	review.MaxTreated:          {text: "Largest value of the treated arm.", example: "9", limit: anyNumber},
	review.MedianControl:       {text: "Median of the control arm.", example: "5.0", limit: anyNumber},
	review.Q1Control:           {text: "Lower quartile of the control arm.", example: "3.5", limit: anyNumber},
	review.Q3Control:           {text: "Upper quartile of the control arm.", example: "6.5", limit: anyNumber},
	review.MinControl:          {text: "Smallest value of the control arm.", example: "1", limit: anyNumber},
	review.MaxControl:          {text: "Largest value of the control arm.", example: "10", limit: anyNumber},
	review.WithinCorrelation:   {text: "Correlation of the two measurements of the same people.", example: "0.6", limit: correlation},
	review.SDDifference:        {text: "Standard deviation of the differences within people.", example: "1.9", limit: positive},
	review.Unit:                {text: "Unit or scale of the numbers.", example: "points of 0 to 10"},
	review.ResultType:          {text: "Whether the means are of final values or of changes from the start.", example: "final", choices: []string{"final", "change"}},

	review.StandardError:         {text: "Standard error of the estimate.", example: "0.12", limit: positive},
	review.LimitLow:              {text: "Lower limit of the estimate's interval, as reported.", example: "0.49"},
	review.LimitHigh:             {text: "Upper limit of the estimate's interval, as reported.", example: "1.02"},
	review.LimitLevel:            {text: "Level of the interval as a fraction. Leave it blank for 0.95.", example: "0.9", limit: openUnit},
	review.TestStatistic:         {text: "The t or z of the test against no effect, if neither limits nor a standard error are reported.", example: "-2.4", limit: anyNumber},
	review.PValue:                {text: "The p-value, exact if possible. It serves only where nothing better is reported.", example: "0.03", limit: closedUnit},
	review.PSides:                {text: "Sides of the p-value's test: 1 or 2. Leave it blank for 2.", example: "2", choices: []string{"1", "2"}},
	review.Direction:             {text: "Whether the effect behind the p-value was lower or higher in the treated arm.", example: "lower", choices: review.BetterNames()},
	review.Adjusted:              {text: "Whether the estimate is adjusted for other variables.", example: "no", choices: []string{"yes", "no"}},
	review.Coefficient:           {text: "The correlation coefficient, not a transform of it.", example: "0.31", limit: correlation},
	review.ObservedMinusExpected: {text: "Observed minus expected events of the treated arm, by the log-rank test.", example: "-5.2", limit: anyNumber},
	review.Variance:              {text: "Variance of observed minus expected events.", example: "7.9", limit: positive},

	review.Cluster:           {text: "Whether clusters of people were randomised and the numbers are not yet corrected for that; or the name of the study that several estimates are from.", example: "no", choices: []string{"yes", "no"}, open: true},
	review.ClusterSize:       {text: "Mean number of people in a cluster.", example: "18.5", limit: positive},
	review.ICC:               {text: "Correlation within clusters.", example: "0.02", limit: correlation},
	review.DesignEffect:      {text: "The design effect, if it is reported instead of cluster size and correlation.", example: "1.35", limit: positive},
	review.RandomisedTreated: {text: "How many people were randomised to the treated arm.", example: "63", limit: wholeFromOne},
	review.RandomisedControl: {text: "How many people were randomised to the control arm.", example: "62", limit: wholeFromOne},
	review.ReportedEstimate:  {text: "The effect that the report itself gives. It is only compared with the other numbers.", example: "0.61"},
	review.ReportedLow:       {text: "Lower limit of the reported effect's interval. It is only compared.", example: "0.33"},
	review.ReportedHigh:      {text: "Upper limit of the reported effect's interval. It is only compared.", example: "1.13"},
	review.ReportedP:         {text: "The p-value of the report. It is only compared.", example: "0.11", limit: closedUnit},

	review.Design: {text: "Design of the study.", example: "parallel arms",
		choices: []string{"parallel arms", "cross-over", "clusters", "not randomised"}, open: true},
	review.BetterField: {text: "Whether lower or higher values of the outcome are wanted. The sheet plan can say it once for all rows.", example: "lower", choices: review.BetterNames()},
	review.RiskOfBias: {text: "The reviewers' judgement of the study. Rows can be chosen by it.", example: "low",
		choices: []string{"low", "some concerns", "high"}, open: true},
	review.SourceField: {text: "Where in the report the numbers stand.", example: "p. 7, table 2"},
	review.HowObtained: {text: "How the numbers came into the sheet.", example: "as reported",
		choices: []string{"as reported", "calculated by hand", "read off a figure", "sent by the authors"}, open: true},
	review.NoteField: {text: "Anything a reader should know.", example: "counts asked for, no answer"},
	review.Accept:    {text: "Rule of a finding that the reviewers accept, and the reason; several are parted by semicolons.", example: "C2 corrected for clusters"},
}

const countNot = "A count, not a percentage. Leave it blank if it is not reported; 0 means that there was none."

// helpFor returns the help of a column in a template for a measure.
func helpFor(f review.Field, m effect.Measure) fieldHelp {
	h := helpOfField[f]
	switch f {
	case review.Estimate:
		h = fieldHelp{text: "The effect as reported: the " + m.String() + ".", example: "0.71", limit: scaleOf(m)}
		if m == effect.Unspecified {
			h.text = "The effect as reported."
		}
		if m.Log() {
			h.text += " The ratio or rate itself, not its logarithm."
		}
	case review.LimitLow, review.LimitHigh, review.ReportedEstimate, review.ReportedLow, review.ReportedHigh:
		h.limit = scaleOf(m)
	case review.StandardError:
		switch {
		case m.Log():
			h.text = "Standard error of the natural logarithm of the " + m.String() + ", not of the " + m.String() + " itself."
		case scaleOf(m) != anyNumber:
			h.text = "Standard error on the scale of the analysis, not on that of the " + m.String() + " itself. Limits are the safer choice."
		}
	}
	return h
}

// scaleOf returns where the values of a measure lie.
func scaleOf(m effect.Measure) limit {
	switch m {
	case effect.Correlation:
		return correlation
	case effect.Proportion, effect.ArcsineProportion, effect.DoubleArcsineProportion:
		return closedUnit
	}
	if m.Log() {
		return positive
	}
	return anyNumber
}
