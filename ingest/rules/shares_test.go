package rules_test

import (
	"fmt"
	"maps"
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"

	"steelyard/meta/review"
)

// aboutAnalysis are rules that state a fact about the pooled result, which clean data
// can have too: they are no false alarms.
var aboutAnalysis = map[string]bool{"A2": true, "A3": true, "A4": true, "A5": true, "C8": true, "C9": true, "I16": true}

// TestFalseAlarms wants at most one warning or error in 100 rows of clean random
// reviews of each kind, and prints how many there are.
func TestFalseAlarms(t *testing.T) {
	const reviews = 120
	for _, kind := range []struct {
		name string
		make func(*rand.Rand) *clean
	}{{"counts", cleanCounts}, {"means", cleanMeans}, {"ratios", cleanRatios}, {"standard errors", bareErrors}} {
		r := rand.New(rand.NewPCG(7, 11))
		rows, alarms := 0, map[string]int{}
		errors, all := 0, 0
		for range reviews {
			c := kind.make(r)
			rows += len(c.rows)
			for _, f := range c.read(t) {
				if f.Severity == review.Note || aboutAnalysis[f.Rule] {
					continue
				}
				alarms[f.Rule]++
				all++
				if f.Severity == review.Error {
					errors++
					t.Logf("error %s in a clean review: %s %s: %s", f.Rule, f.Place.Cell(), f.Study, f.Message)
				}
			}
		}
		share := 100 * float64(all) / float64(rows)
		t.Logf("%s: %d rows, %d false alarms (%d errors), %.2f in 100 rows: %v", kind.name, rows, all, errors, share, alarms)
		if share > 1 {
			t.Errorf("%s: %.2f false alarms in 100 rows, at most 1 is allowed", kind.name, share)
		}
	}
}

// plant is an error of a kind and how to make it; it returns the row of the error, −1
// for one of the whole outcome, or false if this review offers no place for it.
type plant struct {
	rule string
	from func(*rand.Rand) *clean
	make func(r *rand.Rand, c *clean) (row int, ok bool)
}

// TestPlanted plants one error of each kind in clean random reviews and wants at least
// 95 of 100 errors found by their rule, at their row; it prints the shares for all.
func TestPlanted(t *testing.T) {
	const reviews = 40
	catalogue := severities()
	var lines []string
	for _, p := range plants {
		r := rand.New(rand.NewPCG(3, uint64(len(p.rule))+uint64(p.rule[0])*100+uint64(p.rule[len(p.rule)-1])))
		tried, hit := 0, 0
		for tried < reviews {
			c := p.from(r)
			row, ok := p.make(r, c)
			if !ok {
				continue
			}
			tried++
			if hits(c.read(t), p.rule, row) {
				hit++
			} else if testing.Verbose() && hit+3 > tried {
				t.Logf("%s missed, row %d:\n%s", p.rule, row+2, firstLines(c, row))
			}
		}
		share := 100 * float64(hit) / float64(tried)
		lines = append(lines, fmt.Sprintf("%s %.0f%%", p.rule, share))
		if strings.HasPrefix(catalogue[p.rule], "error") && share < 95 {
			t.Errorf("%s: %.0f%% found, at least 95%% are wanted of errors", p.rule, share)
		}
		if share < 60 {
			t.Errorf("%s: only %.0f%% found", p.rule, share)
		}
	}
	t.Log(strings.Join(lines, ", "))
}

func firstLines(c *clean, row int) string {
	if row < 0 {
		row = 0
	}
	return strings.Join(c.header, ",") + "\n" + strings.Join(c.rows[row], ",")
}

// hits reports whether a rule fires at a row, or anywhere for −1.
func hits(findings []review.Finding, rule string, row int) bool {
	return slices.ContainsFunc(findings, func(f review.Finding) bool {
		return f.Rule == rule && f.Severity != review.Note && (row < 0 || f.Place.Row == row+2)
	})
}

// any row of a review.
func anyRow(r *rand.Rand, c *clean) int { return r.IntN(len(c.rows)) }

