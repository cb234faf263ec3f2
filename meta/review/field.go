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
)

var fieldNames = choice.Of[Field]("column",
	"", "study", "id", "registration", "date", "outcome", "comparison", "time point", "subgroup",
	"measure", "design", "better", "cluster", "adjusted", "result type", "unit", "risk of bias",
	"source", "how obtained", "note", "accept",
	"estimate", "analysis estimate", "se", "ci low", "ci high", "analysis ci low", "analysis ci high", "ci level", "p",
	"events treated", "total treated", "events control", "total control",
	"mean treated", "sd treated", "se treated", "mean control", "sd control", "se control")

// String returns the field's name as ARCHITECTURE and the template spell it.
func (f Field) String() string { return fieldNames.String(f) }

// FieldNames returns the names of all fields.
func FieldNames() []string { return fieldNames.All() }

// ParseField returns the field that text names exactly; synonyms are the
// reader's business.
func ParseField(text string) (Field, error) { return fieldNames.Parse(text) }

// Numeric reports whether the field holds an extracted number.
func (f Field) Numeric() bool { return f >= Estimate }

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
