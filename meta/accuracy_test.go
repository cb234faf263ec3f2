package meta

import (
	"math"
	"math/rand/v2"
	"testing"

	"steelyard/meta/numeric"
)

// hardCase is a set of studies on which plain sums lose digits, with its results
// computed from the definitions at 50 digits (Python mpmath: roots by bisection,
// maxima from every local maximum on 500 grid points).
type hardCase struct {
	name string
	y, s []float64
	q    float64
	want []hardRow
}

type hardRow struct {
	tau                  TauMethod
	tau2, mean, se, hkSE float64
}

var hardCases = []hardCase{
	{"precisions apart by 1e6", []float64{1.5, 1.75, -2, 4}, []float64{1e-6, 1, 0.5, 1}, 55.312499999873438, []hardRow{
		{DerSimonianLaird, 4.3593750000090703, 1.1995763391722792, 1.1046401831391123, 1.2369182867724081},
		{TwoStepDerSimonianLaird, 5.6018142767273893, 1.2216930175310237, 1.2381133352476785, 1.2379104681391273},
		{HedgesOlkin, 5.57812499999975, 1.2213524052909954, 1.2357064935108966, 1.2378975013539976},
		{HunterSchmidt, 5.1312499999565563e-11, 1.4999999994114844, 7.2327380695795957e-6, 3.1056588965029341e-5},
		{SidikJonkman, 5.4975261441394712, 1.2201742010206548, 1.2274815022972907, 1.2378521006802462},
		{PauleMandel, 5.5998049756628378, 1.221664225694349, 1.2379093748046132, 1.2379093748046132},
		{MaximumLikelihood, 4.0642726283101731, 1.1926515939768763, 1.0704167659010202, 1.2365431546030375},
		{RestrictedML, 5.6104633629117468, 1.2218167451935914, 1.2389908965592275, 1.2379151607805622},
	}},
	{"spread over six decades", []float64{0.1, 0.5, -3, 700, 0.2}, []float64{0.001, 1, 10, 1000, 30}, 0.74597098435106545, []hardRow{
		{DerSimonianLaird, 0, 0.10000036981063719, 0.00099999949444432782, 0.00043184784070651878},
		{SidikJonkman, 8774.8251300402791, 0.99994822972170455, 47.407614409069309, 16.530592363930994},
		{MaximumLikelihood, 0, 0.10000036981063719, 0.00099999949444432782, 0.00043184784070651878},
		{RestrictedML, 0, 0.10000036981063719, 0.00099999949444432782, 0.00043184784070651878},
	}},
	{"offset", []float64{6.67430, 6.67384, 6.674484, 6.67554, 6.67191}, []float64{0.00015, 0.0008, 0.000078, 0.00016, 0.00099}, 49.012252304903983, []hardRow{
		{DerSimonianLaird, 3.5003271672622524e-7, 6.6744569450956976, 0.0003175572500050252, 0.00046161412451591902},
		{TwoStepDerSimonianLaird, 9.4208618957855155e-7, 6.6742862836321289, 0.00048353278566123576, 0.00052576618565648878},
		{HedgesOlkin, 1.4372584e-6, 6.6742205186347795, 0.00058157694521048782, 0.00054562087768817823},
		{HunterSchmidt, 1.7572897338745288e-7, 6.6745578785164695, 0.00023834600459203855, 0.00041031253454153865},
		{SidikJonkman, 1.260404375849246e-6, 6.6742399652559537, 0.00054888740624891822, 0.00053997981588721964},
		{PauleMandel, 1.2034923680282643e-6, 6.6742470379383967, 0.00053788170150108511, 0.00053788170150108511},
		{MaximumLikelihood, 5.7658140536309849e-7, 6.6743708926183341, 0.00039191675781261321, 0.00049659531012035007},
		{RestrictedML, 9.2770082582678767e-7, 6.6742888371975688, 0.00048032828532365258, 0.00052494899906499411},
	}},
	{"two studies", []float64{-0.3, 0.9}, []float64{0.2, 0.35}, 8.8615384615384615, []hardRow{
		// Moments and restricted likelihood agree for k = 2: (y₁−y₂)²/2 − (v₁+v₂)/2 = 0.63875.
		{DerSimonianLaird, 0.63875, 0.265625, 0.59901449012106544, 0.59901449012106544},
		{TwoStepDerSimonianLaird, 0.63875, 0.265625, 0.59901449012106544, 0.59901449012106544},
		{HedgesOlkin, 0.63875, 0.265625, 0.59901449012106544, 0.59901449012106544},
		{HunterSchmidt, 0.20690177514792899, 0.21410776495375033, 0.37566386836405982, 0.59382027917439785},
		{SidikJonkman, 0.58742209631728045, 0.26298634242955416, 0.57711671582068748, 0.59885723603648456},
		{PauleMandel, 0.63875, 0.265625, 0.59901449012106544, 0.59901449012106544},
		{MaximumLikelihood, 0.27389327841862815, 0.23030981718081194, 0.41854036743772336, 0.59593898883914966},
		{RestrictedML, 0.63875, 0.265625, 0.59901449012106544, 0.59901449012106544},
	}},
}

