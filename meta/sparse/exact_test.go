package sparse

import (
	"errors"
	"math"
	"testing"

	"pgregory.net/rapid"

	"steelyard/meta/effect"
)

// Source: exact integer coefficients of the convolved laws and 40-digit
// arithmetic (Python integers, mpmath 1.2.1).
func TestConditionalExactAgainstExactArithmetic(t *testing.T) {
	all := bcg(t)
	five := append(append(append([]effect.Table{}, all[:3]...), all[6]), all[11:]...)
	for _, tt := range []struct {
		name                       string
		tables                     []effect.Table
		theta, se, low, high, z, p float64
	}{
		{"magnesium", magnesium, -0.4407935517282325, 0.1259526311765251, -0.6970297243458091, -0.187360111210923, -3.531586939661412, -7.556748930852739},
		{"thin", thin, -1.09764342327195, 0.4148187467511539, -2.040673174613299, -0.2336695325607257, -2.762933590896183, -4.580656756779833},
		{"six of BCG", five, -0.7406562100600943, 0.1788396394617918, -1.111951169751235, -0.3786138852487033, -4.238935586242307, -10.3180590797842},
		{"BCG", all, -0.4771867715316793, 0.04122901483159102, -0.5589796848751044, -0.3956620752188673, -11.6753983917509, -70.60859613304462},
	} {
		t.Run(tt.name, func(t *testing.T) {
			m := mustFit(t, Model{Method: ConditionalExact}, tt.tables).Mean
			compare(t,
				want{"estimate", m.Estimate, tt.theta, 2e-13}, want{"se", m.SE, tt.se, 1e-13},
				want{"low", m.Low, tt.low, 2e-12}, want{"high", m.High, tt.high, 2e-12},
				want{"z", m.Statistic, tt.z, 1e-11}, want{"ln p", m.LnP, tt.p, 1e-10},
			)
		})
	}
}

// Source: scipy 1.10.1, stats.contingency.odds_ratio(kind="conditional") of one
// table with its exact 95 % limits; its solver leaves about 1e-10, and 1e-7 for
// the largest counts.
func TestConditionalExactAgainstScipy(t *testing.T) {
	for _, tt := range []struct {
		table            [4]float64
		theta, low, high float64
		tol              float64
	}{
		{[4]float64{4, 123, 11, 139}, -0.9353665311758927, -2.4224785517070337, 0.31501250152775734, 1e-9},
		{[4]float64{8, 20, 3, 25}, 1.5494523482506033, -0.09097477406368286, 3.4902475053040574, 1e-9},
		{[4]float64{62, 13598, 248, 12867}, -1.4563952954321322, -1.7525434962020479, -1.173296646552352, 1e-9},
		{[4]float64{505, 88391, 499, 88391}, 0.012020533453244227, -0.11404758789592129, 0.13811254792399313, 1e-9},
		{[4]float64{100000, 200000, 99000, 200000}, 0.020000616711884522, 0.007584481864766956, 0.03241684713493063, 1e-7},
	} {
		m := mustFit(t, Model{Method: ConditionalExact}, tablesOf(tt.table)).Mean
		compare(t, want{"estimate", m.Estimate, tt.theta, tt.tol}, want{"low", m.Low, tt.low, tt.tol}, want{"high", m.High, tt.high, tt.tol})
	}
}

// enumerate walks every combination of the treated arms' events that the margins
// allow and returns the law of the total at a log odds ratio.
func enumerate(tables []effect.Table, theta float64) map[int]float64 {
	choose := func(n, r float64) float64 {
		c := 1.0
		for i := 0.0; i < r; i++ {
			c *= (n - i) / (i + 1)
		}
		return c
	}
	law := map[int]float64{}
	var walk func(i, total int, weight float64)
	walk = func(i, total int, weight float64) {
		if i == len(tables) {
			law[total] += weight * math.Exp(theta*float64(total))
			return
		}
		x := tables[i]
		m := x.Events1 + x.Events2
		for a := 0.0; a <= m; a++ {
			if a <= x.Total1 && m-a <= x.Total2 {
				walk(i+1, total+int(a), weight*choose(x.Total1, a)*choose(x.Total2, m-a))
			}
		}
	}
	walk(0, 0, 1)
	sum := 0.0
	for _, p := range law {
		sum += p
	}
	for s := range law {
		law[s] /= sum
	}
	return law
}

