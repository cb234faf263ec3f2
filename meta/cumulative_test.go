package meta

import (
	"errors"
	"math"
	"reflect"
	"slices"
	"testing"
)

// rowsIn returns the rows of the named studies, one group each.
func (d studies) rowsIn(t testing.TB, names []string) [][]int {
	t.Helper()
	var groups [][]int
	for _, name := range names {
		row := slices.Index(d.names, name)
		if row < 0 {
			t.Fatalf("no study %q", name)
		}
		groups = append(groups, []int{row})
	}
	return groups
}

// TestReferenceCumulative: the 40-digit values of the check files, with the
// studies in the order of the sheet and entering in the order of their dates.
func TestReferenceCumulative(t *testing.T) {
	for _, name := range checkNames {
		t.Run(name, func(t *testing.T) {
			d := readStudies(t, name)
			_, want := readReference(t, name)
			order := d.rowsIn(t, want.Studies)
			compareSeries(t, want.CumulativeByDate, func(m Model) []Mean {
				steps, err := Cumulative(background, pairs(t, m, d.y, d.s), order, Work{})
				if err != nil {
					t.Fatal(err)
				}
				var means []Mean
				for i, step := range steps {
					if step.Problem != nil || step.K != i+1 || step.Alone != (i == 0) || !slices.Equal(step.Entered, order[i]) {
						t.Errorf("step %d: %+v", i, step)
					}
					means = append(means, step.Mean)
				}
				return means
			})
		})
	}
}

// compareSeries checks a series of refits by the models the references hold.
func compareSeries(t *testing.T, want []refit, series func(m Model) []Mean) {
	t.Helper()
	c := checker{t, closed}
	wald, common := series(with(RestrictedML, Wald)), series(Model{Level: 0.95, Effects: CommonEffect})
	plain := series(with(RestrictedML, HartungKnapp))
	if len(wald) != len(want) || len(want) < 7 {
		t.Fatalf("%d refits, want %d", len(wald), len(want))
	}
	for i, w := range want {
		c.near("τ²", wald[i].Tau2, w.Tau2)
		c.near("estimate", wald[i].Estimate, w.Estimate)
		c.near("se", wald[i].SE, w.SE)
		c.near("ln evidence", wald[i].Evidence.Ln(), w.Ln)
		c.near("common estimate", common[i].Estimate, w.CommonEstimate)
		c.near("common ln evidence", common[i].Evidence.Ln(), w.CommonLn)
		if w.HK == nil {
			continue
		}
		c.near("t se", plain[i].SE, w.HK.SE)
		c.near("t low", plain[i].Low, w.HK.Low)
		c.near("t high", plain[i].High, w.HK.High)
		c.near("matched", plain[i].Evidence.Ln(), w.HK.Matched)
		c.near("matched steps", plain[i].Evidence.Steps(), w.HK.MatchedSteps)
	}
}

// TestLastStepIsWholeAnalysis: bit for bit, whatever the order of entry.
func TestLastStepIsWholeAnalysis(t *testing.T) {
	y, s := drawn(9)
	for name, m := range everyModel() {
		steps, err := Cumulative(background, pairs(t, m, y, s), [][]int{{8, 0}, {3}, {5, 4, 1}, {2}, {7, 6}}, Work{})
		if err != nil {
			t.Fatal(err)
		}
		whole := mustFit(t, m, y, s)
		last := steps[len(steps)-1]
		if last.Mean != whole.Mean || !reflect.DeepEqual(last.Prediction, whole.Prediction) {
			t.Errorf("%s: last step %+v, whole %+v", name, last.Mean, whole.Mean)
		}
	}
}

// TestTiedStudiesEnterTogether: a step of two studies is the pooling of both, what
// it added is the difference of the steps, and the first adds nothing.
func TestTiedStudiesEnterTogether(t *testing.T) {
	y, s := drawn(5)
	steps, err := Cumulative(background, pairs(t, at95, y, s), [][]int{{4}, {2, 0}, {1, 3}}, Work{})
	if err != nil {
		t.Fatal(err)
	}
	if !slices.Equal(steps[1].Entered, []int{0, 2}) || steps[1].K != 3 || steps[1].Alone || !steps[0].Alone {
		t.Errorf("steps %+v", steps)
	}
	if got, want := steps[1].Mean, mustPool(t, at95, []float64{y[0], y[2], y[4]}, []float64{s[0], s[2], s[4]}); got != want {
		t.Errorf("three studies: %+v, want %+v", got, want)
	}
	if steps[0].Added != nil || steps[0].Prediction != nil || steps[1].Prediction == nil {
		t.Errorf("first %+v, second %+v", steps[0], steps[1])
	}
	for i := 1; i < len(steps); i++ {
		if want := steps[i].Mean.Evidence.Steps() - steps[i-1].Mean.Evidence.Steps(); *steps[i].Added != want {
			t.Errorf("step %d added %v, want %v", i, *steps[i].Added, want)
		}
	}
}

