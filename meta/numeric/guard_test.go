package numeric

import (
	"math"
	"testing"
)

// odd are values that no caller should pass, and the edges of those it may.
var odd = []float64{
	math.NaN(), math.Inf(-1), math.Inf(1), -1e308, -1, -1e-300, math.Copysign(0, -1), 0, 5e-324, 1e-300, 1e-17,
	0.5, 1, 1 + 1e-15, 2, 37.6, 1e5, 1e9, 1e17, 1e160, 1e308, -math.Ln2, -750, -2e8, -1e300,
}

// guarded are all scalar functions of up to two arguments, and whether a pair is
// valid input for which NaN is not an answer.
var guarded = map[string]struct {
	f     func(a, b float64) float64
	valid func(a, b float64) bool
}{
	"LogNormalTail":      {func(a, _ float64) float64 { return LogNormalTail(a) }, notNaN},
	"NormalTail":         {func(a, _ float64) float64 { return NormalTail(a) }, notNaN},
	"LogNormalBetween":   {LogNormalBetween, func(a, b float64) bool { return a <= b }},
	"NormalCritical":     {func(a, _ float64) float64 { return NormalCritical(a) }, probability},
	"NormalFromLogTail":  {func(a, _ float64) float64 { return NormalFromLogTail(a) }, func(a, _ float64) bool { return a <= 0 }},
	"StudentTail":        {StudentTail, func(a, b float64) bool { return a == a && b > 1e-200 }},
	"LogStudentTail":     {LogStudentTail, func(a, b float64) bool { return a == a && b > 1e-200 }},
	"LogStudentDensity":  {LogStudentDensity, func(a, b float64) bool { return a == a && !math.IsInf(a, 0) && b > 1e-200 && b < 1e200 }},
	"StudentCritical":    {StudentCritical, func(a, b float64) bool { return probability(a, b) && b > 1e-200 }},
	"StudentFromLogTail": {StudentFromLogTail, func(a, b float64) bool { return a <= 0 && b > 1e-200 }},
	"ChiSquareTail":      {ChiSquareTail, func(a, b float64) bool { return a >= 0 && b > 1e-200 && b < 1e200 }},
	"LogChiSquareTail":   {LogChiSquareTail, func(a, b float64) bool { return a >= 0 && b > 1e-200 && b < 1e200 }},
	"GammaTail":          {GammaTail, func(a, b float64) bool { return a >= 0 && b > 1e-200 && b < 1e200 }},
	"ChiSquareQuantile":  {ChiSquareQuantile, func(a, b float64) bool { return probability(a, b) && b > 1e-200 && b <= 1e9 }},
	"ChiSquareUpper":     {ChiSquareUpperQuantile, func(a, b float64) bool { return probability(a, b) && b > 1e-200 && b <= 1e9 }},
	"ChiSquareFromLog":   {ChiSquareFromLogTail, func(a, b float64) bool { return a <= 0 && b > 1e-200 && b <= 1e9 }},
	"LogGamma":           {func(a, _ float64) float64 { return LogGamma(a) }, func(a, _ float64) bool { return a > 0 }},
	"Digamma":            {func(a, _ float64) float64 { return Digamma(a) }, func(a, _ float64) bool { return a > 0 }},
	"DigammaLessLog":     {func(a, _ float64) float64 { return DigammaLessLog(a) }, func(a, _ float64) bool { return a > 0 && a < 1e300 }},
	"LogGammaRatio":      {LogGammaRatio, func(a, b float64) bool { return a > 0 && b > 0 && a < 1e200 && b < 1e200 }},
	"LogGammaRise":       {LogGammaRise, func(a, b float64) bool { return a > 0 && a < 1e200 && b > 1e-200 && b < 1e200 }},
	"LogNormalStrip":     {LogNormalStrip, func(a, b float64) bool { return false }},
	"LogMills":           {func(a, _ float64) float64 { return LogMills(a) }, func(a, _ float64) bool { return a > -1e100 }},
	"LogFTail with 3":    {func(a, b float64) float64 { return LogFTail(a, 3, b) }, func(a, b float64) bool { return a >= 0 && b > 1e-200 }},
	"LogFTail of 3":      {func(a, b float64) float64 { return LogFTail(a, b, 3) }, func(a, b float64) bool { return a >= 0 && b > 1e-10 }},
	"LogStudentBetween":  {func(a, b float64) float64 { return LogStudentBetween(a, b, 3) }, func(a, b float64) bool { return a <= b }},
	"LogStudentStrip":    {func(a, b float64) float64 { return LogStudentStrip(a, b, 3) }, func(a, b float64) bool { return false }},
}

func notNaN(a, _ float64) bool      { return a == a }
func probability(a, _ float64) bool { return a >= 0 && a <= 1 }

