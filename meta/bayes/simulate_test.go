package bayes

import (
	"context"
	"errors"
	"math"
	"strings"
	"testing"
)

// corrections simulates with a fixed seed.
func corrections(t testing.TB, y, s []float64, p TauPrior, draws int) (zero, free Correction) {
	t.Helper()
	r, err := IntegrateSimulated(context.Background(), y, s, 0, p, draws, 7)
	if err != nil {
		t.Fatal(err)
	}
	return r.Corrections[NoEffectRandom], r.Corrections[EffectRandom]
}

// TestCorrectionsAgainstChecks compares with 400,000 pairs of an independent
// simulation. The file's tolerance is four of its standard errors, to which
// four of ours are joined.
func TestCorrectionsAgainstChecks(t *testing.T) {
	const draws = 20_000
	type key struct{ data, prior string }
	memo := map[key][2]Correction{}
	seen := 0
	for _, row := range rows(t, "evidence_extra.csv") {
		if row[0] != "integrated_correction_simulated" {
			continue
		}
		seen++
		kind, scale, _ := strings.Cut(row[2], " ")
		at := key{row[1], row[2]}
		if _, ok := memo[at]; !ok {
			y, s := readStudies(t, row[1])
			zero, free := corrections(t, y, s, tauPrior(t, kind, scale), draws)
			memo[at] = [2]Correction{zero, free}
		}
		zero, free := memo[at][0], memo[at][1]
		got := free
		switch {
		case strings.Contains(row[3], "-b(0"):
			// The two share their draws; their errors are added as if they did not.
			got = Correction{free.Value - zero.Value, math.Hypot(free.Error, zero.Error)}
		case strings.HasPrefix(row[3], "b(0"):
			got = zero
		}
		want, tolerance := number(t, row[5]), math.Hypot(number(t, row[6]), 4*got.Error)
		if !(math.Abs(got.Value-want) <= tolerance) {
			t.Errorf("%v: %.4f ± %.4f, want %.4f within %.4f", row[1:4], got.Value, got.Error, want, tolerance)
		}
		if got.Error > 0.03 {
			t.Errorf("%v: a standard error of %.3f shows nothing", row[1:4], got.Error)
		}
	}
	if seen != 10 {
		t.Errorf("%d rows, want 10", seen)
	}
}

// TestCorrectionsForLargeTau compares with the closed form for τ much larger than
// every standard error, where the estimates scatter a thousandfold.
func TestCorrectionsForLargeTau(t *testing.T) {
	seen := 0
	for _, row := range rows(t, "evidence_extra.csv") {
		if row[0] != "integrated_correction_large_tau_limit" {
			continue
		}
		seen++
		k := int(number(t, row[1]))
		y, s := make([]float64, k), make([]float64, k)
		for i := range y {
			y[i], s[i] = 1000*float64(2*i-k+1), 1
		}
		zero, free := corrections(t, y, s, TauPrior{}, 5000)
		got := free
		if strings.HasPrefix(row[3], "b(0") {
			got = zero
		}
		if want := number(t, row[5]); !(math.Abs(got.Value-want) <= 4*got.Error) || got.Error > 0.03 {
			t.Errorf("%v: %.4f ± %.4f, want %.4f", row[1:4], got.Value, got.Error, want)
		}
	}
	if seen != 8 {
		t.Errorf("%d rows, want 8", seen)
	}
}

// TestGridAgreesWithQuadrature holds the fixed rule of the simulation to the
// adaptive one: ln ∫∫L²p of one data set under every prior.
func TestGridAgreesWithQuadrature(t *testing.T) {
	y := []float64{0.3, -0.8, 1.1, 0.2, -0.4, 1.9}
	s := []float64{0.2, 0.5, 1, 0.3, 0.8, 40}
	for _, p := range []TauPrior{{}, {Kind: HalfNormal, Scale: 0.5}, {Kind: HalfNormal, Scale: 1e-3}, {Kind: HalfCauchy, Scale: 0.5},
		{Kind: LogNormal, MeanLog: -1, SDLog: 0.8}, {Kind: LogNormal, MeanLog: 1, SDLog: 0.01}, {Kind: LogNormal, MeanLog: -20, SDLog: 3}} {
		d, err := newStudies(y, s, 0, p)
		if err != nil {
			t.Fatal(err)
		}
		for i := range d.y {
			d.y[i] -= d.null
		}
		d.null = 0
		g, err := d.newGrid(1)
		if err != nil {
			t.Fatal(err)
		}
		g.take([2][]float64{d.y, d.y})
		for _, free := range []bool{false, true} {
			g.excess(free)
			got := lnTotal(g.ln[0])
			f := d.integrand(2, free)
			m, err := survey(f, d.lo, d.hi)
			if err != nil {
				t.Fatal(err)
			}
			want, err := m.lnIntegral(f, nil)
			if err != nil {
				t.Fatal(err)
			}
			if free {
				want -= 0.5 * math.Log(math.Pi)
			}
			if !(math.Abs(got-want) < 2e-3) {
				t.Errorf("%+v, free %v: %.8f on the grid, %.8f by quadrature", p, free, got, want)
			}
		}
	}
}

func TestSimulationRepeatsAndStops(t *testing.T) {
	y, s := readStudies(t, "aspirin_lor")
	p := TauPrior{Kind: HalfCauchy, Scale: 0.5}
	a, b := corrections(t, y, s, p, 200)
	c, d := corrections(t, y, s, p, 200)
	if a != c || b != d {
		t.Errorf("one seed gave %v, %v and %v, %v", a, b, c, d)
	}
	cause := errors.New("enough")
	ctx, cancel := context.WithCancelCause(context.Background())
	cancel(cause)
	if r, err := IntegrateSimulated(ctx, y, s, 0, p, 1000, 1); r != nil || !errors.Is(err, cause) {
		t.Errorf("after the end: %v, %v", r, err)
	}
	var fault *PriorError
	if _, err := IntegrateSimulated(context.Background(), y, s, 0, p, 99, 1); !errors.As(err, &fault) {
		t.Errorf("99 draws: %v", err)
	}
}
