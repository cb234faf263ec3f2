package dependence

import (
	"math"

	"steelyard/meta"
	"steelyard/meta/numeric"
)

// levels is the model of three levels in working units: estimates measured from
// that of the most precise one, in units of its standard error.
//
//	y = μ + u(study) + w(estimate) + e,  var u = b², var w = a², var e = v
type levels struct {
	y, v   []float64
	groups [][]int
	centre float64
	unit   float64
}

// sums are what the likelihood at one b² and a² needs. The covariance matrix of a
// study is diag(d) + b²·11ᵀ, d = v + a²; its inverse and determinant are those of a
// diagonal changed by one outer product (Sherman and Morrison 1950).
type sums struct {
	lnDet  float64 // of all covariance matrices
	weight float64 // 1ᵀV⁻¹1
	mean   float64
	q      float64 // residuals' quadratic form
}

func newLevels(y, s []float64, groups [][]int) *levels {
	best := 0
	for i := range s {
		if s[i] < s[best] {
			best = i
		}
	}
	l := &levels{groups: groups, centre: y[best], unit: s[best], y: make([]float64, len(y)), v: make([]float64, len(y))}
	for i := range y {
		l.y[i] = (y[i] - l.centre) / l.unit
		l.v[i] = (s[i] / l.unit) * (s[i] / l.unit)
	}
	return l
}

func (l *levels) at(b2, a2 float64) sums {
	var out sums
	var lnDet, weight, weighted, q numeric.Sum
	for _, rows := range l.groups {
		var s, t float64
		for _, i := range rows {
			d := l.v[i] + a2
			lnDet.Add(math.Log(d))
			s += 1 / d
			t += l.y[i] / d
		}
		shrink := 1 + b2*s
		lnDet.Add(math.Log(shrink))
		weight.Add(s / shrink)
		weighted.Add(t / shrink)
	}
	out.lnDet, out.weight = lnDet.Value(), weight.Value()
	out.mean = weighted.Value() / out.weight
	for _, rows := range l.groups {
		var s, r float64
		for _, i := range rows {
			d := l.v[i] + a2
			e := l.y[i] - out.mean
			s += 1 / d
			r += e / d
			q.Add(e * e / d)
		}
		q.Add(-b2 * r * r / (1 + b2*s))
	}
	out.q = q.Value()
	return out
}

// scanned is the number of values of each standard deviation at which the
// restricted likelihood is looked at before its highest hill is climbed.
const scanned = 32

// variances returns b² and a² at the highest restricted likelihood, 0 included.
func (l *levels) variances() (b2, a2 float64, err error) {
	deviance := func(b, a float64) float64 {
		s := l.at(b*b, a*a)
		return s.lnDet + math.Log(s.weight) + s.q
	}
	flat := l.at(0, 0)
	reach := 0.0
	for _, y := range l.y {
		reach += (y - flat.mean) * (y - flat.mean)
	}
	reach = math.Sqrt(2 * reach)
	var failed error
	between := func(a float64) (b, dev float64) {
		b, dev, err := numeric.ScannedMinimum(func(b float64) float64 { return deviance(b, a) }, 0, reach, scanned)
		if err != nil {
			failed = err
		}
		return b, dev
	}
	a, _, err := numeric.ScannedMinimum(func(a float64) float64 { _, dev := between(a); return dev }, 0, reach, scanned)
	b, _ := between(a)
	if err == nil {
		err = failed
	}
	return b * b, a * a, err
}

// threeLevels replaces a fit's mean and weights by those of the model of three
// levels: restricted maximum likelihood, se = 1/√(1ᵀV⁻¹1), Student's t on studies
// − 1 degrees of freedom. Mean.Tau2 is the variance of one estimate's true effect,
// between and within studies together.
//
// Sources: Konstantopoulos (2011), Research Synthesis Methods 2:61-76; Van den
// Noortgate et al. (2013), Behavior Research Methods 45:576-594.
func threeLevels(f *meta.Fit, y, s []float64, groups [][]int) error {
	l := newLevels(y, s, groups)
	b2, a2, err := l.variances()
	if err != nil {
		return err
	}
	at := l.at(b2, a2)
	mean, err := f.Model.StudentMean(len(y), l.centre+l.unit*at.mean, l.unit/math.Sqrt(at.weight), float64(len(groups)-1))
	if err != nil {
		return err
	}
	square := l.unit * l.unit
	f.Clustered.Between, f.Clustered.Within = b2*square, a2*square
	mean.Tau2, mean.Q = (b2+a2)*square, f.Mean.Q
	f.Mean = mean
	f.Model.Tau = meta.RestrictedML
	for _, rows := range groups {
		total := 0.0
		for _, i := range rows {
			total += 1 / (l.v[i] + a2)
		}
		for _, i := range rows {
			f.Weights[i] = 1 / ((l.v[i] + a2) * (1 + b2*total) * at.weight)
		}
	}
	return nil
}
