package dependence

import (
	"errors"
	"math"

	"steelyard/meta"
	"steelyard/meta/numeric"
)

// errEigen reports a decomposition that did not converge.
var errEigen = errors.New("the robust variance cannot be computed: a study's adjustment has no square root")

// robustly replaces a fit's inference by the bias-reduced robust variance. The
// estimate and its weights w = 1/(v + τ²) stay those of the fit, whose model of
// independent estimates is the working model Φ = diag(1/w):
//
//	V = Σⱼ (1ᵀWⱼAⱼeⱼ)²/W²,  Aⱼ = Dⱼ(Dⱼ(Φⱼ − 11ᵀ/W)Dⱼ)^(−½)Dⱼ,  Dⱼ = √Φⱼ
//
// so that V has no bias if the working model holds, whatever the number of studies.
// Student's t has Satterthwaite's degrees of freedom under the working model:
// with aⱼ = AⱼWⱼ1/W and Pᵢⱼ = aᵢᵀ(Φ − 11ᵀ/W)aⱼ, they are (ΣPⱼⱼ)²/ΣPᵢⱼ².
//
// Sources: Bell & McCaffrey (2002), Survey Methodology 28:169-181; Pustejovsky &
// Tipton (2018), Journal of Business & Economic Statistics 36:672-683.
func robustly(f *meta.Fit, y, s []float64, groups [][]int) error {
	phi := make([]float64, len(s))
	unit := math.Inf(1)
	for i := range s {
		phi[i] = s[i]*s[i] + f.Mean.Tau2
		unit = math.Min(unit, phi[i])
	}
	total := 0.0
	for i := range phi {
		phi[i] /= unit
		total += 1 / phi[i]
	}
	var variance, diagonal, squares, crossed, fourth float64
	for _, rows := range groups {
		a, err := adjusted(phi, rows, total)
		if err != nil {
			return err
		}
		var score, sum, own float64
		for i, row := range rows {
			score += a[i] * (y[row] - f.Mean.Estimate)
			sum += a[i]
			own += a[i] * a[i] * phi[row]
		}
		variance += score * score
		p := own - sum*sum/total
		diagonal += p
		squares += p * p
		crossed += sum * sum
		fourth += sum * sum * sum * sum
	}
	if !(variance > 0) {
		return ErrNoScatter
	}
	squares += (crossed*crossed - fourth) / (total * total)
	mean, err := f.Model.StudentMean(len(y), f.Mean.Estimate, math.Sqrt(variance), diagonal*diagonal/squares)
	if err != nil {
		return err
	}
	mean.Tau2, mean.Q = f.Mean.Tau2, f.Mean.Q
	f.Mean = mean
	return nil
}

// adjusted returns aⱼ = AⱼWⱼ1/W of one study's rows. Where the study holds nearly
// all weight a direction of its adjustment has no root; it is left out, as the
// pseudo-inverse does.
func adjusted(phi []float64, rows []int, total float64) ([]float64, error) {
	n := len(rows)
	b := make([][]float64, n)
	for i, r := range rows {
		b[i] = make([]float64, n)
		for j := i; j < n; j++ {
			x := -math.Sqrt(phi[r]*phi[rows[j]]) / total
			if i == j {
				x += phi[r] * phi[r]
			}
			b[i][j] = x
		}
	}
	values, vectors, err := numeric.SymmetricEigen(b)
	if err != nil {
		return nil, errEigen
	}
	largest := values[n-1]
	a := make([]float64, n)
	for c, value := range values {
		if value <= 1e-12*largest {
			continue
		}
		along := 0.0
		for i, r := range rows {
			along += vectors[c][i] / math.Sqrt(phi[r]) // Dⱼ·Wⱼ1
		}
		along /= math.Sqrt(value) * total
		for i, r := range rows {
			a[i] += math.Sqrt(phi[r]) * vectors[c][i] * along
		}
	}
	return a, nil
}
