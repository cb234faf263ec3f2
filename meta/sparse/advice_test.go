package sparse

import (
	"encoding/json"
	"errors"
	"math"
	"slices"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"steelyard/meta/effect"
)

// Source: sums by hand. BCG has 1065 + 1510 events among 191064 + 166283 people;
// its p-value is that of Peto's Q on 12 df, below 1e-20 (PUBLISHED: Q about 164).
func TestAdviceFacts(t *testing.T) {
	a, err := Advise(bcg(t))
	if err != nil {
		t.Fatal(err)
	}
	if !(a.Fact(ScatterP).Value < 1e-20) || !a.Fact(ScatterP).Marked {
		t.Errorf("scatter %+v", a.Fact(ScatterP))
	}
	compare(t,
		want{"event rate", a.Fact(EventRate).Value, 2575. / 357347, 1e-15},
		want{"events", a.Fact(TotalEvents).Value, 2575, 0}, want{"in the treated arms", a.Fact(ArmEvents).Value, 1065, 0},
		want{"tables", a.Fact(TableCount).Value, 13, 0},
		want{"effect", a.Fact(EffectSize).Value, 1 / 0.622874024574, 1e-11}, // README of the check values
	)
	// thin: 6 tables, of which one is silent and two have a single zero.
	if a, err = Advise(thin); err != nil {
		t.Fatal(err)
	}
	compare(t,
		want{"zero cells", a.Fact(ZeroCells).Value, 2. / 6, 0}, want{"silent", a.Fact(SilentTables).Value, 1. / 6, 0},
		want{"events", a.Fact(TotalEvents).Value, 29, 0}, want{"tables", a.Fact(TableCount).Value, 5, 0},
	)
	// One table with arms 3 : 1, whatever its weight.
	if a, err = Advise(tablesOf([4]float64{3, 300, 2, 100})); err != nil {
		t.Fatal(err)
	}
	compare(t, want{"arm ratio", a.Fact(ArmRatio).Value, 3, 1e-14}, want{"scatter of one table", a.Fact(ScatterP).Value, 1, 0})
	// Beside one with equal arms it counts by its share of V = n₁n₂m(N−m)/(N²(N−1)).
	if a, err = Advise(tablesOf([4]float64{3, 300, 2, 100}, [4]float64{5, 100, 5, 100})); err != nil {
		t.Fatal(err)
	}
	unequal, equal := 300.*100*5*395/(400*400*399), 100.*100*10*190/(200*200*199)
	compare(t, want{"arm ratio of two", a.Fact(ArmRatio).Value, math.Pow(3, unequal/(unequal+equal)), 1e-13})
}

