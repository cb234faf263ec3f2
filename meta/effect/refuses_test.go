package effect

import (
	"errors"
	"math"
	"reflect"
	"strings"
	"testing"

	"steelyard/meta/choice"
)

// refused collects what a function gives beside an error: nothing.
type refused struct {
	name   string
	what   string // the number the error must name
	err    error
	beside []any
}

// call runs a function by its arguments and splits off the error.
func call(name, what string, f any, args ...any) refused {
	in := make([]reflect.Value, len(args))
	for i, a := range args {
		in[i] = reflect.ValueOf(a)
	}
	out := reflect.ValueOf(f).Call(in)
	r := refused{name: name, what: what}
	for _, v := range out[:len(out)-1] {
		r.beside = append(r.beside, v.Interface())
	}
	r.err, _ = out[len(out)-1].Interface().(error)
	return r
}

// assertRefused checks that each gives an *InputError that names its number and
// says what to do, and nothing beside it.
func assertRefused(t *testing.T, all []refused) {
	t.Helper()
	for _, r := range all {
		var input *InputError
		if !errors.As(r.err, &input) || input.What != r.what {
			t.Errorf("%s: error %v, want one that names %q", r.name, r.err, r.what)
			continue
		}
		if text := r.err.Error(); !strings.HasPrefix(text, r.what) || input.Do == "" || input.Why == "" {
			t.Errorf("%s: message %q does not say where, what and what to do", r.name, text)
		}
		for _, v := range r.beside {
			if !reflect.ValueOf(v).IsZero() {
				t.Errorf("%s: %v beside an error", r.name, v)
			}
		}
	}
}

var (
	nan, inf  = math.NaN(), math.Inf(1)
	goodArm   = Arm{Mean: 10, SD: 4, N: 25}
	goodTable = Table{3, 40, 5, 38}
)

func TestTestStatisticsRefuse(t *testing.T) {
	assertRefused(t, []refused{
		call("one-sided p of 0", "p", SEFromOneSidedP, 1.0, 0.0, inf, Higher),
		call("one-sided p of ½", "t", SEFromOneSidedP, 1.0, 0.5, inf, Higher),
		call("tested the other way", "t", SEFromOneSidedP, 1.0, 0.02, inf, Lower),
		call("direction unknown", "direction", SEFromOneSidedP, 1.0, 0.02, inf, DirectionUnknown),
		call("df 0", "degrees of freedom", SEFromOneSidedP, 1.0, 0.02, 0.0, Higher),
		call("ratio below 0", "estimate", FromP, OddsRatio, -0.5, 0.02, inf),
		call("ratio of 1", "estimate", FromP, OddsRatio, 1.0, 0.02, inf),
		call("t of 0", "t", FromT, MeanDifference, 1.0, 0.0),
		call("one-sided of a ratio", "t", FromOneSidedP, RiskRatio, 0.8, 0.02, inf, Higher),
		call("no df", "degrees of freedom", FromStudentLimits, MeanDifference, 1.0, 0.0, 2.0, 0.95, nan),
		call("low df", "degrees of freedom", SDFromLimits, 0.0, 2.0, 0.95, 12.0, -1.0),
		call("limits exchanged", "ci low", SDFromLimits, 2.0, 0.0, 0.95, 12.0, inf),
		call("no limit", "ci high", SDFromLimits, 2.0, nan, 0.95, 12.0, inf),
		call("level in percent", "ci level", SDFromLimits, 0.0, 2.0, 95.0, 12.0, inf),
		call("one person", "total", SDFromLimits, 0.0, 2.0, 0.95, 1.0, inf),
		call("sd overflows", "sd", SDFromLimits, -1.7e308, 1.7e308, 0.95, 12.0, inf),
		call("sd of a group", "sd control", SEFromArms, goodArm, Arm{SD: 0, N: 12}),
		call("four people", "total", FromArmsUnbiased, Arm{1, 1, 2}, Arm{2, 1, 2}),
		call("sd missing", "sd treated", FromArmsUnbiased, Arm{1, nan, 20}, goodArm),
		call("one person", "total control", FromArmsUnbiased, goodArm, Arm{1, 2, 1}),
		call("p of 0", "p", SignedZ, 0.0, Higher),
		call("p above 1", "p", SignedZ, 1.1, Higher),
		call("no p", "p", SignedZ, nan, Higher),
		call("direction out of range", "direction", SignedZ, 0.1, Direction(7)),
		call("one-sided p of 1", "p", SignedZOneSided, 1.0, Higher),
		call("direction unknown", "direction", SignedZOneSided, 0.1, DirectionUnknown),
		call("no studies", "studies", Stouffer, []Signed(nil)),
		call("no studies", "studies", Fisher, []Signed{}),
		call("z infinite", "z", Stouffer, []Signed{{inf, 9}}),
		call("n of 0", "total", Fisher, []Signed{{1, 9}, {1, 0}}),
		call("n overflows", "ln p", Stouffer, []Signed{{1e200, 1}}),
	})
}

