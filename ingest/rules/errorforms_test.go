package rules_test

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"

	"steelyard/meta/review"
)

// errorForms plant the errors of rules that are mostly warnings, and those that need
// columns which the clean reviews have not.
var errorForms = []plant{
	{"F3", cleanCounts, func(_ *rand.Rand, c *clean) (int, bool) {
		for i := range c.rows { // every total with a comma before three digits
			c.set(i, "total control", fmt.Sprintf("1,%03.0f", c.get(i, "total control")))
		}
		return 0, true
	}},
	{"F9", cleanCounts, plain(func(c *clean, row int) {
		for column := 2; column < len(c.rows[row]); column++ {
			c.rows[row][column] = ""
		}
	})},
	{"F11", cleanCounts, plain(func(c *clean, row int) { c.set(row, "events control", "1e+301") })},
	{"D8", bareMeans, func(r *rand.Rand, c *clean) (int, bool) {
		row := anyRow(r, c)
		c.add("design", func(i int) string { return []string{"parallel", "crossover"}[btoi(i == row)] })
		return row, true
	}},
	{"M4", bareMeans, plain(func(c *clean, row int) {
		c.set(row, "mean treated", rounded(c.get(row, "mean control")-6.5*c.get(row, "sd control"), 1))
	})},
	{"M11", bareMeans, func(r *rand.Rand, c *clean) (int, bool) {
		row := anyRow(r, c)
		c.add("design", func(int) string { return "crossover" })
		c.add("sd of the difference", func(i int) string {
			a, b := c.get(i, "sd treated"), c.get(i, "sd control")
			if i == row {
				return rounded(1.1*(a+b), 1) // beyond a correlation of −1
			}
			return rounded(0.8*(a+b)/2, 1)
		})
		return row, true
	}},
	{"I6", cleanRatios, func(r *rand.Rand, c *clean) (int, bool) {
		row := anyRow(r, c)
		c.add("ci level", func(i int) string { return []string{"95", "150"}[btoi(i == row)] })
		return row, true
	}},
	{"I8", cleanRatios, plain(func(c *clean, row int) { c.set(row, "p", 1.4) })},
	{"I9", cleanRatios, func(r *rand.Rand, c *clean) (int, bool) {
		row := anyRow(r, c)
		c.add("p sides", func(i int) string { return []string{"2", "3"}[btoi(i == row)] })
		return row, c.get(row, "p") > 0
	}},
	{"I12", logRank, plain(func(c *clean, row int) {
		c.set(row, "observed minus expected", -c.get(row, "observed minus expected"))
	})},
}

// logRank is a review of hazard ratios with the sums of their log-rank tests.
func logRank(r *rand.Rand) *clean {
	c := &clean{header: []string{"study", "year", "hazard ratio", "observed minus expected", "variance"}}
	for range studies(r) {
		name, year := study(r)
		variance := 8 + 60*r.Float64()
		ln := -0.5 - 0.5*r.Float64()
		c.rows = append(c.rows, []string{name, fmt.Sprint(year), rounded(math.Exp(ln), 2), rounded(ln*variance, 1), rounded(variance, 1)})
	}
	return c
}