func TestAdviceVerdicts(t *testing.T) {
	repeat := func(k int, row [4]float64) []effect.Table {
		var rows [][4]float64
		for range k {
			rows = append(rows, row)
		}
		return tablesOf(rows...)
	}
	verdict := func(apt Aptness, because ...FactKind) Verdict { return Verdict{Apt: apt, Because: because} }
	for _, tt := range []struct {
		name                                     string
		tables                                   []effect.Table
		mantel, peto, exact, binomial, corrected Verdict
	}{
		{"rare, balanced, small effect", repeat(6, [4]float64{5, 1000, 6, 1000}),
			verdict(Apt), verdict(Apt), verdict(Apt), verdict(Apt), verdict(WithCare, EventRate)},
		{"common", repeat(6, [4]float64{50, 100, 60, 100}),
			verdict(Apt), verdict(WithCare, EventRate), verdict(Apt), verdict(Apt), verdict(Apt)},
		{"unequal arms", repeat(6, [4]float64{12, 3000, 5, 1000}),
			verdict(Apt), verdict(Inapt, ArmRatio), verdict(Apt), verdict(Apt), verdict(WithCare, EventRate)},
		{"large effect", repeat(6, [4]float64{2, 1000, 9, 1000}),
			verdict(Apt), verdict(Inapt, EffectSize), verdict(Apt), verdict(Apt), verdict(WithCare, EventRate)},
		{"few events", repeat(2, [4]float64{2, 1000, 2, 1000}),
			verdict(WithCare, TotalEvents, ArmEvents), verdict(WithCare, TotalEvents, ArmEvents), verdict(Apt),
			verdict(WithCare, TotalEvents, ArmEvents, TableCount), verdict(WithCare, EventRate, TotalEvents, ArmEvents)},
		{"infinite effect, zeros everywhere", repeat(6, [4]float64{9, 1000, 0, 1000}),
			verdict(WithCare, ArmEvents), verdict(Inapt, EffectSize, ArmEvents), verdict(Apt), verdict(WithCare, ArmEvents),
			verdict(Inapt, ZeroCells, EventRate, ArmEvents)},
		{"one zero among many", append(repeat(6, [4]float64{5, 1000, 6, 1000}), tablesOf([4]float64{0, 100, 1, 100})...),
			verdict(Apt), verdict(Apt), verdict(Apt), verdict(Apt), verdict(WithCare, EventRate, ZeroCells)},
		{"scatter", append(repeat(6, [4]float64{20, 1000, 60, 1000}), repeat(6, [4]float64{60, 1000, 20, 1000})...),
			verdict(WithCare, ScatterP), verdict(WithCare, EventRate, ScatterP), verdict(WithCare, ScatterP), verdict(Apt), verdict(Apt)},
	} {
		t.Run(tt.name, func(t *testing.T) {
			a, err := Advise(tt.tables)
			if err != nil {
				t.Fatal(err)
			}
			same := func(name string, got, want Verdict) {
				if got.Apt != want.Apt || !slices.Equal(got.Because, want.Because) {
					t.Errorf("%s: %v %v, want %v %v", name, got.Apt, got.Because, want.Apt, want.Because)
				}
			}
			same("mantel-haenszel", a.Methods[MantelHaenszel], tt.mantel)
			same("peto", a.Methods[Peto], tt.peto)
			same("conditional-exact", a.Methods[ConditionalExact], tt.exact)
			same("binomial-normal", a.Methods[BinomialNormal], tt.binomial)
			same("inverse variance", a.InverseVariance, tt.corrected)
		})
	}
	if a, err := Advise(tablesOf([4]float64{0, 10, 0, 10})); a != nil || !errors.Is(err, ErrNothingToCompare) {
		t.Errorf("no information: %v, %v", a, err)
	}
}

// Every fact has a sentence of its own with its number in it, and can be written
// as JSON; a marked one says what its limit is.
func TestAdviceText(t *testing.T) {
	seen := map[string]bool{}
	for kind := EventRate; kind <= ScatterP; kind++ {
		f := Fact{Kind: kind, Value: 0.0625, Limit: 0.5}
		plain := f.Text()
		f.Marked = true
		if plain == kind.String() || !strings.HasSuffix(plain, ".") || seen[plain] || strings.Contains(plain, "%!") || strings.Contains(f.Text(), "%!") {
			t.Errorf("%v: %q, marked %q", kind, plain, f.Text())
		}
		seen[plain] = true
		if marked := kind != ZeroCells && kind != SilentTables; marked && f.Text() == plain {
			t.Errorf("%v: marked as unmarked: %q", kind, plain)
		}
		if kind != TableCount && kind.Source() == "" {
			t.Errorf("%v has no source", kind)
		}
	}
	rapid.Check(t, func(t *rapid.T) {
		a, err := Advise(drawTables(t, 5, 60))
		if err != nil {
			if !errors.Is(err, ErrNothingToCompare) {
				t.Fatal(err)
			}
			return
		}
		if _, err := json.Marshal(a); err != nil || len(a.Facts) != int(ScatterP)+1 || len(a.Methods) != 4 {
			t.Fatalf("%+v: %v", a, err)
		}
		for _, f := range a.Facts {
			if math.IsNaN(f.Value) || math.IsInf(f.Value, 0) {
				t.Fatalf("%+v", f)
			}
		}
	})
}