func TestArmsRefuse(t *testing.T) {
	assertRefused(t, []refused{
		call("correlation above 1", "correlation", ChangeSD, 1.0, 2.0, 1.01),
		call("no correlation", "correlation", ChangeSD, 1.0, 2.0, nan),
		call("baseline sd 0", "baseline sd", ChangeSD, 0.0, 2.0, 0.5),
		call("no sd", "sd", ChangeSD, 1.0, nan, 0.5),
		call("nothing changes", "sd of the difference", ChangeSD, 2.0, 2.0, 1.0),
		call("implied above 1", "correlation", ImpliedCorrelation, 5.0, 2.0, 2.9),
		call("implied below -1", "correlation", ImpliedCorrelation, 3.0, 4.0, 7.1),
		call("change sd missing", "sd of change", ImpliedCorrelation, 3.0, 4.0, 0.0),
		call("implied overflows", "correlation", ImpliedCorrelation, 1e300, 1e-300, 1.0),
		call("no final mean", "mean", ChangeArm, Arm{nan, 1, 9}, 1.0, 2.0, 0.5),
		call("no baseline mean", "baseline mean", ChangeArm, goodArm, nan, 2.0, 0.5),
		call("baseline sd", "baseline sd", ChangeArm, goodArm, 1.0, -2.0, 0.5),
		call("change overflows", "mean of change", ChangeArm, Arm{1.7e308, 1, 9}, -1.7e308, 2.0, 0.5),
		call("sd of differences", "sd of the difference", FromDifferences, 1.0, 0.0, 10.0),
		call("no difference", "mean difference", FromDifferences, nan, 1.0, 10.0),
		call("one pair", "total", FromDifferences, 1.0, 1.0, 1.0),
		call("totals differ", "total control", FromPaired, MeanDifference, goodArm, Arm{10, 4, 24}, 0.5),
		call("correlation 1", "correlation", FromPaired, StandardisedMeanDifference, goodArm, goodArm, 1.0),
		call("correlation 2", "correlation", FromPaired, MeanDifference, goodArm, goodArm, 2.0),
		call("sd treated", "sd treated", FromPaired, MeanDifference, Arm{1, 0, 25}, goodArm, 0.5),
		call("mean control", "mean control", FromPaired, MeanDifference, goodArm, Arm{inf, 1, 25}, 0.5),
		call("q1 above median", "median", FromQuartiles, 5.0, 4.0, 8.0, 30.0),
		call("q3 below median", "q3", FromQuartiles, 1.0, 4.0, 3.0, 30.0),
		call("quartiles equal", "q3", FromQuartiles, 4.0, 4.0, 4.0, 30.0),
		call("no median", "median", FromQuartiles, 1.0, nan, 8.0, 30.0),
		call("no people", "total", FromQuartiles, 1.0, 4.0, 8.0, nan),
		call("one person", "total", FromRange, 1.0, 4.0, 8.0, 1.0),
		call("max below median", "max", FromRange, 1.0, 4.0, 3.0, 30.0),
		call("range infinite", "max", FromRange, 1.0, 4.0, inf, 30.0),
		call("range overflows", "sd", FromRange, -1.7e308, 0.0, 1.7e308, 30.0),
		call("q1 below min", "q1", FromFiveNumbers, 1.0, 0.0, 4.0, 6.0, 8.0, 30.0),
		call("max below q3", "max", FromFiveNumbers, 1.0, 2.0, 4.0, 6.0, 5.0, 30.0),
		call("quartiles equal", "q3", FromFiveNumbers, 1.0, 4.0, 4.0, 4.0, 5.0, 30.0),
		call("no arms", "arms", MergeArms),
		call("bad second arm", "sd arm 2", MergeArms, goodArm, Arm{1, -1, 9}),
		call("parts 0", "comparisons", SplitArm, goodArm, 0),
		call("too many parts", "total", SplitArm, goodArm, 13),
		call("bad arm", "mean", SplitArm, Arm{nan, 1, 9}, 2),
	})
}

