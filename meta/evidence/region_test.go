package evidence

import (
	"errors"
	"math"
	"testing"
)

var (
	below = Region{{Low: math.Inf(-1), High: 0}}
	over  = Region{{Low: 0, High: math.Inf(1)}}
	line  = Region{{Low: math.Inf(-1), High: math.Inf(1)}}
)

// round is a region of the given width round x.
func round(x, width float64) Region { return Region{{Low: x - width/2, High: x + width/2}} }

// TestShrinkingRegion: a region that shrinks to a point against its complement
// tends to the point-null form of the estimate: Normal, Matched or Student.
func TestShrinkingRegion(t *testing.T) {
	inf := math.Inf(1)
	for _, stat := range []float64{0, 0.7, 2, -3.5, 9, 60, 1000} {
		for _, width := range []float64{1e-5, 1e-8, 1e-12} {
			for _, tt := range []struct {
				df   float64
				form Form
				want Ratio
			}{
				{inf, Empirical, Normal(stat)},
				{inf, StudentForm, Normal(stat)},
				{7, Empirical, Matched(stat, 7)},
				{7, StudentForm, Student(stat, 7)},
				{1, Empirical, Matched(stat, 1)},
				{300, StudentForm, Student(stat, 300)},
			} {
				point := round(0, width)
				got, err := at(stat, tt.df, tt.form).Region(point.Complement(), point)
				// The rest falls short of the whole line in proportion to the width.
				if err != nil || !(math.Abs(got.Ln()-tt.want.Ln()) <= 2*width+1e-9*max(1, math.Abs(tt.want.Ln()))) {
					t.Errorf("t = %g, %g df, %v, width %g: ln ER = %.12g, %v, want %.12g", stat, tt.df, tt.form, width, got.Ln(), err, tt.want.Ln())
				}
			}
		}
	}
}

// TestNarrowAwayFromNull: a narrow region far from 0, whose ends as numbers
// hardly differ, still has the mean likelihood of a point: ln M = (ln 2 - z²)/2.
func TestNarrowAwayFromNull(t *testing.T) {
	for _, mid := range []float64{5, 100, 20000} {
		l := Location{Estimate: mid + 3, SE: 1, DF: math.Inf(1)}
		r := Region{{Low: mid, High: math.Nextafter(mid, math.Inf(1))}}
		if got, want := l.LnM(r), 0.5*(math.Ln2-9); !near(got, want, 1e-9) {
			t.Errorf("ln M of the narrowest region at %g = %.12g, want %.12g", mid, got, want)
		}
		if beta := l.Correction(r); math.Abs(beta) > 1e-9 {
			t.Errorf("β of the narrowest region at %g = %g, want 0", mid, beta)
		}
	}
}

// TestDirection: with the estimate far on one side, the other side's evidence is
// the normal form's, up to the share of the near side and the corrections: ln ER
// → z²/2 + ln 2/2 … its leading part z²/2 must stand at any z.
func TestDirection(t *testing.T) {
	for _, z := range []float64{10, 1000, 20000} {
		r, err := normalAt(z).Region(over, below)
		// ln M of (-∞, 0) is ln Φ(-√2z) - ln Φ(-z) → -z²/2 - ln 2/2.
		want := 0.5*(z*z+math.Ln2) - (0.5 - normalAt(z).Correction(below))
		if err != nil || !(math.Abs(r.Ln()-want) <= 1/(z*z)+1e-15*want) {
			t.Errorf("z = %g: ln ER = %.12g, %v, want %.12g", z, r.Ln(), err, want)
		}
		// Far out, Student tails fall by powers, so the evidence is finite too.
		for _, form := range []Form{Empirical, StudentForm} {
			r, err := at(z, 2, form).Region(over, below)
			if err != nil || !(r.Ln() > 0 && r.Ln() < 100) {
				t.Errorf("t = %g, 2 df, %v: ln ER = %g, %v", z, form, r.Ln(), err)
			}
		}
	}
	r, err := normalAt(0).Region(over, below)
	if err != nil || math.Abs(r.Ln()) > 1e-14 {
		t.Errorf("at z = 0 the sides have ln ER %g, %v, want 0", r.Ln(), err)
	}
}

