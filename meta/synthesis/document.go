package synthesis

// Document is the JSON of a synthesis, version steelyard/1. Estimates are on the
// analysis scale, evidence is the natural log of the ratio for an effect over
// none; what does not apply is absent.
type Document struct {
	Format   string                  `json:"format"`
	Program  ProgramDocument         `json:"program"`
	Source   SourceDocument          `json:"source"`
	Plan     map[string]PlanDocument `json:"plan"`
	Findings []FindingDocument       `json:"findings"`
	Cautions []string                `json:"cautions"`
	Outcomes []OutcomeDocument       `json:"outcomes"`
}

// ProgramDocument names the program that computed the results.
type ProgramDocument struct {
	Version string `json:"version"`
}

// SourceDocument identifies the input.
type SourceDocument struct {
	File   string `json:"file"`
	Sheet  string `json:"sheet,omitempty"`
	SHA256 string `json:"sha256"`
}

// PlanDocument is a setting for all outcomes with its origin.
type PlanDocument struct {
	Value  string `json:"value"`
	From   string `json:"from"`
	Cell   string `json:"cell,omitempty"`
	Reason string `json:"reason,omitempty"`
	Date   string `json:"date,omitempty"` // on which it was agreed
}

// FindingDocument is a finding with its place.
type FindingDocument struct {
	Severity string            `json:"severity"`
	Rule     string            `json:"rule,omitempty"`
	Sheet    string            `json:"sheet,omitempty"`
	Cell     string            `json:"cell,omitempty"`
	Study    string            `json:"study,omitempty"`
	Outcome  string            `json:"outcome,omitempty"`
	Message  string            `json:"message"`
	Accepted string            `json:"accepted,omitempty"`
	Readings []ReadingDocument `json:"readings,omitempty"`
}

// ReadingDocument is the pooled answer of an outcome under one reading of what a
// finding doubts.
type ReadingDocument struct {
	Label   string `json:"label"`
	Outcome string `json:"outcome"`
	Problem string `json:"problem,omitempty"`
	*SubsetDocument
}

// SubsetDocument is a pooled mean by the outcome's own methods from other rows, or
// from other numbers of them. The evidence is absent where there is no null.
type SubsetDocument struct {
	K        int     `json:"k"`
	Estimate float64 `json:"estimate"`
	SE       float64 `json:"se"`
	Low      float64 `json:"ci_low"`
	High     float64 `json:"ci_high"`
	*EvidenceDocument
}

// OutcomeDocument is one outcome.
type OutcomeDocument struct {
	Outcome      string               `json:"outcome"`
	Measure      string               `json:"measure,omitempty"`
	Scale        string               `json:"scale,omitempty"`
	Better       string               `json:"better,omitempty"`
	K            int                  `json:"k"`
	Rows         int                  `json:"rows"`
	Participants int                  `json:"participants,omitempty"`
	Events       int                  `json:"events,omitempty"`
	Problem      string               `json:"problem,omitempty"`
	Notes        []string             `json:"notes,omitempty"`
	Excluded     []ExcludedDocument   `json:"excluded"`
	Conversions  []ConversionDocument `json:"conversions"`
	Silent       *SilentDocument      `json:"without_information,omitempty"`
	POnly        *POnlyDocument       `json:"p_only,omitempty"`
	*ResultDocument
	PartsDocument
	Studies []StudyDocument `json:"studies"`
}

