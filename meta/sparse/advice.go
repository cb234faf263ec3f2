package sparse

import (
	"errors"
	"math"

	"steelyard/meta/choice"
	"steelyard/meta/effect"
)

// FactKind is something about a set of tables that decides which methods are
// apt.
type FactKind int

// The facts. All but ZeroCells and SilentTables are about the tables that carry
// information on an odds ratio.
const (
	EventRate    FactKind = iota // events per person, over all arms
	ArmRatio                     // larger arm over smaller, geometric mean weighted by Peto's V
	EffectSize                   // the common odds ratio or its inverse, whichever is above 1
	ZeroCells                    // share of all tables with a zero cell but information
	SilentTables                 // share of all tables without events, or with nothing but events
	TotalEvents                  // events in all
	ArmEvents                    // events in the arm, treated or control, that has fewer over all tables
	TableCount                   // tables with information
	ScatterP                     // p-value of the heterogeneity about Peto's estimate
)

var factNames = choice.Of[FactKind]("fact about 2×2 tables",
	"event-rate", "arm-ratio", "effect-size", "zero-cells", "silent-tables", "total-events", "arm-events", "table-count", "scatter-p")

// String returns the fact's name, such as "event-rate".
func (k FactKind) String() string { return factNames.String(k) }

// MarshalText writes the fact's name.
func (k FactKind) MarshalText() ([]byte, error) { return []byte(k.String()), nil }

// The limits. The first is that of the sources named by FactKind.Source, the
// next two put numbers of this project's own to their "substantial imbalance"
// and "large effect"; those on counts and zero cells mark where large-sample
// intervals and corrections become doubtful, and 0.1 is the usual level of a
// test of heterogeneity.
var factLimits = map[FactKind]float64{
	EventRate: 0.01, ArmRatio: 2, EffectSize: 2, ZeroCells: 0.2, SilentTables: 0,
	TotalEvents: 10, ArmEvents: 5, TableCount: 5, ScatterP: 0.1,
}

// Fact is one of them with its number.
type Fact struct {
	Kind   FactKind
	Value  float64
	Limit  float64 // where the choice of a method turns
	Marked bool    // the value is on the side that calls for care (for EventRate: rare, below the limit)
}

// Aptness says whether a method suits a set of tables.
type Aptness int

// The degrees of aptness.
const (
	Apt Aptness = iota
	WithCare
	Inapt
)

var aptNames = choice.Of[Aptness]("aptness", "apt", "with-care", "inapt")

// String returns "apt", "with-care" or "inapt".
func (a Aptness) String() string { return aptNames.String(a) }

// MarshalText writes the name of the aptness.
func (a Aptness) MarshalText() ([]byte, error) { return []byte(a.String()), nil }

// Verdict says whether a method suits, and the facts that decide it.
type Verdict struct {
	Apt     Aptness
	Because []FactKind // what speaks against it; empty if it is apt
}

// Advice says which methods are apt for an odds ratio of a set of tables. It
// changes nothing: the method is the user's choice, made before results are seen.
type Advice struct {
	Facts           []Fact
	Methods         map[Method]Verdict
	InverseVariance Verdict // pooling of log odds ratios with corrected zero cells
}

// Fact returns the fact of a kind.
func (a *Advice) Fact(kind FactKind) Fact {
	for _, f := range a.Facts {
		if f.Kind == kind {
			return f
		}
	}
	return Fact{Kind: kind}
}

// Advise gathers the facts about tables, and what follows from them for each
// method. Errors are those of Fit for tables.
func Advise(tables []effect.Table) (*Advice, error) {
	used, tally, err := take(effect.OddsRatio, tables)
	if err != nil {
		return nil, err
	}
	a := &Advice{}
	if err := a.gather(used, tally); err != nil {
		return nil, err
	}
	a.judge()
	return a, nil
}