// quieter plant what is mostly a warning or a note.
var quieter = []plant{
	{"F5", bareMeans, plain(func(c *clean, row int) {
		c.set(row, "mean treated", strings.Replace(c.rows[row][c.at("mean treated")], ".", "·", 1))
	})},
	{"F12", cleanCounts, plain(func(c *clean, row int) { c.set(row, "year", 215) })},
	{"M3", bareErrors, plain(func(c *clean, row int) {
		for _, arm := range []string{"treated", "control"} {
			c.set(row, "se "+arm, rounded(c.get(row, "se "+arm)*math.Sqrt(c.get(row, "total "+arm)), 2))
		}
	})},
	{"M7", cleanMeans, set(func(r *rand.Rand, c *clean, row int) bool {
		n := 11 + r.IntN(8) // fewer people than a hundred, and no multiple of ten
		c.set(row, "total treated", float64(n))
		c.set(row, "mean treated", rounded((math.Floor(float64(n)*14.3)+0.5)/float64(n), 2))
		return true
	})},
	{"M8", cleanMeans, plain(func(c *clean, row int) {
		c.set(row, "mean treated", 6.0)
		c.set(row, "sd treated", 6.6)
	})},
	{"M14", cleanMeans, plain(func(c *clean, row int) {
		gap := 3.2 * c.get(row, "baseline sd treated") * math.Sqrt(1/c.get(row, "total treated")+1/c.get(row, "total control"))
		c.set(row, "baseline mean treated", rounded(c.get(row, "baseline mean control")+gap, 2))
	})},
	{"M15", bareMeans, noted("note", "the report gives the median")},
	{"M16", bareMeans, noted("how obtained", "SD imputed from the other trials")},
	{"I13", logRank, noted("source", "survival curve, figure 2")},
	{"I15", steadyRatios, plain(func(c *clean, row int) {
		for _, column := range []string{"odds ratio", "ci low", "ci high"} {
			c.set(row, column, rounded(c.get(row, column)*0.3, 3))
		}
	})},
	{"I17", cleanRatios, func(r *rand.Rand, c *clean) (int, bool) {
		c.drop("se", "p", "total treated", "total control")
		row := anyRow(r, c)
		for _, column := range []string{"odds ratio", "ci low", "ci high"} {
			c.set(row, column, rounded(c.get(row, column), 1))
		}
		return row, c.get(row, "ci low") > 0 && c.get(row, "ci low") < 0.35
	}},
	{"I18", cleanRatios, plain(func(c *clean, row int) { c.set(row, "adjusted", "yes") })},
}

// bareErrors is a review of means with standard errors instead of SDs.
func bareErrors(r *rand.Rand) *clean {
	c := bareMeans(r)
	for i := range c.rows {
		asStandardError(c, i)
	}
	for _, arm := range []string{"treated", "control"} {
		c.header[c.at("sd "+arm)] = "se " + arm
	}
	c.drop("baseline mean treated", "baseline sd treated", "baseline mean control", "baseline sd control")
	return c
}

// noted writes a remark into a column that is blank elsewhere.
func noted(column, remark string) func(*rand.Rand, *clean) (int, bool) {
	return func(r *rand.Rand, c *clean) (int, bool) {
		row := anyRow(r, c)
		c.add(column, func(i int) string { return []string{"", remark}[btoi(i == row)] })
		return row, true
	}
}

// TestErrorFormsPlanted wants at least 95 of 100 of each found as errors of their rule,
// at their row.
func TestErrorFormsPlanted(t *testing.T) {
	plantAll(t, errorForms, 95, func(p plant, row int, f review.Finding) bool {
		return f.Rule == p.rule && f.Severity == review.Error && f.Place.Row == row+2
	})
}

// TestQuieterPlanted wants most warnings and notes found by their rule, at their row or
// in a remark on the whole outcome.
func TestQuieterPlanted(t *testing.T) {
	plantAll(t, quieter, 90, func(p plant, row int, f review.Finding) bool {
		return f.Rule == p.rule && (f.Place.Row == row+2 || f.Place.Row == 0)
	})
}

// plantAll plants every error 40 times and prints the share that is found.
func plantAll(t *testing.T, plants []plant, least float64, found func(p plant, row int, f review.Finding) bool) {
	const reviews = 40
	var lines []string
	for i, p := range plants {
		r := rand.New(rand.NewPCG(5, uint64(i)))
		tried, hit := 0, 0
		for tried < reviews {
			c := p.from(r)
			row, ok := p.make(r, c)
			if !ok {
				continue
			}
			tried++
			if slices.ContainsFunc(c.read(t), func(f review.Finding) bool { return found(p, row, f) }) {
				hit++
			} else if testing.Verbose() && hit+3 > tried {
				t.Logf("%s missed, row %d:\n%s", p.rule, row+2, firstLines(c, row))
			}
		}
		share := 100 * float64(hit) / float64(tried)
		lines = append(lines, fmt.Sprintf("%s %.0f%%", p.rule, share))
		if share < least {
			t.Errorf("%s: %.0f%% found, at least %.0f%% are wanted", p.rule, share, least)
		}
	}
	t.Log(strings.Join(lines, ", "))
}