// TestGuards calls every function with every pair of odd values: none panics,
// none hangs, and valid input never gives NaN.
func TestGuards(t *testing.T) {
	for name, g := range guarded {
		for _, a := range odd {
			for _, b := range odd {
				got := g.f(a, b)
				if math.IsNaN(got) && g.valid(a, b) {
					t.Errorf("%s(%g, %g) = NaN", name, a, b)
				}
			}
		}
		if got := g.f(math.NaN(), 1); !math.IsNaN(got) {
			t.Errorf("%s(NaN, 1) = %g, want NaN", name, got)
		}
	}
	for name, got := range map[string]float64{
		"StudentTail(1, 0)":             StudentTail(1, 0),
		"StudentCritical(0.05, -1)":     StudentCritical(0.05, -1),
		"StudentCritical(2, 5)":         StudentCritical(2, 5),
		"NormalCritical(-0.1)":          NormalCritical(-0.1),
		"NormalFromLogTail(0.1)":        NormalFromLogTail(0.1),
		"ChiSquareTail(-1, 3)":          ChiSquareTail(-1, 3),
		"ChiSquareTail(1, 0)":           ChiSquareTail(1, 0),
		"ChiSquareQuantile(1.5, 3)":     ChiSquareQuantile(1.5, 3),
		"ChiSquareFromLogTail(1, 3)":    ChiSquareFromLogTail(1, 3),
		"LogFTail(1, 0, 5)":             LogFTail(1, 0, 5),
		"LogFTail(-1, 2, 5)":            LogFTail(-1, 2, 5),
		"LogNormalBetween(2, 1)":        LogNormalBetween(2, 1),
		"LogStudentBetween(2, 1, 3)":    LogStudentBetween(2, 1, 3),
		"LogStudentBetween(1, 2, 0)":    LogStudentBetween(1, 2, 0),
		"LogGammaRatio(-1, 2)":          LogGammaRatio(-1, 2),
		"LogGammaRise(2, -2)":           LogGammaRise(2, -2),
		"Digamma(0)":                    Digamma(0),
		"LogNormalStrip(0, 0)":          LogNormalStrip(0, 0),
		"LogStudentStrip(0, 1e-5, -1)":  LogStudentStrip(0, 1e-5, -1),
		"GammaTail(1, -1)":              GammaTail(1, -1),
		"LogStudentDensity(1, math.NaN": LogStudentDensity(1, math.NaN()),
	} {
		if !math.IsNaN(got) {
			t.Errorf("%s = %g, want NaN", name, got)
		}
	}
}

// TestEnds checks what the ends of the ranges give.
func TestEnds(t *testing.T) {
	inf := math.Inf(1)
	for _, tt := range []struct {
		name      string
		got, want float64
	}{
		{"LogNormalTail(+Inf)", LogNormalTail(inf), -inf},
		{"LogNormalTail(-Inf)", LogNormalTail(-inf), 0},
		{"LogNormalBetween(-Inf, +Inf)", LogNormalBetween(-inf, inf), 0},
		{"LogNormalBetween(1, 1)", LogNormalBetween(1, 1), -inf},
		{"NormalFromLogTail(0)", NormalFromLogTail(0), -inf},
		{"NormalFromLogTail(-Inf)", NormalFromLogTail(-inf), inf},
		{"NormalFromLogTail(-ln 2)", NormalFromLogTail(-math.Ln2), 0},
		{"NormalCritical(1)", NormalCritical(1), 0},
		{"NormalCritical(0)", NormalCritical(0), inf},
		{"LogStudentTail(+Inf, 3)", LogStudentTail(inf, 3), -inf},
		{"LogStudentTail(-Inf, 3)", LogStudentTail(-inf, 3), 0},
		{"LogStudentTail(0, 3)", LogStudentTail(0, 3), -math.Ln2},
		{"LogStudentBetween(-Inf, +Inf, 3)", LogStudentBetween(-inf, inf, 3), 0},
		{"StudentCritical(1, 3)", StudentCritical(1, 3), 0},
		{"StudentCritical(0, 3)", StudentCritical(0, 3), inf},
		{"StudentFromLogTail(0, 3)", StudentFromLogTail(0, 3), -inf},
		{"LogChiSquareTail(0, 3)", LogChiSquareTail(0, 3), 0},
		{"LogChiSquareTail(+Inf, 3)", LogChiSquareTail(inf, 3), -inf},
		{"ChiSquareQuantile(0, 3)", ChiSquareQuantile(0, 3), 0},
		{"ChiSquareQuantile(1, 3)", ChiSquareQuantile(1, 3), inf},
		{"ChiSquareUpperQuantile(0, 3)", ChiSquareUpperQuantile(0, 3), inf},
		{"ChiSquareUpperQuantile(1, 3)", ChiSquareUpperQuantile(1, 3), 0},
		{"LogFTail(0, 2, 3)", LogFTail(0, 2, 3), 0},
		{"LogFTail(+Inf, 2, 3)", LogFTail(inf, 2, 3), -inf},
		{"LogGammaRatio(1e300, 1e300)", LogGammaRatio(1e300, 1e300), 0},
		{"LogGammaRise(5, 0)", LogGammaRise(5, 0), 0},
		{"Digamma(+Inf)", Digamma(inf), inf},
		{"DigammaLessLog(+Inf)", DigammaLessLog(inf), 0},
	} {
		if got := tt.got; got != tt.want {
			t.Errorf("%s = %g, want %g", tt.name, got, tt.want)
		}
	}
}

// TestScalarsAllocateNothing holds the promise that loops rely on.
func TestScalarsAllocateNothing(t *testing.T) {
	sink := 0.0
	for name, f := range map[string]func(){
		"LogNormalTail":     func() { sink += LogNormalTail(7) },
		"NormalFromLogTail": func() { sink += NormalFromLogTail(-900) },
		"LogStudentTail":    func() { sink += LogStudentTail(2, 12) + LogStudentTail(2, 200) },
		"StudentCritical":   func() { sink += StudentCritical(0.05, 12) },
		"LogStudentBetween": func() { sink += LogStudentBetween(1, 2, 5) },
		"ChiSquareQuantile": func() { sink += ChiSquareQuantile(0.025, 12) },
		"LogFTail":          func() { sink += LogFTail(3, 2, 9) },
		"LogNormalBetween":  func() { sink += LogNormalBetween(1, 1.2) },
		"Digamma":           func() { sink += Digamma(3) },
		"Root with a literal": func() {
			c := sink
			x, _ := Root(func(x float64) float64 { return x*x - 2 + 0*c }, 0, 2, 1e-12)
			sink += x
		},
	} {
		if n := testing.AllocsPerRun(20, f); n != 0 {
			t.Errorf("%s allocates %g times", name, n)
		}
	}
}
