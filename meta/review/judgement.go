package review

import (
	"slices"

	"steelyard/meta/choice"
)

// Domain is what a panel judges of an outcome's certainty.
type Domain int

// The domains: where the rating starts, the five that may lower it, the three that
// may raise it, and what results. GRADE guidance, as in the handbook of its working
// group.
const (
	DomainStart Domain = iota
	DomainRiskOfBias
	DomainInconsistency
	DomainIndirectness
	DomainImprecision
	DomainPublicationBias
	DomainLargeEffect
	DomainDoseGradient
	DomainConfounding
	DomainCertainty
)

var domainNames = choice.Of[Domain]("domain", "start", "risk of bias", "inconsistency", "indirectness", "imprecision",
	"publication bias", "large effect", "dose gradient", "opposing confounding", "certainty").With(map[string]Domain{
	"missing results": DomainPublicationBias, "bias": DomainRiskOfBias, "heterogeneity": DomainInconsistency,
	"overall": DomainCertainty, "overall certainty": DomainCertainty,
})

// String returns the domain's name, such as "risk of bias".
func (d Domain) String() string { return domainNames.String(d) }

// DomainNames returns the names of all domains, in the order of the values.
func DomainNames() []string { return domainNames.All() }

// ParseDomain returns the domain that text names.
func ParseDomain(text string) (Domain, error) { return domainNames.Parse(text) }

// RatingNames returns the usual ratings: levels for the start and the certainty, moves
// for the others. A panel may use words of its own.
func RatingNames() []string { return slices.Clone(ratingNames) }

var ratingNames = []string{"high", "moderate", "low", "very low", "no change", "down one", "down two", "down three", "up one", "up two"}

// Judgement is a panel's own rating of one domain of an outcome, kept as it was
// entered: nothing is computed from it.
type Judgement struct {
	Outcome string // as typed; blank where the sheet has one outcome only
	Domain  Domain
	Rating  string
	Reason  string
	By      string
	Date    Date  // zero: not given
	Place   Place // of the rating
}

// RuleJudgement is the rule of findings about the sheet of judgements.
const RuleJudgement = "judgement"