// ResultDocument is what pooling gave; its parts stand in the outcome itself.
type ResultDocument struct {
	Plan          map[string]PlanDocument `json:"plan,omitempty"`
	Pooled        PooledDocument          `json:"pooled"`
	Other         *PooledDocument         `json:"other_effects,omitempty"`
	Tau           *TauDocument            `json:"tau,omitempty"`
	Heterogeneity *HeterogeneityDocument  `json:"heterogeneity,omitempty"`
	Prediction    *PredictionDocument     `json:"prediction,omitempty"`
	Without       *SubsetDocument         `json:"without_converted,omitempty"`
	Posterior     []PosteriorDocument     `json:"posterior,omitempty"`
	Doubter       *DoubterDocument        `json:"doubters_prior,omitempty"`
	Integrated    *IntegratedDocument     `json:"integrated,omitempty"`
	Regions       []RegionDocument        `json:"regions,omitempty"`
	Caveats       []string                `json:"caveats,omitempty"`
	*AccrualDocument
}

// PartsDocument holds the capabilities beyond the pooled result; what was not wanted
// is absent.
type PartsDocument struct {
	Methods      *MethodsDocument               `json:"methods,omitempty"`
	Beliefs      *BeliefsDocument               `json:"beliefs,omitempty"`
	Runs         []RunDocument                  `json:"runs,omitempty"`
	SmallStudy   *SmallStudyDocument            `json:"small_study,omitempty"`
	Panel        *PanelDocument                 `json:"panel,omitempty"`
	Distribution *PosteriorDistributionDocument `json:"posterior_distribution,omitempty"`
	Explain      *ExplainDocument               `json:"explain,omitempty"`
}

// ExcludedDocument is a row that was not pooled.
type ExcludedDocument struct {
	Study  string `json:"study"`
	Cell   string `json:"cell"`
	Rule   string `json:"rule,omitempty"` // by which accepting it is written
	Reason string `json:"reason"`
}

// SilentDocument counts the studies whose tables carry nothing about a ratio: all
// or nobody in both arms had the event. They are among the excluded.
type SilentDocument struct {
	Studies      int `json:"studies"`
	Participants int `json:"participants"`
}

// ConversionDocument is one step from extracted numbers to an effect.
type ConversionDocument struct {
	Study  string             `json:"study"`
	What   string             `json:"what"`
	From   map[string]float64 `json:"from"`
	To     map[string]float64 `json:"to"`
	Source string             `json:"source"`
}

// EvidenceDocument is an evidence ratio.
type EvidenceDocument struct {
	LnEvidence float64 `json:"ln_evidence"`
	Steps      float64 `json:"steps"`
}

// PooledDocument is a pooled mean with the methods that gave it.
type PooledDocument struct {
	Effects  string   `json:"effects"`
	Method   string   `json:"method"`
	Tau      string   `json:"tau,omitempty"`
	Interval string   `json:"interval"`
	Level    float64  `json:"level"`
	Null     *float64 `json:"null,omitempty"`
	MeanDocument
	*EvidenceFormDocument
	Display    DisplayDocument     `json:"display"`
	Dependence *DependenceDocument `json:"dependence,omitempty"`
}

// MeanDocument holds the numbers of a pooled mean. DF is absent for a normal
// statistic; the test where there is no null.
type MeanDocument struct {
	Estimate float64 `json:"estimate"`
	SE       float64 `json:"se"`
	*TestDocument
	DF   *float64 `json:"df,omitempty"`
	Low  float64  `json:"ci_low"`
	High float64  `json:"ci_high"`
}

// TestDocument is the test against the null. LnP is always there, P where it does
// not underflow.
type TestDocument struct {
	Statistic float64 `json:"statistic"`
	P         float64 `json:"p"`
	LnP       float64 `json:"ln_p"`
}

// POnlyDocument is the evidence of studies that give a p-value and no estimate,
// by themselves; it is not in the pooled result.
type POnlyDocument struct {
	Studies  []POnlyStudyDocument `json:"studies"`
	Stouffer CombinedDocument     `json:"stouffer"`
	Fisher   CombinedDocument     `json:"fisher"`
}

// POnlyStudyDocument is one of them.
type POnlyStudyDocument struct {
	Study        string             `json:"study"`
	Place        string             `json:"place"`
	Participants float64            `json:"participants"`
	Z            float64            `json:"z"`
	LnEvidence   float64            `json:"ln_evidence"`
	Conversion   ConversionDocument `json:"conversion"`
}

