package explain

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"steelyard/meta"
	"steelyard/meta/numeric"
)

// system is a regression in working units: estimates measured from the most
// precise one in a unit near its standard error, columns scaled to a size of 1, and
// the rows by falling precision, which keeps the digits of light rows beside heavy
// ones (Björck, Numerical Methods for Least Squares Problems, section 4.4.2).
type system struct {
	k, p         int
	order        []int     // which study each row is
	base         []float64 // k×p, by rows: the columns as they are
	x            []float64 // k×p, by rows: what is fitted, base or a permutation of it
	y, v         []float64
	scale        []float64 // size of each column as given
	centre, unit float64
	columns      [][]float64 // scratch: p columns and the estimates, weighted
	r            triangle    // of the latest fit
	beta, room   []float64
}

// moments are what one τ² gives, with wᵢ = 1/(vᵢ + τ²) and P = W − WX(XᵀWX)⁻¹XᵀW.
type moments struct {
	tau2    float64
	q       float64 // yᵀPy, the residual Q
	scatter float64 // |Py|²
	trace   float64 // tr P
	spread  float64 // tr PV, V the sampling variances
	weight  float64 // Σw
	logDet  float64 // ln |XᵀWX|
}

// newSystem takes the studies and the columns in; an intercept is the first column
// if wanted. It returns the errors of the package meta for unusable estimates, and
// a *DesignError for columns that depend on one another or are too many.
func newSystem(y, s []float64, columns []Column, intercept bool) (*system, error) {
	var p meta.Pooler // knows what can be pooled
	if _, err := p.Pool(meta.Model{Effects: meta.CommonEffect, Level: 0.95, Null: firstOf(y)}, y, s); err != nil {
		return nil, err
	}
	if intercept {
		ones := make([]float64, len(y))
		for i := range ones {
			ones[i] = 1
		}
		columns = append([]Column{{Name: interceptName, Values: ones}}, columns...)
	}
	m := &system{k: len(y), p: len(columns)}
	if m.k <= m.p {
		return nil, &DesignError{"", fmt.Sprintf("%d studies cannot carry %d coefficients, the intercept counted: at least %d are needed; use fewer covariates or fewer categories", m.k, m.p, m.p+1)}
	}
	for _, c := range columns {
		size := 0.0
		for _, value := range c.Values {
			size = max(size, math.Abs(value))
		}
		if size == 0 {
			return nil, &DesignError{c.Name, "no study has this combination: leave the interaction away"}
		}
		if len(c.Values) != m.k || math.IsInf(size, 0) || math.IsNaN(size) {
			return nil, &DesignError{c.Name, fmt.Sprintf("give a finite value for each of the %d studies", m.k)}
		}
		m.scale = append(m.scale, size)
	}
	m.arrange(y, s, columns)
	return m, m.independent(columns)
}

const interceptName = "intercept"

func firstOf(y []float64) float64 {
	if len(y) == 0 {
		return 0
	}
	return y[0]
}

// arrange fills in the rows by falling precision.
func (m *system) arrange(y, s []float64, columns []Column) {
	m.order = make([]int, m.k)
	for i := range m.order {
		m.order[i] = i
	}
	slices.SortStableFunc(m.order, func(a, b int) int {
		switch {
		case s[a] < s[b]:
			return -1
		case s[a] > s[b]:
			return 1
		}
		return 0
	})
	best := m.order[0]
	_, exponent := math.Frexp(s[best])
	m.centre, m.unit = y[best], math.Ldexp(1, exponent)
	for _, row := range m.order {
		se := s[row] / m.unit
		m.y, m.v = append(m.y, (y[row]-m.centre)/m.unit), append(m.v, se*se)
		for j, c := range columns {
			m.base = append(m.base, c.Values[row]/m.scale[j])
		}
	}
	m.x = slices.Clone(m.base)
	m.addScratch()
}

// addScratch gives the system scratch space of its own.
func (m *system) addScratch() {
	m.columns = make([][]float64, m.p+1)
	for j := range m.columns {
		m.columns[j] = make([]float64, m.k)
	}
	m.r, m.beta, m.room = newTriangle(m.p), make([]float64, m.p), make([]float64, m.p)
}

// clone returns a system of the same studies for another goroutine.
func (m *system) clone() *system {
	c := *m
	c.x = slices.Clone(m.base)
	c.addScratch()
	return &c
}