func TestHardCases(t *testing.T) {
	for _, tt := range hardCases {
		for _, want := range tt.want {
			t.Run(tt.name+"/"+want.tau.String(), func(t *testing.T) {
				// The offset's last printed digit, 1e-6, is held to 2e-11 of itself by a float64.
				c := checker{t, 1e-9}
				wald := mustPool(t, with(want.tau, Wald), tt.y, tt.s)
				c.near("Q", wald.Q, tt.q)
				c.near("τ²", wald.Tau2, want.tau2)
				c.near("mean", wald.Estimate, want.mean)
				c.near("se", wald.SE, want.se)
				c.near("Hartung–Knapp se", mustPool(t, with(want.tau, HartungKnapp), tt.y, tt.s).SE, want.hkSE)
			})
		}
	}
}

// TestHenmiCopasHardCases: critical values and p from the joint law integrated at
// 30 digits (Python mpmath), with the conditional moments of Q written as traces.
func TestHenmiCopasHardCases(t *testing.T) {
	two, offset, spread := hardCases[3], hardCases[2], hardCases[1]
	for _, tt := range []struct {
		hardCase
		null, se, critical, p float64
	}{
		{two, 0, 0.65715159959637244, 4.7354614518195, 0.99580687377699},
		{offset, 6.674, 0.000417496997999713, 4.0492835257283, 0.27636496684452},
		{spread, 0, 0.00099999949444432782, 1.7269541900652, math.NaN()},
	} {
		t.Run(tt.name, func(t *testing.T) {
			c := checker{t, 1e-9}
			m := Model{Level: 0.95, Interval: HenmiCopas, Null: tt.null}
			mean := mustPool(t, m, tt.y, tt.s)
			c.near("se", mean.SE, tt.se)
			c.near("critical", (mean.High-mean.Low)/(2*mean.SE), tt.critical)
			if math.IsNaN(tt.p) { // p is below every float64, its logarithm is not
				c.near("ln p", mean.LnP, -5005.3939882540790651)
				return
			}
			c.near("p", math.Exp(mean.LnP), tt.p)
		})
	}
}

// plainLogL is the log-likelihood written straight from its definition.
func plainLogL(y, s []float64, tau2 float64, restricted bool) float64 {
	total, weighted := 0.0, 0.0
	for i := range y {
		w := 1 / (s[i]*s[i] + tau2)
		total += w
		weighted += w * y[i]
	}
	mean, l := weighted/total, 0.0
	for i := range y {
		v := s[i]*s[i] + tau2
		l -= 0.5*math.Log(v) + 0.5*(y[i]-mean)*(y[i]-mean)/v
	}
	if restricted {
		l -= 0.5 * math.Log(total)
	}
	return l
}

