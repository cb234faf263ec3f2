package rules_test

import (
	"bytes"
	"context"
	"encoding/csv"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"strconv"
	"testing"

	"steelyard/ingest"
	"steelyard/ingest/rules"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// clean is a random review without errors: its numbers are those of simulated
// studies, rounded as reports round them.
type clean struct {
	header []string
	rows   [][]string
}

// at returns the index of a column.
func (c *clean) at(column string) int {
	i := slices.Index(c.header, column)
	if i < 0 {
		panic("no column " + column)
	}
	return i
}

func (c *clean) get(row int, column string) float64 {
	x, _ := strconv.ParseFloat(c.rows[row][c.at(column)], 64)
	return x
}

func (c *clean) set(row int, column string, value any) {
	text := fmt.Sprint(value)
	if x, ok := value.(float64); ok {
		text = strconv.FormatFloat(x, 'f', -1, 64)
	}
	c.rows[row][c.at(column)] = text
}

// add gives the review a column with a value in every row.
func (c *clean) add(column string, value func(row int) string) {
	c.header = append(c.header, column)
	for i := range c.rows {
		c.rows[i] = append(c.rows[i], value(i))
	}
}

// drop takes columns out.
func (c *clean) drop(columns ...string) {
	for _, column := range columns {
		i := c.at(column)
		c.header = slices.Delete(c.header, i, i+1)
		for j := range c.rows {
			c.rows[j] = slices.Delete(c.rows[j], i, i+1)
		}
	}
}

// duplicate adds a copy of a row at the end and returns its index.
func (c *clean) duplicate(row int) int {
	c.rows = append(c.rows, slices.Clone(c.rows[row]))
	return len(c.rows) - 1
}

// read returns what the reader, the catalogue and the analysis find in the review.
func (c *clean) read(t testing.TB) []review.Finding {
	t.Helper()
	x, plan, err := ingest.Read(context.Background(), c.csv(), "trials.csv", ingest.Options{})
	if err != nil {
		t.Fatalf("%v\n%s", err, c.csv())
	}
	rules.Apply(x, plan)
	s, err := synthesis.Run(context.Background(), x, plan, synthesis.Want{})
	if err != nil {
		t.Fatal(err)
	}
	return s.Findings
}

func (c *clean) csv() []byte {
	var b bytes.Buffer
	w := csv.NewWriter(&b)
	_ = w.Write(c.header) // a buffer takes everything
	_ = w.WriteAll(c.rows)
	return b.Bytes()
}

// syllables make up invented surnames.
var syllables = []string{"ba", "den", "fo", "gri", "hal", "jo", "ker", "lu", "mar", "nes", "or", "pet", "ros", "sten", "tol", "ul", "vik", "wes", "yar", "zin"}

// study returns an invented name and its year.
func study(r *rand.Rand) (string, int) {
	name := ""
	for range 2 + r.IntN(2) {
		name += syllables[r.IntN(len(syllables))]
	}
	year := 1985 + r.IntN(39)
	return fmt.Sprintf("%c%s %d", name[0]-'a'+'A', name[1:], year), year
}

func rounded(x float64, decimals int) string { return strconv.FormatFloat(x, 'f', decimals, 64) }

// people returns the sizes of two arms: 20 to about 600, nearly equal.
func people(r *rand.Rand) (int, int) {
	n := int(math.Exp(math.Log(25) + 2.8*r.Float64()))
	return n + r.IntN(3+n/20), n + r.IntN(3+n/20)
}

func binomial(r *rand.Rand, n int, p float64) int {
	k := 0
	for range n {
		if r.Float64() < p {
			k++
		}
	}
	return k
}

func studies(r *rand.Rand) int { return 6 + r.IntN(20) }

// cleanCounts is a review of events, with the odds ratio and limits that the reports
// give, and the people randomised.
func cleanCounts(r *rand.Rand) *clean {
	c := &clean{header: []string{"study", "year", "events treated", "total treated", "events control", "total control",
		"randomised treated", "randomised control", "reported estimate", "reported ci low", "reported ci high", "measure", "source"}}
	base := -1.8 + 1.6*r.Float64()
	for range studies(r) {
		name, year := study(r)
		n1, n2 := people(r)
		logit := base + 0.35*r.NormFloat64()
		e1, e2 := binomial(r, n1, inverseLogit(logit-0.35+0.15*r.NormFloat64())), binomial(r, n2, inverseLogit(logit))
		row := []string{name, fmt.Sprint(year), fmt.Sprint(e1), fmt.Sprint(n1), fmt.Sprint(e2), fmt.Sprint(n2),
			fmt.Sprint(n1 + r.IntN(2+n1/15)), fmt.Sprint(n2 + r.IntN(2+n2/15)), "", "", "", "odds ratio", fmt.Sprintf("page %d", 1+r.IntN(900))}
		if 0 < e1 && e1 < n1 && 0 < e2 && e2 < n2 {
			a, b, x, y := float64(e1), float64(n1-e1), float64(e2), float64(n2-e2)
			ln, s := math.Log(a*y/(b*x)), math.Sqrt(1/a+1/b+1/x+1/y)
			row[8], row[9], row[10] = rounded(math.Exp(ln), 2), rounded(math.Exp(ln-1.96*s), 2), rounded(math.Exp(ln+1.96*s), 2)
		}
		c.rows = append(c.rows, row)
	}
	return c
}

func inverseLogit(x float64) float64 { return 1 / (1 + math.Exp(-x)) }

// cleanMeans is a review of a score from 0 to 40 of one whole number for each person,
// with the mean difference, its limits and the values before treatment.
func cleanMeans(r *rand.Rand) *clean {
	c := &clean{header: []string{"study", "year", "mean treated", "sd treated", "total treated", "mean control", "sd control", "total control",
		"scale low", "scale high", "items", "mean difference", "ci low", "ci high", "baseline mean treated", "baseline sd treated", "baseline mean control", "baseline sd control", "better"}}
	for range studies(r) {
		name, year := study(r)
		n1, n2 := people(r)
		center := 17 + 1.2*r.NormFloat64()
		usual := 6.3 * math.Exp(0.1*r.NormFloat64())
		m1, s1 := sample(r, n1, center-1.5+0.4*r.NormFloat64(), usual)
		m2, s2 := sample(r, n2, center, usual)
		b1, t1 := sample(r, n1, center+3, usual)
		b2, t2 := sample(r, n2, center+3, usual)
		decimals := 1 + r.IntN(2)
		d, s := m1-m2, math.Sqrt(s1*s1/float64(n1)+s2*s2/float64(n2))
		half := (1.96 + 2.4/float64(n1+n2-2)) * s // Student's quantile, to its first term in 1/df
		c.rows = append(c.rows, []string{name, fmt.Sprint(year), rounded(m1, decimals), rounded(s1, decimals), fmt.Sprint(n1), rounded(m2, decimals), rounded(s2, decimals), fmt.Sprint(n2),
			"0", "40", "1", rounded(d, 2), rounded(d-half, 2), rounded(d+half, 2), rounded(b1, decimals), rounded(t1, decimals), rounded(b2, decimals), rounded(t2, decimals), "lower"})
	}
	return c
}

// sample returns mean and SD of n whole values from 0 to 40.
func sample(r *rand.Rand, n int, mean, sd float64) (float64, float64) {
	var sum, squares float64
	for range n {
		x := math.Min(40, math.Max(0, math.Round(mean+sd*r.NormFloat64())))
		sum, squares = sum+x, squares+x*x
	}
	m := sum / float64(n)
	return m, math.Sqrt((squares - sum*m) / float64(n-1))
}

// cleanRatios is a review of reported odds ratios with standard errors, limits,
// p-values and people.
func cleanRatios(r *rand.Rand) *clean {
	c := &clean{header: []string{"study", "year", "odds ratio", "se", "ci low", "ci high", "p", "total treated", "total control", "adjusted"}}
	width := 4.5 + 2*r.Float64()
	for range studies(r) {
		name, year := study(r)
		n1, n2 := people(r)
		s := math.Max(width*math.Exp(0.1*r.NormFloat64()), 4.1) / math.Sqrt(float64(n1+n2))
		y := -0.35 + 0.15*r.NormFloat64() + s*r.NormFloat64()
		p := math.Erfc(math.Abs(y) / s / math.Sqrt2)
		text := rounded(p, 3)
		if p < 0.001 {
			text = ""
		}
		c.rows = append(c.rows, []string{name, fmt.Sprint(year), rounded(math.Exp(y), 2), rounded(s, 3), rounded(math.Exp(y-1.96*s), 2), rounded(math.Exp(y+1.96*s), 2),
			text, fmt.Sprint(n1), fmt.Sprint(n2), "no"})
	}
	return c
}