func TestCountsRefuse(t *testing.T) {
	assertRefused(t, []refused{
		call("r of 1", "r", FromCorrelation, 1.0, 30.0),
		call("r of -1.2", "r", FromCorrelation, -1.2, 30.0),
		call("three people", "total", FromCorrelation, 0.5, 3.0),
		call("no people", "total", FromCorrelation, 0.5, inf),
		call("events above total", "events", FromProportion, Proportion, Counts{11, 10}, Half),
		call("fraction", "events", FromProportion, ArcsineProportion, Counts{1.5, 10}, Half),
		call("nobody", "total", FromProportion, Proportion, Counts{0, 0}, Half),
		call("zero without correction", "events", FromProportion, Proportion, Counts{0, 10}, NoCorrection),
		call("full without correction", "events", FromProportion, Proportion, Counts{10, 10}, NoCorrection),
		call("negative events", "events", FromRate, Events{-1, 10}, Half),
		call("no time", "person time", FromRate, Events{1, 0}, Half),
		call("zero without correction", "events", FromRate, Events{0, 10}, NoCorrection),
		call("fraction", "events treated", FromRates, Events{0.5, 10}, Events{1, 10}, Half),
		call("time infinite", "person time control", FromRates, Events{1, 10}, Events{1, inf}, Half),
		call("treated zero", "events treated", FromRates, Events{0, 10}, Events{1, 10}, NoCorrection),
		call("control zero", "events control", FromRates, Events{2, 10}, Events{0, 10}, NoCorrection),
		call("O−E missing", "observed minus expected", FromObservedExpected, OddsRatio, nan, 1.0),
		call("V 0", "variance", FromObservedExpected, HazardRatio, 1.0, 0.0),
		call("O−E overflows", "estimate", FromObservedExpected, HazardRatio, 1e300, 1e-300),
		call("no events", "events", VarianceFromTotals, 0.0, 10.0, 10.0),
		call("no arm", "total control", VarianceFromTotals, 5.0, 10.0, nan),
		call("shares", "share control", VarianceFromShares, 5.0, 0.5, 0.6),
		call("share negative", "share treated", VarianceFromShares, 5.0, -0.5, 1.5),
		call("share in percent", "share control", VarianceFromShares, 5.0, 50.0, 50.0),
		call("events of an arm", "events treated", VarianceFromEvents, 0.0, 10.0),
		call("hazard p", "p", FromHazardP, 0.0, Higher, 10.0),
		call("hazard direction", "direction", FromHazardP, 0.1, DirectionUnknown, 10.0),
		call("hazard V", "variance", FromHazardP, 0.1, Lower, -1.0),
		call("hazard z", "z", FromHazardZ, inf, 10.0),
		call("hazard ratio 0", "estimate", FromHazardVariance, 0.0, 10.0),
		call("hazard V missing", "variance", FromHazardVariance, 0.8, nan),
		call("log odds missing", "estimate", StandardisedFromOdds, Estimate{nan, 1}),
		call("se 0", "se", OddsFromStandardised, Estimate{1, 0}),
		call("cluster of half", "cluster size", DesignEffect, 0.5, 0.05),
		call("cluster missing", "cluster size", DesignEffect, nan, 0.05),
		call("icc above 1", "icc", DesignEffect, 20.0, 1.1),
		call("icc below 0", "icc", DesignEffect, 20.0, -0.01),
		call("icc missing", "icc", DesignEffect, 20.0, nan),
		call("deff below 1", "design effect", ClusterTable, goodTable, 0.9),
		call("deff missing", "design effect", ClusterArm, goodArm, nan),
		call("deff infinite", "design effect", ClusterSE, 1.0, inf),
		call("typed fraction", "events treated", ClusterTable, Table{1.5, 10, 2, 10}, 2.0),
		call("too few left", "total", ClusterArm, goodArm, 13.0),
		call("arm missing", "sd", ClusterArm, Arm{1, 0, 9}, 2.0),
		call("se missing", "se", ClusterSE, 0.0, 2.0),
		call("no counts", "arms", MergeCounts),
		call("bad counts", "events arm 2", MergeCounts, Counts{1, 2}, Counts{3, 2}),
		call("counts too large", "total", MergeCounts, Counts{1, 9e14}, Counts{3, 9e14}),
		call("parts 0", "comparisons", SplitControl, goodTable, 0),
		call("typed fraction", "total control", SplitControl, Table{1, 10, 2, 10.5}, 2),
		call("made by nobody", "total treated", FromEffectiveTable, OddsRatio, EffectiveTable{}, Half),
		call("made by nobody", "total treated", PetoEffective, EffectiveTable{}),
	})
	tiny, _, err := ClusterTable(Table{1, 2, 1, 2}, 5)
	if err != nil {
		t.Fatal(err)
	}
	assertRefused(t, []refused{call("less than one person", "total", FromPetoEffective, tiny)})
}