// TestCumulativeAsPublished: PUBLISHED §1, BCG log risk ratios in the order of the
// years, DerSimonian–Laird [recalc]: τ², risk ratio, z.
func TestCumulativeAsPublished(t *testing.T) {
	want := [][3]float64{
		{0, 0.4109, -1.559}, {0.0000, 0.2658, -3.797}, {0.0754, 0.3823, -4.118}, {0.0426, 0.3858, -5.158},
		{0.0832, 0.3331, -5.557}, {0.0723, 0.3852, -5.690}, {0.0965, 0.4075, -5.035}, {0.1220, 0.4575, -4.495},
		{0.1351, 0.4261, -4.956}, {0.1279, 0.4656, -4.957}, {0.1382, 0.5025, -4.599}, {0.2109, 0.4538, -4.845},
		{0.3088, 0.4896, -3.995},
	}
	d := readStudies(t, "bcg_lrr")
	_, dated := readReference(t, "bcg_lrr")
	steps, err := Cumulative(background, pairs(t, with(DerSimonianLaird, Wald), d.y, d.s), d.rowsIn(t, dated.Studies), Work{})
	if err != nil {
		t.Fatal(err)
	}
	for i, step := range steps {
		printed(t, "τ²", step.Mean.Tau2, want[i][0], 4)
		printed(t, "ratio", math.Exp(step.Mean.Estimate), want[i][1], 4)
		printed(t, "z", step.Mean.Statistic, want[i][2], 3)
	}
}

func TestOrderErrors(t *testing.T) {
	y, s := drawn(3)
	r := pairs(t, at95, y, s)
	for _, groups := range [][][]int{nil, {{0, 1}}, {{0}, {1}, {2}, {0}}, {{0, 1, 2, 3}}, {{-1}, {0, 1, 2}}, {{0, 1, 2}, {}}, {{0, 1, 2, 2}}} {
		_, err := Cumulative(background, r, groups, Work{})
		var order *OrderError
		if !errors.As(err, &order) {
			t.Errorf("%v: error %v", groups, err)
		}
	}
}

// failing is a Refit that cannot pool some sets.
type failing struct {
	*Pairs
	refuse func(rows []int) bool
}

var errRefused = errors.New("refused")

func (f failing) Mean(rows []int) (Mean, error) {
	if f.refuse(rows) {
		return Mean{}, errRefused
	}
	return f.Pairs.Mean(rows)
}

func (f failing) Clone() Refit { return failing{f.Pairs.Clone().(*Pairs), f.refuse} }

// TestPartsThatCannotBePooled carry the reason and spoil nothing else.
func TestPartsThatCannotBePooled(t *testing.T) {
	y, s := drawn(6)
	r := failing{pairs(t, at95, y, s), func(rows []int) bool { return len(rows) < 3 || !slices.Contains(rows, 4) && len(rows) == 5 }}
	steps, err := Cumulative(background, r, oneByOne(6), Work{})
	if err != nil {
		t.Fatal(err)
	}
	for i, step := range steps {
		if bad := i < 2; (step.Problem != nil) != bad || (step.Added != nil) != (i > 2) {
			t.Errorf("step %d: %+v", i, step)
		}
	}
	list, err := LeaveOneOut(background, r, Work{})
	if err != nil {
		t.Fatal(err)
	}
	influences, err := Influences(background, r, Work{})
	if err != nil {
		t.Fatal(err)
	}
	for i := range list {
		if (list[i].Problem != nil) != (i == 4) || (influences[i].Problem != nil) != (i == 4) || (influences[i].Pull == 0) != (i == 4) || influences[i].Detail != nil {
			t.Errorf("without %d: %+v, %+v", i, list[i], influences[i])
		}
	}
	subsets, err := AllSubsets(background, r, SubsetOptions{})
	if err != nil {
		t.Fatal(err)
	}
	if subsets.Count != 63 || subsets.Failed != 6+15+1 {
		t.Errorf("%d of %d subsets failed, want 22 of 63", subsets.Failed, subsets.Count)
	}
	tipping, err := TippingSet(background, r, math.Inf(1), Work{})
	if err != nil || !tipping.Found || len(tipping.Rows) != 0 {
		t.Errorf("already under: %+v, %v", tipping, err)
	}
}