// set returns a plant that changes cells of a random row.
func set(f func(r *rand.Rand, c *clean, row int) bool) func(*rand.Rand, *clean) (int, bool) {
	return func(r *rand.Rand, c *clean) (int, bool) {
		row := anyRow(r, c)
		return row, f(r, c, row)
	}
}

func plain(f func(c *clean, row int)) func(*rand.Rand, *clean) (int, bool) {
	return set(func(_ *rand.Rand, c *clean, row int) bool { f(c, row); return true })
}

// bare drops the reported results, so that a rule about other studies has the word.
func bareMeans(r *rand.Rand) *clean {
	c := cleanMeans(r)
	c.drop("mean difference", "ci low", "ci high", "scale low", "scale high", "items")
	return c
}

var plants = []plant{
	{"F1", cleanCounts, plain(func(c *clean, row int) { c.set(row, "events treated", "3-Dec") })},
	{"F2", cleanCounts, set(func(r *rand.Rand, c *clean, row int) bool {
		c.set(row, "events control", 40000+r.IntN(3000))
		return true
	})},
	{"F4", cleanMeans, plain(func(c *clean, row int) {
		c.set(row, "sd treated", strings.Replace(rounded(c.get(row, "sd treated"), 1), ".", ",", 1))
	})},
	{"F6", cleanCounts, plain(func(c *clean, row int) { c.set(row, "events treated", "<5") })},
	{"F7", cleanMeans, plain(func(c *clean, row int) {
		c.set(row, "mean control", 999)
		c.set((row+1)%len(c.rows), "mean control", 999)
	})},
	{"F8", cleanCounts, plain(func(c *clean, row int) { c.set(row, "events treated", 0); c.set(row, "source", "") })},
	{"F10", cleanCounts, func(_ *rand.Rand, c *clean) (int, bool) {
		row := c.duplicate(0)
		c.set(row, "study", "Overall")
		return row, true
	}},
	{"D1", cleanCounts, func(r *rand.Rand, c *clean) (int, bool) {
		row := c.duplicate(anyRow(r, c))
		name := c.rows[row][0]
		c.rows[row][0] = name[:1] + "h" + name[1:]
		return row, len(strings.Fields(name)[0]) > 4
	}},
	{"D2", cleanCounts, func(r *rand.Rand, c *clean) (int, bool) {
		row := c.duplicate(anyRow(r, c))
		c.set(row, "study", "Quixano 1999")
		return row, c.get(row, "total treated")+c.get(row, "total control") >= 20
	}},
	{"D3", cleanCounts, func(r *rand.Rand, c *clean) (int, bool) {
		from := anyRow(r, c)
		row := c.duplicate(from)
		for _, arm := range []string{"treated", "control"} {
			c.set(row, "total "+arm, math.Round(c.get(row, "total "+arm)*1.1))
			c.set(row, "randomised "+arm, math.Round(c.get(row, "randomised "+arm)*1.1)+1)
			c.set(row, "events "+arm, c.get(row, "events "+arm)+1)
		}
		year := c.get(from, "year") + 2
		c.set(row, "year", year)
		c.set(row, "study", fmt.Sprintf("%s %.0f", strings.Fields(c.rows[from][0])[0], year))
		return row, true
	}},
	{"D4", cleanCounts, func(r *rand.Rand, c *clean) (int, bool) {
		row := c.duplicate(anyRow(r, c))
		c.set(row, "events treated", math.Max(0, c.get(row, "events treated")-1))
		c.set(row, "total treated", c.get(row, "total treated")+3)
		c.set(row, "randomised treated", c.get(row, "randomised treated")+3)
		return row, true
	}},
	{"D5", cleanMeans, func(r *rand.Rand, c *clean) (int, bool) {
		c.add("time point", func(int) string { return "12 weeks" })
		row := c.duplicate(anyRow(r, c))
		c.set(row, "time point", "24 weeks")
		c.set(row, "mean control", c.get(row, "mean control")+1)
		return row, true
	}},
	{"D6", cleanCounts, func(r *rand.Rand, c *clean) (int, bool) {
		whole := anyRow(r, c)
		c.add("subgroup", func(int) string { return "" })
		n1, n2, e1, e2 := c.get(whole, "total treated"), c.get(whole, "total control"), c.get(whole, "events treated"), c.get(whole, "events control")
		for i := range 2 {
			part := c.duplicate(whole)
			half := func(x float64) float64 { return math.Floor((x + float64(i)) / 2) }
			c.set(part, "total treated", half(n1))
			c.set(part, "total control", half(n2))
			c.set(part, "events treated", half(e1))
			c.set(part, "events control", half(e2))
			c.set(part, "subgroup", []string{"men", "women"}[i])
		}
		return whole, true
	}},
	{"D7", cleanCounts, func(r *rand.Rand, c *clean) (int, bool) {
		row := anyRow(r, c)
		c.add("design", func(i int) string {
			if i == row {
				return "cluster"
			}
			return "parallel"
		})
		return row, c.get(row, "events treated")+c.get(row, "events control") > 0
	}},
	{"D9", cleanCounts, func(r *rand.Rand, c *clean) (int, bool) {
		row := anyRow(r, c)
		c.add("unit", func(i int) string { return []string{"people", "knees"}[btoi(i == row)] })
		return row, true
	}},
	{"C1", cleanCounts, plain(func(c *clean, row int) { c.set(row, "events treated", c.get(row, "total treated")+2) })},
	{"C2", cleanCounts, plain(func(c *clean, row int) { c.set(row, "events treated", c.get(row, "events treated")+0.5) })},
	{"C3", cleanCounts, func(_ *rand.Rand, c *clean) (int, bool) {
		for i := range c.rows {
			for _, arm := range []string{"treated", "control"} {
				c.set(i, "events "+arm, rounded(100*c.get(i, "events "+arm)/c.get(i, "total "+arm), 1))
			}
		}
		return -1, true
	}},
	{"C4", cleanCounts, set(func(_ *rand.Rand, c *clean, row int) bool {
		e := c.get(row, "reported estimate")
		if !(e > 0) || math.Abs(math.Log(e)) < 0.2 {
			return false
		}
		for _, pair := range [][2]string{{"events treated", "events control"}, {"total treated", "total control"}, {"randomised treated", "randomised control"}} {
			a, b := c.get(row, pair[0]), c.get(row, pair[1])
			c.set(row, pair[0], b)
			c.set(row, pair[1], a)
		}
		return true
	})},
	{"C5", cleanCounts, plain(func(c *clean, row int) { c.set(row, "randomised control", c.get(row, "total control")-2) })},
	{"C6", cleanCounts, func(r *rand.Rand, c *clean) (int, bool) {
		c.add("total", func(i int) string { return fmt.Sprint(c.get(i, "total treated") + c.get(i, "total control")) })
		row := anyRow(r, c)
		c.set(row, "total", c.get(row, "total")+10)
		return row, true
	}},
	{"C7", cleanCounts, plain(func(c *clean, row int) {
		c.set(row, "total control", c.get(row, "year"))
		c.set(row, "randomised control", c.get(row, "year"))
		c.set(row, "reported estimate", "")
	})},
	{"C10", cleanCounts, set(func(_ *rand.Rand, c *clean, row int) bool {
		e := c.get(row, "reported estimate")
		c.set(row, "reported estimate", rounded(e*1.25, 2))
		return e > 0.1
	})},
	{"C11", cleanCounts, set(func(_ *rand.Rand, c *clean, row int) bool {
		for _, i := range []int{row, (row + 1) % len(c.rows)} {
			c.set(i, "events treated", 0)
			c.set(i, "events control", 0)
			c.set(i, "source", "")
		}
		return true
	})},
	{"M1", cleanMeans, plain(asStandardError)},
	{"M2", bareMeans, plain(asStandardError)},
	{"M5", cleanMeans, plain(func(c *clean, row int) { c.set(row, "sd treated", 24.0) })},
	{"M6", cleanMeans, plain(func(c *clean, row int) { c.set(row, "sd treated", 0) })},
	{"M9", steadyMeans, plain(func(c *clean, row int) {
		c.set(row, "sd treated", rounded(1.35*c.get(row, "sd treated"), 1))
		c.set(row, "sd control", rounded(1.35*c.get(row, "sd control"), 1))
	})},
	{"M10", cleanRatios, plain(func(c *clean, row int) { c.set(row, "se", rounded(1.96*c.get(row, "se"), 3)) })},
	{"M12", bareMeans, plain(func(c *clean, row int) {
		for _, column := range []string{"mean treated", "sd treated", "mean control", "sd control"} {
			c.set(row, column, rounded(c.get(row, column)*10, 1))
		}
	})},
	{"M13", cleanMeans, plain(func(c *clean, row int) { c.set(row, "better", "higher") })},
	{"I1", cleanRatios, plain(func(c *clean, row int) {
		low, high := c.get(row, "ci low"), c.get(row, "ci high")
		c.set(row, "ci low", high)
		c.set(row, "ci high", low)
	})},
	{"I2", cleanRatios, set(func(r *rand.Rand, c *clean, row int) bool {
		e, s := c.get(row, "odds ratio"), c.get(row, "se")
		by := (0.9 + 0.8*r.Float64()) * s
		c.set(row, "odds ratio", rounded(e*math.Exp(by), 2))
		return s > 0.05 && e*math.Exp(by) < c.get(row, "ci high")
	})},
	{"I3", logRatios, set(func(_ *rand.Rand, c *clean, row int) bool {
		if s := (c.get(row, "ci high") - c.get(row, "ci low")) / 3.92; s < 0.15 || s > 0.6 {
			return false // narrower, it cannot be told; wider, the rounding hides it
		}
		for _, column := range []string{"log odds ratio", "ci low", "ci high"} {
			c.set(row, column, rounded(math.Exp(c.get(row, column)), 2))
		}
		return true
	})},
	{"I4", cleanRatios, plain(func(c *clean, row int) { c.set(row, "odds ratio", -0.22) })},
	{"I5", cleanRatios, set(func(_ *rand.Rand, c *clean, row int) bool {
		e, s := c.get(row, "odds ratio"), c.get(row, "se")
		c.set(row, "se", rounded(e*s, 3))
		return math.Abs(e-1) > 0.15 && c.get(row, "ci low") > 0.15
	})},
	{"I6", cleanRatios, set(func(_ *rand.Rand, c *clean, row int) bool {
		e, s := c.get(row, "odds ratio"), c.get(row, "se")
		c.set(row, "ci low", rounded(e*math.Exp(-1.645*s), 2))
		c.set(row, "ci high", rounded(e*math.Exp(1.645*s), 2))
		return e*math.Exp(-1.645*s) > 0.2
	})},
	{"I7", cleanRatios, set(func(_ *rand.Rand, c *clean, row int) bool {
		p := c.get(row, "p")
		c.set(row, "p", 0.021)
		return p > 0.07
	})},
	{"I9", cleanRatios, set(func(_ *rand.Rand, c *clean, row int) bool {
		p := c.get(row, "p")
		c.set(row, "p", rounded(p/2, 3))
		return p > 0.1 && p < 0.9
	})},
	{"I10", cleanRatios, plain(func(c *clean, row int) {
		s := c.get(row, "se")
		n := math.Floor(12 / (s * s)) // 4/√N is then 15 per cent above s
		c.set(row, "total treated", math.Floor(n/2))
		c.set(row, "total control", math.Floor(n/2))
	})},
	{"I11", cleanRatios, plain(func(c *clean, row int) {
		c.set(row, "total treated", 9*c.get(row, "total treated"))
		c.set(row, "total control", 9*c.get(row, "total control"))
	})},
	{"I14", steadyRatios, plain(func(c *clean, row int) {
		for _, pair := range [][2]string{{"odds ratio", "odds ratio"}, {"ci low", "ci high"}} {
			a, b := c.get(row, pair[0]), c.get(row, pair[1])
			c.set(row, pair[0], rounded(1/b, 3))
			c.set(row, pair[1], rounded(1/a, 3))
		}
	})},
	{"I19", cleanRatios, func(r *rand.Rand, c *clean) (int, bool) {
		c.drop("ci low", "ci high", "p")
		row := anyRow(r, c)
		c.set(row, "se", rounded(10*c.get(row, "se"), 2))
		return row, true
	}},
	{"I20", cleanCounts, set(func(_ *rand.Rand, c *clean, row int) bool {
		e1, n1, e2, n2 := c.get(row, "events treated"), c.get(row, "total treated"), c.get(row, "events control"), c.get(row, "total control")
		rr, or := e1/n1/(e2/n2), c.get(row, "reported estimate")
		c.set(row, "reported estimate", rounded(rr, 2))
		return or > 0 && math.Abs(math.Log(rr/or)) > 0.05 && rr < 0.97
	})},
}