// Source: full enumeration in the test. The estimate must make the observed
// total the mean, each limit make its tail α/2, z and p follow from the law at
// the null.
func TestConditionalExactAgainstEnumeration(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		tables := drawTables(t, 4, 12)
		level := rapid.SampledFrom([]float64{0.5, 0.95, 0.999}).Draw(t, "level")
		null := rapid.Float64Range(-2, 2).Draw(t, "null")
		r, err := Model{Method: ConditionalExact, Level: level, Null: null}.Fit(tables)
		observed := 0
		for _, x := range tables {
			observed += int(x.Events1)
		}
		tails := func(theta float64) (up, down, mean, point float64) {
			for s, p := range enumerate(tables, theta) {
				mean += p * float64(s)
				if s >= observed {
					up += p
				}
				if s <= observed {
					down += p
				}
				if s == observed {
					point = p
				}
			}
			return up, down, mean, point
		}
		alpha := (1 - level) / 2
		upNull, downNull, _, pointNull := tails(null)
		p := min(1, 2*min(upNull, downNull))
		var boundary *BoundaryError
		if errors.As(err, &boundary) {
			up, down, _, _ := tails(boundary.OneSided.Limit)
			tail := down
			if boundary.Toward > 0 {
				tail = up
			}
			z := math.Sqrt(-2 * math.Log(pointNull))
			if !near(tail, alpha, 1e-9*alpha) || !near(math.Exp(boundary.OneSided.LnP), p, 1e-10) || !near(math.Abs(boundary.OneSided.Statistic), z, 1e-7) {
				t.Fatalf("%v: tail %v at the limit, want %v; p %v, want %v; %+v, z %v", tables, tail, alpha, math.Exp(boundary.OneSided.LnP), p, boundary.OneSided, z)
			}
			return
		}
		if errors.Is(err, ErrNothingToCompare) {
			return
		}
		if err != nil {
			t.Fatal(err)
		}
		m := r.Mean
		_, _, mean, pointTop := tails(m.Estimate)
		if !near(mean, float64(observed), 1e-9*(1+mean)) {
			t.Fatalf("%v: mean %v at the estimate, observed %d", tables, mean, observed)
		}
		if up, _, _, _ := tails(m.Low); !near(up, alpha, 1e-9*alpha) && m.Low != m.Estimate {
			t.Fatalf("%v: upper tail %v at the lower limit, want %v", tables, up, alpha)
		}
		if _, down, _, _ := tails(m.High); !near(down, alpha, 1e-9*alpha) && m.High != m.Estimate {
			t.Fatalf("%v: lower tail %v at the upper limit, want %v", tables, down, alpha)
		}
		z2 := 2 * math.Log(pointTop/pointNull)
		if !near(m.Statistic*m.Statistic, z2, 1e-9*(1+z2)) || !near(math.Exp(m.LnP), p, 1e-10) {
			t.Fatalf("%v: z² %v, want %v; p %v, want %v", tables, m.Statistic*m.Statistic, z2, math.Exp(m.LnP), p)
		}
	})
}