// TestMaximumIsGlobal: no τ² on a fine grid has a higher likelihood than the
// estimate, and the grid shows no more maxima than were found.
func TestMaximumIsGlobal(t *testing.T) {
	random := rand.New(rand.NewPCG(8, 9))
	several := 0
	for range 400 {
		var y, s []float64
		for range 2 + random.IntN(9) {
			y = append(y, 3*random.NormFloat64())
			s = append(s, math.Pow(10, 3*random.Float64()-2))
		}
		for tau, restricted := range map[TauMethod]bool{MaximumLikelihood: false, RestrictedML: true} {
			p := prepared(t, with(tau, Wald), y, s)
			if len(p.modes) > 1 {
				several++
			}
			best := p.tau2() * p.data.unit * p.data.unit
			height := plainLogL(y, s, best, restricted)
			highest, seen := gridMaxima(y, s, restricted)
			if highest > height+1e-9 {
				t.Errorf("%v of %v, %v: likelihood %v at τ² = %v, up to %v on the grid", tau, y, s, height, best, highest)
			}
			if len(p.modes) < seen {
				t.Errorf("%v of %v, %v: %d maxima found, %d on the grid", tau, y, s, len(p.modes), seen)
			}
		}
	}
	if several == 0 {
		t.Error("no likelihood with several maxima was drawn")
	}
}

// gridMaxima returns the highest likelihood at 0 and on a grid of τ², and the
// number of maxima inside the grid.
func gridMaxima(y, s []float64, restricted bool) (highest float64, seen int) {
	const rounding = 1e-10
	highest = plainLogL(y, s, 0, restricted)
	rising, before := false, math.Inf(1)
	for tau2 := 1e-8; tau2 < 1000; tau2 *= 1.02 {
		l := plainLogL(y, s, tau2, restricted)
		highest = max(highest, l)
		if rising && l < before-rounding {
			seen++
		}
		rising, before = l > before+rounding || rising && l >= before-rounding, l
	}
	return highest, seen
}

// TestAllMaximaAreFound: six precise studies agree while two less precise ones lie
// far out on both sides, so that τ² is either near 0 or large.
func TestAllMaximaAreFound(t *testing.T) {
	y := []float64{-0.3, 0.2, 0.1, -0.1, 0.3, -0.2, 60, -60}
	s := []float64{0.1, 0.1, 0.1, 0.1, 0.1, 0.1, 8, 8}
	p := prepared(t, with(MaximumLikelihood, Wald), y, s)
	_, seen := gridMaxima(y, s, false)
	if seen != 2 || len(p.modes) != seen {
		t.Errorf("%d maxima found, %d on the grid, want 2", len(p.modes), seen)
	}
}

// TestMaximumBetweenGridPoints moves the two outlying studies to where a second
// maximum has just appeared, so that the slope is above 0 only over a stretch of
// τ² far shorter than a step of the search.
func TestMaximumBetweenGridPoints(t *testing.T) {
	s := []float64{0.1, 0.1, 0.1, 0.1, 0.1, 0.1, 8, 8}
	at := func(far float64) (*Pooler, float64) {
		p := prepared(t, with(MaximumLikelihood, Wald), []float64{-0.3, 0.2, 0.1, -0.1, 0.3, -0.2, far, -far}, s)
		l := likelihood{data: &p.data, kind: fullLikelihood}
		square := p.data.unit * p.data.unit
		_, top, err := numeric.Minimum(func(x float64) float64 { return -l.slope(math.Exp(x)) }, math.Log(1/square), math.Log(1000/square), 1e-8)
		if err != nil {
			t.Fatal(err)
		}
		return p, -top
	}
	for _, height := range []float64{1e-7, 1e-5, 1e-4, 1e-3} {
		far, err := numeric.Root(func(far float64) float64 {
			_, top := at(far)
			return top - height
		}, 10, 100, 1e-13)
		if err != nil {
			t.Fatal(err)
		}
		if p, top := at(far); len(p.modes) != 2 {
			t.Errorf("%d maxima found where the slope rises to %v, want 2", len(p.modes), top)
		}
	}
}