func btoi(b bool) int {
	if b {
		return 1
	}
	return 0
}

// asStandardError turns the SDs of a row into standard errors.
func asStandardError(c *clean, row int) {
	for _, arm := range []string{"treated", "control"} {
		c.set(row, "sd "+arm, rounded(c.get(row, "sd "+arm)/math.Sqrt(c.get(row, "total "+arm)), 2))
	}
}

// logRatios gives the ratios of a review as logarithms.
func logRatios(r *rand.Rand) *clean {
	c := cleanRatios(r)
	c.header[c.at("odds ratio")] = "log odds ratio"
	for i := range c.rows {
		for _, column := range []string{"log odds ratio", "ci low", "ci high"} {
			c.set(i, column, rounded(math.Log(c.get(i, column)), 3))
		}
	}
	c.drop("se", "p")
	return c
}

// steadyMeans is a review of means whose SDs nearly agree.
func steadyMeans(r *rand.Rand) *clean {
	c := bareMeans(r)
	for i := range c.rows {
		c.set(i, "sd treated", rounded(6.3*math.Exp(0.04*r.NormFloat64()), 1))
		c.set(i, "sd control", rounded(6.3*math.Exp(0.04*r.NormFloat64()), 1))
	}
	for len(c.rows) < 8 {
		row := c.duplicate(0)
		name, year := study(r)
		c.set(row, "study", name)
		c.set(row, "year", year)
		c.set(row, "mean treated", c.get(row, "mean treated")+float64(row)/10)
	}
	return c
}