// Source: closed forms. One event in a table makes its place a Bernoulli draw
// with P(treated) = ψn₁/(ψn₁+n₂); k tables with one event each and the same
// arms make T binomial, whose Clopper–Pearson limits at x = 0 and x = k are
// 1 − (α/2)^(1/k) and (α/2)^(1/k). With 1 of 2, both limits solve a quadratic:
// p² = α/2 and (1−p)² = α/2 for the other tail.
func TestConditionalExactClosedForms(t *testing.T) {
	const alpha = 0.05
	logit := func(p float64) float64 { return math.Log(p) - math.Log1p(-p) }
	hit, miss := [4]float64{1, 30, 0, 20}, [4]float64{0, 30, 1, 20}
	shift := math.Log(30. / 20)
	for k := 1; k <= 5; k++ {
		var rows [][4]float64
		for range k {
			rows = append(rows, miss)
		}
		var boundary *BoundaryError
		_, err := Model{Method: ConditionalExact, Level: 1 - alpha}.Fit(tablesOf(rows...))
		if !errors.As(err, &boundary) || boundary.Toward != -1 {
			t.Fatalf("%d misses: %v", k, err)
		}
		compare(t, want{"limit at 0", boundary.OneSided.Limit, logit(1-math.Pow(alpha/2, 1/float64(k))) - shift, 1e-10})
	}
	m := mustFit(t, Model{Method: ConditionalExact, Level: 1 - alpha}, tablesOf(hit, miss)).Mean
	low := 1 - math.Sqrt(1-alpha/2) // P(T ≥ 1) = 1 − (1−p)² = α/2
	compare(t,
		want{"estimate of 1 in 2", m.Estimate, -shift, 1e-12},
		want{"low of 1 in 2", m.Low, logit(low) - shift, 1e-10},
		want{"high of 1 in 2", m.High, logit(1-low) - shift, 1e-10},
	)
	// One person an arm, the event in the treated one: P = ψ/(1+ψ).
	var boundary *BoundaryError
	_, err := Model{Method: ConditionalExact, Level: 1 - alpha}.Fit(tablesOf([4]float64{1, 1, 0, 1}))
	if !errors.As(err, &boundary) || boundary.Toward != 1 {
		t.Fatal(err)
	}
	compare(t, want{"1 of 1 against 0 of 1", boundary.OneSided.Limit, logit(alpha / 2), 1e-10})
}

// Where the null is 40 and more standard errors away, p and z stay right in
// logs. Source: with one table of one arm each way and T binomial (every table
// has one event), P(T ≥ t) at the null is a binomial tail summed in logs here.
func TestConditionalExactFarTail(t *testing.T) {
	const k, hits, null = 400, 300, -40.0
	var rows [][4]float64
	for i := range k {
		if i < hits {
			rows = append(rows, [4]float64{1, 10, 0, 10})
		} else {
			rows = append(rows, [4]float64{0, 10, 1, 10})
		}
	}
	m := mustFit(t, Model{Method: ConditionalExact, Null: null}, tablesOf(rows...)).Mean
	lnChoose := func(n, r float64) float64 {
		a, _ := math.Lgamma(n + 1)
		b, _ := math.Lgamma(r + 1)
		c, _ := math.Lgamma(n - r + 1)
		return a - b - c
	}
	lnP, lnQ := null-math.Log1p(math.Exp(null)), -math.Log1p(math.Exp(null))
	first := lnChoose(k, hits) + hits*lnP + (k-hits)*lnQ
	sum := 0.0
	for s := float64(hits); s <= k; s++ {
		sum += math.Exp(lnChoose(k, s) + s*lnP + (k-s)*lnQ - first)
	}
	want2 := 2 * (hits*math.Log(0.75) + (k-hits)*math.Log(0.25) - hits*lnP - (k-hits)*lnQ)
	compare(t,
		want{"ln p", m.LnP, math.Ln2 + first + math.Log(sum), 1e-8},
		want{"z²", m.Statistic * m.Statistic, want2, 1e-8},
		want{"estimate", m.Estimate, math.Log(3), 1e-12},
	)
}

func TestConditionalExactTooLarge(t *testing.T) {
	var size *SizeError
	if _, err := (Model{Method: ConditionalExact, Level: 0.95}).Fit(tablesOf([4]float64{5e14, 1e15, 4e14, 1e15})); !errors.As(err, &size) || !(size.Terms > widestLaw) {
		t.Errorf("arms of 1e15: %v", err)
	}
}