func TestMethodNames(t *testing.T) {
	names := MethodNames()
	if len(names) != 4 {
		t.Fatalf("names %v", names)
	}
	for i, name := range names {
		var m Method
		if err := m.UnmarshalText([]byte(name)); err != nil || m != Method(i) {
			t.Errorf("%q is read as %v, %v", name, m, err)
		}
		if text, err := m.MarshalText(); err != nil || string(text) != name {
			t.Errorf("%v is written as %q, %v", m, text, err)
		}
	}
	if _, err := ParseMethod("petto"); err == nil || !strings.Contains(err.Error(), "binomial-normal") {
		t.Errorf("unknown name: %v", err)
	}
}

// Errors say what is wrong and what to do, and the one-sided one its limit.
// Source of the limit: one table, 0 of 10 against 4 of 12, scipy 1.10.1,
// stats.contingency.odds_ratio(kind="conditional"): at most exp(0.4910560886).
func TestErrorTexts(t *testing.T) {
	table := tablesOf([4]float64{0, 10, 4, 12})
	var boundary *BoundaryError
	_, err := Model{Method: ConditionalExact, Level: 0.95}.Fit(table)
	if !errors.As(err, &boundary) {
		t.Fatal(err)
	}
	compare(t, want{"limit", boundary.OneSided.Limit, 0.4910560886060541, 1e-9})
	for _, tt := range []struct {
		err   error
		parts []string
	}{
		{err, []string{"odds ratio by conditional-exact is estimated as 0", "at most 1.634"}},
		{&BoundaryError{Method: MantelHaenszel, Measure: effect.RiskRatio, Toward: 1}, []string{"risk ratio by mantel-haenszel is estimated as infinite", "use conditional-exact"}},
		{&TableError{Index: 2, Err: ErrNoVariance}, []string{"table 3 in the order given"}},
		{&SizeError{Terms: 3e12}, []string{"3e+12", "use mantel-haenszel"}},
		{&UnboundedError{What: "the spread between studies"}, []string{"the spread between studies has no end", "use a common effect"}},
	} {
		for _, part := range tt.parts {
			if !strings.Contains(tt.err.Error(), part) {
				t.Errorf("%q does not say %q", tt.err, part)
			}
		}
	}
}

// Source: one table, 0 of 10 against 4 of 12; the likelihood at a given odds ratio
// is maximised over the two shares directly in the test.
func TestLogisticOneSided(t *testing.T) {
	var boundary *BoundaryError
	if _, err := (Model{Method: BinomialNormal, Level: 0.95}).Fit(tablesOf([4]float64{0, 10, 4, 12})); !errors.As(err, &boundary) || boundary.OneSided == nil || boundary.Toward != -1 {
		t.Fatal(err)
	}
	// Deviance with the odds ratio ψ: 10 p₁ + 12 p₂ = 4 and odds₁ = ψ odds₂.
	deviance := func(psi float64) float64 {
		low, high := 0.0, 1.0/3
		for range 200 { // p₂ by bisection
			p2 := (low + high) / 2
			odds := psi * p2 / (1 - p2)
			if 10*odds/(1+odds)+12*p2 < 4 {
				low = p2
			} else {
				high = p2
			}
		}
		p2 := (low + high) / 2
		odds := psi * p2 / (1 - p2)
		top := 4*math.Log(1./3) + 8*math.Log(2./3)
		return 2 * (top - (10*math.Log(1/(1+odds)) + 4*math.Log(p2) + 8*math.Log(1-p2)))
	}
	const critical = 1.959963984540054 * 1.959963984540054
	compare(t,
		want{"deviance at the limit", deviance(math.Exp(boundary.OneSided.Limit)), critical, 1e-8},
		want{"z", boundary.OneSided.Statistic, -math.Sqrt(deviance(1)), 1e-9},
	)
}