// TestHiddenMaximum: aspirin_lor has maxima at τ² = 0 and 0.00751638 and between
// them a minimum (30-digit values of the likelihood, see extra_test.go). A grid so
// coarse that it sees one sign of the slope on both sides must not lose them.
func TestHiddenMaximum(t *testing.T) {
	d := readStudies(t, "aspirin_lor")
	p := prepared(t, with(MaximumLikelihood, Wald), d.y, d.s)
	l := likelihood{data: &p.data, kind: fullLikelihood}
	square := p.data.unit * p.data.unit
	point := func(tau2 float64) slopeAt { return slopeAt{tau2 / square, l.slope(tau2 / square)} }

	falling, fallingAgain := point(0.0005), point(0.03)
	if falling.slope >= 0 || fallingAgain.slope >= 0 {
		t.Fatalf("slopes %v and %v, want both below 0", falling.slope, fallingAgain.slope)
	}
	from, to, found, err := l.hidden(falling, fallingAgain)
	if err != nil || !found || from.slope <= 0 || to != fallingAgain {
		t.Errorf("from %v to %v, %v, %v; want a rise and the right end", from, to, found, err)
	}
	if _, _, found, err := l.hidden(point(0.01), point(0.03)); found || err != nil {
		t.Errorf("a maximum found where the likelihood only falls; %v", err)
	}
}

func TestWaldFarOut(t *testing.T) {
	// One study 20,000 standard errors from the null. Abramowitz & Stegun 26.2.12:
	// P(Z > z) = φ(z)/z·(1 − 1/z² + …).
	const z = 20000.0
	mean := mustPool(t, at95, []float64{z}, []float64{1})
	want := math.Ln2 - z*z/2 - math.Log(z*math.Sqrt(2*math.Pi)) - 1/(z*z)
	checker{t, 1e-14}.near("ln p", mean.LnP, want)
	checker{t, 1e-14}.near("ln evidence", mean.Evidence.Ln(), (z*z-1-math.Ln2)/2)
	for _, interval := range []IntervalMethod{Wald, HartungKnapp, HartungKnappFloor, ProfileLikelihood, HenmiCopas} {
		m := Model{Level: 0.95, Interval: interval}
		far := mustPool(t, m, []float64{z, z + 1, z - 3, z + 2}, []float64{1, 1, 1, 1})
		if !(far.LnP < -20) || !(far.Evidence.Ln() > 10) {
			t.Errorf("%v: ln p = %v, ln evidence = %v", interval, far.LnP, far.Evidence.Ln())
		}
	}
}

func TestLogGammaLower(t *testing.T) {
	for _, tt := range []struct {
		name, source   string
		x, shape, want float64
		tolerance      float64
	}{
		{"exponential", "closed form 1 − exp(−x)", 1e-3, 1, math.Log(-math.Expm1(-1e-3)), 1e-14},
		{"exponential, upper", "closed form 1 − exp(−x)", 30, 1, math.Log1p(-math.Exp(-30)), 1e-12},
		{"deep", "leading term x^a/Γ(a+1), next is smaller by 1e-12", 1e-12, 50, 50*math.Log(1e-12) - numeric.LogGamma(51), 1e-12},
		{"median", "Choi (1994): median of shape a is a − 1/3 + 8/(405a) + …", 1e7 - 1.0/3 + 8.0/(405e7), 1e7, -math.Ln2, 1e-9},
	} {
		t.Run(tt.name, func(t *testing.T) {
			if got := logGammaLower(tt.x, tt.shape); !near(got, tt.want, tt.tolerance) {
				t.Errorf("logGammaLower(%v, %v) = %.15g, want %.15g (%s)", tt.x, tt.shape, got, tt.want, tt.source)
			}
		})
	}
	// Both forms must meet where one takes over.
	for _, m := range []float64{-5e-3, -1e-3, -1.0001e-4, -0.9999e-4, 0, 0.9999e-4, 1.0001e-4, 2e-3} {
		shape := hugeShape * (1 + 1e-12)
		huge, plain := logGammaLower(shape*(1+m), shape), logGammaLower(hugeShape*(1+m), hugeShape)
		if !within(huge, plain, 1e-8*max(1, -plain)) {
			t.Errorf("at x/shape = 1 + %v: %.12g from the expansion, %.12g from the series", m, huge, plain)
		}
	}
}