// gather sets the facts.
func (a *Advice) gather(used []effect.Table, tally Tally) error {
	peto, err := Model{Method: Peto, Level: 0.95}.Fit(used)
	if err != nil {
		return err
	}
	var events, people, ratio, treated, control float64
	for i, t := range used {
		treated += t.Events1
		control += t.Events2
		people += t.Total1 + t.Total2
		ratio += peto.Weights[i] * math.Abs(math.Log(t.Total1/t.Total2))
	}
	events = treated + control
	size, unbounded := peto.Mean.Estimate, false
	common, err := Model{Method: MantelHaenszel, Level: 0.95}.Refit(used)
	var boundary *BoundaryError
	switch {
	case err == nil:
		size = common.Estimate
	case errors.As(err, &boundary):
		unbounded = true
	default:
		return err
	}
	scatter := 1.0
	if peto.Heterogeneity != nil {
		scatter = math.Exp(peto.Heterogeneity.LnP)
	}
	all := float64(tally.Tables)
	below := func(value, limit float64) bool { return value < limit }
	above := func(value, limit float64) bool { return value > limit }
	add := func(kind FactKind, value float64, marks func(value, limit float64) bool) {
		a.Facts = append(a.Facts, Fact{Kind: kind, Value: value, Limit: factLimits[kind], Marked: marks(value, factLimits[kind])})
	}
	add(EventRate, events/people, below)
	add(ArmRatio, math.Exp(ratio), above)
	add(EffectSize, math.Exp(math.Abs(size)), func(value, limit float64) bool { return unbounded || value > limit })
	add(ZeroCells, float64(tally.ZeroCell)/all, above)
	add(SilentTables, float64(len(tally.Silent))/all, above)
	add(TotalEvents, events, below)
	add(ArmEvents, min(treated, control), below)
	add(TableCount, float64(len(used)), below)
	add(ScatterP, scatter, below)
	return nil
}

// judge draws the verdicts from the facts:
//
//   - peto is inapt with unequal arms or a large effect, where it is biased, and
//     wants care where events are not rare;
//   - mantel-haenszel and inverse-variance limits need events;
//   - inverse variance is inapt where many tables have zero cells, and wants care
//     with any zero cell and where events are rare;
//   - binomial-normal needs tables and events to say anything of the spread;
//   - the others have a common effect and want care where the tables scatter.
func (a *Advice) judge() {
	few := a.marked(TotalEvents, ArmEvents)
	scatter := a.marked(ScatterP)
	verdict := func(against, care []FactKind) Verdict {
		switch {
		case len(against) > 0:
			return Verdict{Apt: Inapt, Because: append(against, care...)}
		case len(care) > 0:
			return Verdict{Apt: WithCare, Because: care}
		}
		return Verdict{Apt: Apt}
	}
	var notRare []FactKind
	if !a.Fact(EventRate).Marked {
		notRare = []FactKind{EventRate}
	}
	a.Methods = map[Method]Verdict{
		MantelHaenszel:   verdict(nil, join(few, scatter)),
		Peto:             verdict(a.marked(ArmRatio, EffectSize), join(notRare, few, scatter)),
		ConditionalExact: verdict(nil, scatter),
		BinomialNormal:   verdict(nil, join(few, a.marked(TableCount))),
	}
	var someZero []FactKind
	if zero := a.Fact(ZeroCells); zero.Value > 0 && !zero.Marked {
		someZero = []FactKind{ZeroCells}
	}
	a.InverseVariance = verdict(a.marked(ZeroCells), join(a.marked(EventRate), someZero, few))
}

// marked returns those of the kinds whose facts are marked.
func (a *Advice) marked(kinds ...FactKind) []FactKind {
	var out []FactKind
	for _, k := range kinds {
		if a.Fact(k).Marked {
			out = append(out, k)
		}
	}
	return out
}

func join(lists ...[]FactKind) []FactKind {
	var out []FactKind
	for _, list := range lists {
		out = append(out, list...)
	}
	return out
}