// permute gives row i the covariates of row perm[i].
func (m *system) permute(perm []int) {
	for i, from := range perm {
		copy(m.x[i*m.p:(i+1)*m.p], m.base[from*m.p:(from+1)*m.p])
	}
}

// dependent is the share of a column's length below which what the columns before
// it leave of it is rounding.
const dependent = 1e-8

// independent returns a *DesignError naming the first column that those before it
// determine.
func (m *system) independent(columns []Column) error {
	size := make([]float64, m.p)
	for j := range m.p {
		for i := range m.k {
			m.columns[j][i] = m.x[i*m.p+j]
			size[j] = math.Hypot(size[j], m.columns[j][i])
		}
	}
	factor(m.columns[:m.p], m.p)
	m.r.take(m.columns)
	for j := range m.p {
		if math.Abs(m.r.at(j, j)) > dependent*size[j] {
			continue
		}
		return m.dependence(columns, size, j)
	}
	return nil
}

// dependence says which columns determine the j-th.
func (m *system) dependence(columns []Column, size []float64, j int) error {
	before := triangle{j, make([]float64, j*j)}
	before.take(m.columns)
	share := make([]float64, j)
	copy(share, m.columns[j][:j])
	before.solve(share)
	var names []string
	for i := range share {
		if columns[i].Name != interceptName && math.Abs(share[i])*size[i] > 1e-6*size[j] {
			names = append(names, fmt.Sprintf("%q", columns[i].Name))
		}
	}
	if len(names) == 0 {
		return &DesignError{columns[j].Name, "the same in all studies: it cannot explain why they differ"}
	}
	return &DesignError{columns[j].Name, fmt.Sprintf("determined by %s: their shares cannot be told apart; leave one of them away", strings.Join(names, ", "))}
}

// fit returns the moments at one τ² and leaves R and the coefficients of working
// units behind. All time is spent here.
func (m *system) fit(tau2 float64) moments {
	y := m.columns[m.p]
	result := moments{tau2: tau2}
	var weight numeric.Sum
	for i, v := range m.v {
		w := 1 / (v + tau2)
		weight.Add(w)
		root := math.Sqrt(w)
		for j := range m.p {
			m.columns[j][i] = root * m.x[i*m.p+j]
		}
		y[i] = root * m.y[i]
	}
	factor(m.columns, m.p)
	m.r.take(m.columns)
	copy(m.beta, y[:m.p])
	m.r.solve(m.beta)
	var q, scatter, trace, spread numeric.Sum
	for _, rest := range y[m.p:] {
		q.Add(rest * rest)
	}
	for i, v := range m.v {
		w := 1 / (v + tau2)
		row := m.x[i*m.p : (i+1)*m.p]
		residual := m.y[i]
		leverage := 0.0
		copy(m.room, row)
		m.r.solveTransposed(m.room)
		for j, x := range row {
			residual -= x * m.beta[j]
			leverage += m.room[j] * m.room[j]
		}
		scatter.Add(w * residual * w * residual)
		own := w * max(0, 1-w*leverage)
		trace.Add(own)
		spread.Add(own * v)
	}
	for j := range m.p {
		result.logDet += 2 * math.Log(math.Abs(m.r.at(j, j)))
	}
	result.q, result.scatter, result.trace = q.Value(), scatter.Value(), trace.Value()
	result.spread, result.weight = spread.Value(), weight.Value()
	return result
}

// df returns k − p.
func (m *system) df() float64 { return float64(m.k - m.p) }

// unweighted returns the residual sum of squares of the plain regression, and the
// mean sampling variance that is left in its residuals, Σv(1 − h)/(k − p).
func (m *system) unweighted() (squares, variance float64) {
	for i := range m.k {
		for j := range m.p {
			m.columns[j][i] = m.x[i*m.p+j]
		}
		m.columns[m.p][i] = m.y[i]
	}
	factor(m.columns, m.p)
	m.r.take(m.columns)
	var sum, left numeric.Sum
	for _, rest := range m.columns[m.p][m.p:] {
		sum.Add(rest * rest)
	}
	for i, v := range m.v {
		copy(m.room, m.x[i*m.p:(i+1)*m.p])
		m.r.solveTransposed(m.room)
		leverage := 0.0
		for _, x := range m.room {
			leverage += x * x
		}
		left.Add(v * max(0, 1-leverage))
	}
	return sum.Value(), left.Value() / m.df()
}
