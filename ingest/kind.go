package ingest

import (
	"fmt"
	"slices"
	"strings"

	"steelyard/meta/choice"
	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// Kind is a kind of numbers that a study's report gives.
type Kind int

// The kinds for which Template has columns. Clusters and Checks only go beside
// others.
const (
	Counts       Kind = iota // events with people, or with person time
	Means                    // means, standard deviations and people of both arms
	Changes                  // means with those at the start
	Medians                  // medians with quartiles or range, and people of both arms
	CrossOver                // means of the same people under both treatments
	LogRank                  // observed minus expected events with their variance
	Coefficients             // correlations
	Estimates                // the effect itself with its standard error, limits, test statistic or p-value
	PValues                  // a p-value with its direction alone
	Clusters                 // what trials of clusters need besides
	Checks                   // what the numbers can be checked against
)

var kindNames = choice.Of[Kind]("kind of numbers",
	"counts", "means", "changes", "medians", "cross-over", "log-rank", "coefficients", "estimates", "p-values", "clusters", "checks")

// String returns the kind's name.
func (k Kind) String() string { return kindNames.String(k) }

// KindNames returns the names of all kinds.
func KindNames() []string { return kindNames.All() }

// ParseKinds reads one kind or several, parted by commas.
func ParseKinds(text string) ([]Kind, error) {
	var kinds []Kind
	for _, part := range strings.Split(text, ",") {
		k, err := kindNames.Parse(part)
		if err != nil {
			return nil, err
		}
		if !slices.Contains(kinds, k) {
			kinds = append(kinds, k)
		}
	}
	return kinds, nil
}

// kindColumns are the columns of numbers of a kind, and the measures that are
// made from them; nil stands for every measure. A new kind, field or measure is
// added here and explained in helpOfField, and nowhere else.
type kindColumns struct {
	kind     Kind
	measures []effect.Measure
	fields   []review.Field
}

var kindTable = []kindColumns{
	{Counts, []effect.Measure{effect.RiskRatio, effect.OddsRatio, effect.RiskDifference, effect.ArcsineDifference},
		[]review.Field{review.EventsTreated, review.TotalTreated, review.EventsControl, review.TotalControl}},
	{Counts, []effect.Measure{effect.RateRatio},
		[]review.Field{review.EventsTreated, review.PersonTimeTreated, review.EventsControl, review.PersonTimeControl}},
	{Counts, []effect.Measure{effect.Proportion, effect.ArcsineProportion, effect.DoubleArcsineProportion}, []review.Field{review.Events, review.Total}},
	{Counts, []effect.Measure{effect.Rate}, []review.Field{review.Events, review.PersonTime}},
	{Means, meansMeasures, []review.Field{review.MeanTreated, review.SDTreated, review.SETreated, review.TotalTreated,
		review.MeanControl, review.SDControl, review.SEControl, review.TotalControl, review.ResultType, review.Unit}},
	{Changes, meansMeasures[:2], []review.Field{review.BaselineMeanTreated, review.BaselineSDTreated, review.MeanTreated, review.SDTreated, review.TotalTreated,
		review.BaselineMeanControl, review.BaselineSDControl, review.MeanControl, review.SDControl, review.TotalControl, review.WithinCorrelation, review.ResultType, review.Unit}},
	{Medians, meansMeasures, []review.Field{review.MedianTreated, review.Q1Treated, review.Q3Treated, review.MinTreated, review.MaxTreated, review.TotalTreated,
		review.MedianControl, review.Q1Control, review.Q3Control, review.MinControl, review.MaxControl, review.TotalControl, review.Unit}},
	{CrossOver, meansMeasures[:2], []review.Field{review.MeanTreated, review.SDTreated, review.MeanControl, review.SDControl, review.Total,
		review.WithinCorrelation, review.SDDifference, review.Unit}},
	{Coefficients, []effect.Measure{effect.Correlation}, []review.Field{review.Coefficient, review.Total}},
	{Estimates, nil, []review.Field{review.Estimate, review.StandardError, review.LimitLow, review.LimitHigh, review.LimitLevel,
		review.TestStatistic, review.PValue, review.Adjusted}},
	{LogRank, []effect.Measure{effect.HazardRatio}, []review.Field{review.ObservedMinusExpected, review.Variance, review.Events}},
	{PValues, nil, []review.Field{review.PValue, review.PSides, review.Direction, review.Total}},
	{Clusters, nil, []review.Field{review.Cluster, review.ClusterSize, review.ICC, review.DesignEffect}},
	{Checks, nil, []review.Field{review.RandomisedTreated, review.RandomisedControl, review.ReportedEstimate, review.ReportedLow, review.ReportedHigh, review.ReportedP}},
}

var meansMeasures = []effect.Measure{effect.MeanDifference, effect.StandardisedMeanDifference, effect.RatioOfMeans}

// beside reports whether a kind only goes beside others.
func (k Kind) beside() bool { return k == Clusters || k == Checks }

// Columns of every template, before and after the numbers.
var (
	leadingFields  = []review.Field{review.StudyName, review.Registration, review.DateField, review.OutcomeField, review.Comparison, review.TimePoint, review.Subgroup}
	trailingFields = []review.Field{review.Design, review.BetterField, review.RiskOfBias, review.SourceField, review.HowObtained, review.NoteField, review.Accept}
)

// KindsOf returns the kinds of numbers from which a measure is made, the most
// usual one first.
func KindsOf(m effect.Measure) []Kind {
	var kinds []Kind
	for _, c := range kindTable {
		if c.suits(m) {
			kinds = append(kinds, c.kind)
		}
	}
	return kinds
}

// KindError reports numbers from which a measure is not made.
type KindError struct {
	Measure effect.Measure
	Kind    Kind
}

// Error names the kinds that fit.
func (e *KindError) Error() string {
	var fit []string
	for _, k := range KindsOf(e.Measure) {
		fit = append(fit, k.String())
	}
	return fmt.Sprintf("%s: %q is not made from them; it is made from: %s", e.Kind, e.Measure, strings.Join(fit, ", "))
}

// templateFields returns the columns of a template for a measure: those of every
// kind asked for, each once, with the measure's most usual kind if there is none
// that can stand alone.
func templateFields(m effect.Measure, kinds []Kind) ([]review.Field, error) {
	possible := KindsOf(m)
	if !slices.ContainsFunc(kinds, func(k Kind) bool { return !k.beside() }) {
		kinds = slices.Concat(possible[:1], kinds)
	}
	fields := slices.Clone(leadingFields)
	for _, k := range kinds {
		if !slices.Contains(possible, k) {
			return nil, &KindError{Measure: m, Kind: k}
		}
		for _, f := range kindTable[kindRow(k, m)].fields {
			if !slices.Contains(fields, f) {
				fields = append(fields, f)
			}
		}
	}
	return append(fields, trailingFields...), nil
}

// kindRow returns the index of a kind's columns for a measure that is made from it.
func kindRow(k Kind, m effect.Measure) int {
	return slices.IndexFunc(kindTable, func(c kindColumns) bool { return c.kind == k && c.suits(m) })
}

// suits reports whether the measure is made from such columns.
func (c kindColumns) suits(m effect.Measure) bool {
	return c.measures == nil || slices.Contains(c.measures, m)
}