func TestNothingToCompare(t *testing.T) {
	empty, _, err := ClusterTable(Table{0, 20, 0, 20}, 2)
	if err != nil {
		t.Fatal(err)
	}
	for name, r := range map[string]refused{
		"rates":     call("", "", FromRates, Events{0, 10}, Events{0, 20}, Half),
		"table":     call("", "", FromEffectiveTable, OddsRatio, empty, Half),
		"Peto":      call("", "", FromPeto, Table{0, 20, 0, 20}),
		"effective": call("", "", FromPetoEffective, empty),
	} {
		if !errors.Is(r.err, ErrNothingToCompare) {
			t.Errorf("%s: %v", name, r.err)
		}
	}
}

func TestMeasuresRefused(t *testing.T) {
	for name, r := range map[string]refused{
		"p of a proportion":     call("", "", FromP, Proportion, 0.2, 0.03, inf),
		"t of a rate":           call("", "", FromT, Rate, 0.2, 3.0),
		"paired ratio":          call("", "", FromPaired, RatioOfMeans, goodArm, goodArm, 0.5),
		"O−E of a risk ratio":   call("", "", FromObservedExpected, RiskRatio, 1.0, 1.0),
		"rate from a total":     call("", "", FromProportion, Rate, Counts{1, 10}, Half),
		"correlation of counts": call("", "", FromTable, Correlation, goodTable, Half),
		"effective rate ratio":  call("", "", FromEffectiveTable, RateRatio, EffectiveTable{goodTable}, Half),
	} {
		var measure *MeasureError
		if !errors.As(r.err, &measure) || len(measure.Valid) == 0 {
			t.Errorf("%s: %v", name, r.err)
		}
	}
	for name, r := range map[string]refused{
		"proportion": call("", "", FromProportion, Proportion, Counts{0, 10}, Correction(99)),
		"rates":      call("", "", FromRates, Events{0, 10}, Events{1, 10}, Correction(99)),
	} {
		var unknown *choice.UnknownError
		if !errors.As(r.err, &unknown) {
			t.Errorf("%s with a correction out of range: %v", name, r.err)
		}
	}
}