func TestWholeLine(t *testing.T) {
	for _, l := range []Location{normalAt(3), at(3, 2, Empirical), at(3, 2, StudentForm)} {
		if got := l.LnM(line); math.Abs(got) > 1e-15 {
			t.Errorf("%+v: ln M of the whole line = %g, want 0", l, got)
		}
		if got := l.Correction(line); !near(got, 0.5, 1e-13) {
			t.Errorf("%+v: β of the whole line = %g, want ½", l, got)
		}
		if got := l.Posterior(line); got != 1 {
			t.Errorf("%+v: posterior of the whole line = %g, want 1", l, got)
		}
	}
}

func TestComplement(t *testing.T) {
	inf := math.Inf(1)
	for _, tt := range []struct {
		name    string
		r, want Region
	}{
		{"interval", Region{{-1, 2}}, Region{{-inf, -1}, {2, inf}}},
		{"half line", Region{{0, inf}}, Region{{-inf, 0}}},
		{"two", Region{{-inf, -1}, {1, inf}}, Region{{-1, 1}}},
		{"touching", Region{{-1, 0}, {0, 1}}, Region{{-inf, -1}, {1, inf}}},
		{"whole line", line, Region{}},
		{"nothing", Region{}, line},
	} {
		got := tt.r.Complement()
		if len(got) != len(tt.want) {
			t.Errorf("%s: complement %v, want %v", tt.name, got, tt.want)
			continue
		}
		for i := range got {
			if got[i] != tt.want[i] {
				t.Errorf("%s: complement %v, want %v", tt.name, got, tt.want)
			}
		}
	}
}

func TestRegionErrors(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	good := normalAt(1)
	for _, tt := range []struct {
		name   string
		l      Location
		r1, r2 Region
		want   error
	}{
		{"SE 0", Location{Estimate: 1, SE: 0, DF: inf}, over, below, ErrLocation},
		{"SE negative", Location{Estimate: 1, SE: -1, DF: inf}, over, below, ErrLocation},
		{"SE NaN", Location{Estimate: 1, SE: nan, DF: inf}, over, below, ErrLocation},
		{"SE infinite", Location{Estimate: 1, SE: inf, DF: inf}, over, below, ErrLocation},
		{"estimate NaN", Location{Estimate: nan, SE: 1, DF: inf}, over, below, ErrLocation},
		{"estimate infinite", Location{Estimate: inf, SE: 1, DF: inf}, over, below, ErrLocation},
		{"df unset", Location{Estimate: 1, SE: 1}, over, below, ErrLocation},
		{"df NaN", Location{Estimate: 1, SE: 1, DF: nan}, over, below, ErrLocation},
		{"first empty", good, Region{}, below, ErrRegion},
		{"second empty", good, over, nil, ErrRegion},
		{"point", good, over, Region{{1, 1}}, ErrRegion},
		{"turned round", good, Region{{2, 1}}, below, ErrRegion},
		{"NaN end", good, Region{{nan, 1}}, below, ErrRegion},
		{"overlap", good, Region{{0, 2}, {1, 3}}, below, ErrRegion},
		{"not ascending", good, Region{{2, 3}, {0, 1}}, below, ErrRegion},
	} {
		t.Run(tt.name, func(t *testing.T) {
			r, err := tt.l.Region(tt.r1, tt.r2)
			if !errors.Is(err, tt.want) || r != (Ratio{}) {
				t.Errorf("Region = %v, %v, want %v", r, err, tt.want)
			}
			for _, region := range []Region{tt.r1, tt.r2} {
				if tt.l.Check() == nil && region.Check() == nil {
					continue
				}
				if m, b, p := tt.l.LnM(region), tt.l.Correction(region), tt.l.Posterior(region); !math.IsNaN(m+b+p) || !math.IsNaN(m) || !math.IsNaN(b) {
					t.Errorf("invalid input gives ln M %g, β %g, posterior %g, want NaN", m, b, p)
				}
			}
		})
	}
}
