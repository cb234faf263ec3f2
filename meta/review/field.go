package review

import "steelyard/meta/choice"

// Field is a column the program understands.
type Field int

// The fields: first who and when, then context, then numbers. Numbers are those
// from Estimate on.
const (
	NoField Field = iota
	StudyName
	StudyID
	Registration
	DateField
	OutcomeField
	Comparison
	TimePoint
	Subgroup
	MeasureField
	Design
	BetterField
	Cluster
	Adjusted
	ResultType
	Unit
	RiskOfBias
	SourceField
	HowObtained
	NoteField
	Accept
	Direction        // of the effect behind a p-value: higher or lower
	Estimate         // in the reader's unit: a ratio as a ratio
	AnalysisEstimate // on the analysis scale: the logarithm of a ratio
	StandardError
	LimitLow
	LimitHigh
	AnalysisLow
	AnalysisHigh
	LimitLevel
	PValue
	EventsTreated
	TotalTreated
	EventsControl
	TotalControl
	MeanTreated
	SDTreated
	SETreated
	MeanControl
	SDControl
	SEControl
	TestStatistic // t or z of the test against no effect
	PSides        // of the p-value: 1 or 2
	BaselineMeanTreated
	BaselineSDTreated
	BaselineMeanControl
	BaselineSDControl
	MedianTreated
	Q1Treated
	Q3Treated
	MinTreated
	MaxTreated
	MedianControl
	Q1Control
	Q3Control
	MinControl
	MaxControl
	MeanLowTreated // limit of the interval of one arm's mean
	MeanHighTreated
	MeanLowControl
	MeanHighControl
	WithinCorrelation // of two measurements of the same people: baseline and end, or both treatments
	SDDifference      // of the differences within people
	Coefficient       // a correlation that is itself the result
	Events            // of one arm, or of both together
	Total             // likewise
	PersonTime        // likewise
	PersonTimeTreated
	PersonTimeControl
	ObservedMinusExpected
	Variance // of observed minus expected events
	ShareTreated
	ShareControl
	ClusterSize
	ICC
	DesignEffect
	RandomisedTreated
	RandomisedControl
	ReportedEstimate // beside counts or means; kept, and only compared
	ReportedLow
	ReportedHigh
	ReportedP
	ScaleLow
	ScaleHigh
	Items
)

// FieldCount is the number of fields, NoField included.
const FieldCount = int(Items) + 1

var fieldNames = choice.Of[Field]("column",
	"", "study", "id", "registration", "date", "outcome", "comparison", "time point", "subgroup",
	"measure", "design", "better", "cluster", "adjusted", "result type", "unit", "risk of bias",
	"source", "how obtained", "note", "accept", "direction",
	"estimate", "analysis estimate", "se", "ci low", "ci high", "analysis ci low", "analysis ci high", "ci level", "p",
	"events treated", "total treated", "events control", "total control",
	"mean treated", "sd treated", "se treated", "mean control", "sd control", "se control",
	"t", "p sides", "baseline mean treated", "baseline sd treated", "baseline mean control", "baseline sd control",
	"median treated", "q1 treated", "q3 treated", "min treated", "max treated",
	"median control", "q1 control", "q3 control", "min control", "max control",
	"ci low treated", "ci high treated", "ci low control", "ci high control",
	"correlation", "sd of the difference", "r", "events", "total", "person time", "person time treated", "person time control",
	"observed minus expected", "variance", "share treated", "share control", "cluster size", "icc", "design effect",
	"randomised treated", "randomised control", "reported estimate", "reported ci low", "reported ci high", "reported p",
	"scale low", "scale high", "items")

// String returns the field's name as ARCHITECTURE and the template spell it.
func (f Field) String() string { return fieldNames.String(f) }

// FieldNames returns the names of all fields.
func FieldNames() []string { return fieldNames.All() }

// ParseField returns the field that text names exactly; synonyms are the
// reader's business.
func ParseField(text string) (Field, error) { return fieldNames.Parse(text) }

// Numeric reports whether the field holds an extracted number.
func (f Field) Numeric() bool { return f >= Estimate }

// Aside reports whether a number of the field is never needed for an effect, so
// that one which cannot be read does not keep its row from being pooled.
func (f Field) Aside() bool {
	return f == PValue || f == PSides || f >= RandomisedTreated
}

// Better says which direction of an effect is wanted.
type Better int

// Which values are better; BetterUnknown where the sheet and plan do not say.
const (
	BetterUnknown Better = iota
	BetterLower
	BetterHigher
)

var betterNames = choice.Of[Better]("direction", "", "lower", "higher")

// String returns "lower", "higher" or "".
func (b Better) String() string { return betterNames.String(b) }

// BetterNames returns the directions.
func BetterNames() []string { return betterNames.All() }

// ParseBetter returns the direction that text names.
func ParseBetter(text string) (Better, error) { return betterNames.Parse(text) }

// MarshalText writes the direction.
func (b Better) MarshalText() ([]byte, error) { return []byte(b.String()), nil }