// CombinedDocument is what p-values say together.
type CombinedDocument struct {
	Z   float64 `json:"z"`
	P   float64 `json:"p"`
	LnP float64 `json:"ln_p"`
	EvidenceDocument
}

// EvidenceFormDocument is the evidence beside a pooled mean.
type EvidenceFormDocument struct {
	Evidence string `json:"evidence"`
	EvidenceDocument
	Word    string          `json:"word"`
	Favours string          `json:"favours"`
	Priors  *PriorsDocument `json:"priors,omitempty"` // of a form that rests on some
}

// DisplayDocument repeats an estimate as a reader sees it; a ratio too large for
// a float64 is absent.
type DisplayDocument struct {
	Estimate *float64 `json:"estimate,omitempty"`
	Low      *float64 `json:"ci_low,omitempty"`
	High     *float64 `json:"ci_high,omitempty"`
	Unit     string   `json:"unit"`
}

// TauDocument is the between-study variance with its limits; an upper one that is
// absent is infinite.
type TauDocument struct {
	Tau2 float64  `json:"tau2"`
	Low  float64  `json:"tau2_low"`
	High *float64 `json:"tau2_high,omitempty"`
}

// HeterogeneityDocument says how the estimates scatter. Statistic is named beside
// methods for counts, which have no sampling variances and so no shares by τ².
type HeterogeneityDocument struct {
	Statistic string         `json:"statistic,omitempty"`
	Q         float64        `json:"q"`
	DF        int            `json:"df"`
	P         float64        `json:"p"`
	I2Q       ShareDocument  `json:"i2_q"`
	I2Tau     *ShareDocument `json:"i2_tau,omitempty"`
	H2        float64        `json:"h2"`
	H2Tau     *float64       `json:"h2_tau,omitempty"`
	EvidenceDocument
	Integrated *IntegratedDocument `json:"integrated,omitempty"` // effects that differ over one common effect
}

// ShareDocument is a fraction with limits.
type ShareDocument struct {
	Value float64 `json:"value"`
	Low   float64 `json:"low"`
	High  float64 `json:"high"`
}

// PredictionDocument is the prediction interval.
type PredictionDocument struct {
	Low     float64  `json:"low"`
	High    float64  `json:"high"`
	DF      *float64 `json:"df,omitempty"`
	Method  string   `json:"method"`
	Widened bool     `json:"widened,omitempty"`
}

// PosteriorDocument is a probability of an effect before and after the data.
type PosteriorDocument struct {
	Prior     float64 `json:"prior"`
	Posterior float64 `json:"posterior"`
}

// DoubterDocument is the prior below which the posterior stays under the level.
type DoubterDocument struct {
	Level float64 `json:"level"`
	Prior float64 `json:"prior"`
}

// RegionDocument is a range of the mean effect; an absent limit is infinite.
type RegionDocument struct {
	Name      string   `json:"name"`
	Low       *float64 `json:"low,omitempty"`
	High      *float64 `json:"high,omitempty"`
	LnM       float64  `json:"ln_m"`
	Posterior float64  `json:"posterior"`
	EvidenceDocument
	Settings *float64 `json:"settings,omitempty"`
}

// StudyDocument is one pooled study.
type StudyDocument struct {
	Study       string   `json:"study"`
	Date        string   `json:"date,omitempty"`
	Estimate    float64  `json:"estimate"`
	SE          float64  `json:"se"`
	Low         float64  `json:"ci_low"`
	High        float64  `json:"ci_high"`
	Weight      float64  `json:"weight"`
	LnEvidence  *float64 `json:"ln_evidence,omitempty"`
	Place       string   `json:"place"`
	Basis       string   `json:"basis"`
	Converted   bool     `json:"converted"`
	Assumptions []string `json:"assumptions,omitempty"`
}
