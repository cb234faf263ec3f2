package sparse

import (
	"math"

	"steelyard/meta/effect"
	"steelyard/meta/numeric"
)

// mantelHaenszel pools tables with cells a, b (treated, n₁ in all) and c, d
// (control, n₂), N people each and m = a + c events:
//
//	odds ratio       ΣR/ΣS, R = ad/N, S = bc/N
//	  variance of the log, with P = (a+d)/N and Q = (b+c)/N
//	                 ΣPR/(2(ΣR)²) + Σ(PS+QR)/(2ΣRΣS) + ΣQS/(2(ΣS)²)
//	risk ratio       ΣR/ΣS, R = a n₂/N, S = c n₁/N
//	  variance of the log
//	                 Σ(m n₁n₂ − acN)/N² / (ΣRΣS)
//	risk difference  Σ(a n₂ − c n₁)/N / Σ(n₁n₂/N)
//	  variance       Σ(ab n₂³ + cd n₁³)/(n₁n₂N²) / (Σ n₁n₂/N)²
//
// Weights are bc/N, c n₁/N and n₁n₂/N. Heterogeneity is Σ(y − estimate)²/v about
// the estimate; tables whose own estimate or variance would need a correction
// are left out of it.
//
// Sources: Mantel & Haenszel (1959), Journal of the National Cancer Institute
// 22:719-748; variance of the odds ratio: Robins, Breslow & Greenland (1986),
// Biometrics 42:311-323; of the others: Greenland & Robins (1985), Biometrics
// 41:55-68.
func (m Model) mantelHaenszel(tables []effect.Table) (*Result, error) {
	var s mantelSums
	weights := make([]float64, len(tables))
	for i, t := range tables {
		x := cellsOf(t)
		switch m.Measure {
		case effect.OddsRatio:
			weights[i] = s.odds(x)
		case effect.RiskRatio:
			weights[i] = s.risks(x)
		default:
			weights[i] = s.difference(x)
		}
	}
	estimate, variance, err := s.estimate(m.Measure)
	if err != nil {
		return nil, err
	}
	r := m.wald(estimate, math.Sqrt(variance))
	r.Weights = weights
	r.Heterogeneity = about(estimate, m.Measure, tables)
	if r.Heterogeneity != nil {
		r.Mean.Q = r.Heterogeneity.Q
	}
	return r, nil
}

// mantelSums are the sums over the tables: of what speaks for the treated arm's
// events, of what speaks for the control arm's, and of the terms of the variance.
type mantelSums struct{ up, down, pr, cross, qs numeric.Sum }

func (s *mantelSums) odds(x cells) (weight float64) {
	up, down := x.a*(x.d/x.n), x.b*(x.c/x.n)
	p, q := (x.a+x.d)/x.n, (x.b+x.c)/x.n
	s.up.Add(up)
	s.down.Add(down)
	s.pr.Add(p * up)
	s.cross.Add(p*down + q*up)
	s.qs.Add(q * down)
	return down
}

// risks uses m n₁n₂ − acN = a n₁d + c n₂b, which loses no digits.
func (s *mantelSums) risks(x cells) (weight float64) {
	up, down := x.a*(x.n2/x.n), x.c*(x.n1/x.n)
	s.up.Add(up)
	s.down.Add(down)
	s.cross.Add(x.a*(x.d/x.n)*(x.n1/x.n) + x.c*(x.b/x.n)*(x.n2/x.n))
	return down
}

func (s *mantelSums) difference(x cells) (weight float64) {
	weight = x.n1 * (x.n2 / x.n)
	s.up.Add((x.a*x.n2 - x.c*x.n1) / x.n)
	s.down.Add(weight)
	share1, share2 := x.n1/x.n, x.n2/x.n
	s.cross.Add(x.a*(x.b/x.n1)*share2*share2 + x.c*(x.d/x.n2)*share1*share1)
	return weight
}

func (s *mantelSums) estimate(m effect.Measure) (estimate, variance float64, err error) {
	up, down := s.up.Value(), s.down.Value()
	if m == effect.RiskDifference {
		estimate, variance = up/down, s.cross.Value()/(down*down)
	} else {
		switch {
		case up == 0:
			return 0, 0, &BoundaryError{Toward: -1}
		case down == 0:
			return 0, 0, &BoundaryError{Toward: 1}
		}
		estimate = math.Log(up / down)
		if math.Abs(up-down) < 0.5*down {
			estimate = math.Log1p((up - down) / down)
		}
		variance = s.cross.Value() / up / down
		if m == effect.OddsRatio {
			variance = 0.5 * (s.pr.Value()/up/up + variance + s.qs.Value()/down/down)
		}
	}
	if !(variance > 0) {
		return 0, 0, ErrNoVariance
	}
	return estimate, variance, nil
}

// about returns the heterogeneity of the tables' own estimates about a common
// one, over the tables that have an estimate without a correction.
func about(estimate float64, m effect.Measure, tables []effect.Table) *Heterogeneity {
	var q numeric.Sum
	k := 0
	for _, t := range tables {
		e, _, err := effect.FromTable(m, t, effect.NoCorrection)
		if err != nil {
			continue // its estimate would need a correction
		}
		z := (e.Y - estimate) / e.SE
		q.Add(z * z)
		k++
	}
	return scattered(AboutEstimate, q.Value(), k)
}