// steadyRatios is a review of large trials that agree.
func steadyRatios(r *rand.Rand) *clean {
	c := cleanRatios(r)
	c.drop("se", "p", "total treated", "total control", "adjusted")
	for i := range c.rows {
		s := 0.08 + 0.05*r.Float64()
		y := -0.5 + s*r.NormFloat64()
		c.set(i, "odds ratio", rounded(math.Exp(y), 2))
		c.set(i, "ci low", rounded(math.Exp(y-1.96*s), 2))
		c.set(i, "ci high", rounded(math.Exp(y+1.96*s), 2))
	}
	return c
}

// severities returns the severities of the catalogue by rule.
func severities() map[string]string {
	all := map[string]string{}
	for _, r := range catalogue() {
		all[r.ID] = r.Severity
	}
	return all
}

// TestEveryErrorPlanted wants every rule of severity error to be planted.
func TestEveryErrorPlanted(t *testing.T) {
	planted := map[string]bool{}
	for _, p := range slices.Concat(plants, errorForms) {
		planted[p.rule] = true
	}
	all := severities()
	for _, rule := range slices.Sorted(maps.Keys(all)) {
		if strings.HasPrefix(all[rule], "error") && !planted[rule] {
			t.Errorf("no error of rule %s is planted", rule)
		}
	}
}
