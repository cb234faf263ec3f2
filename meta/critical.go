package meta

import (
	"math"

	"steelyard/meta/numeric"
)

// keptCriticals is the number of degrees of freedom up to which critical values
// are kept: with more, a fit takes far longer than its critical value.
const keptCriticals = 512

// criticals keeps two-sided critical values of Student's t for one level.
type criticals struct {
	level  float64
	normal float64
	kept   []float64 // by degrees of freedom; 0 where not yet needed
}

// of returns the critical value of a level on df degrees of freedom, a whole
// number or +Inf.
func (c *criticals) of(level, df float64) float64 {
	if level != c.level {
		c.level, c.normal = level, numeric.NormalCritical(1-level)
		clear(c.kept)
	}
	switch {
	case math.IsInf(df, 1):
		return c.normal
	case df > keptCriticals:
		return numeric.StudentCritical(1-level, df)
	}
	i := int(df)
	if i >= len(c.kept) {
		longer := make([]float64, i+1)
		copy(longer, c.kept)
		c.kept = longer
	}
	if c.kept[i] == 0 {
		c.kept[i] = numeric.StudentCritical(1-level, df)
	}
	return c.kept[i]
}
