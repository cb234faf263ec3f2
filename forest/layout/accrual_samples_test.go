package layout

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"steelyard/meta/review"
)

// The data here are invented: a fictional treatment, fictional trials. The
// numbers of the nine are those of the design drawings, computed with SciPy by
// design/mock/mock_data.py, which shares no code with this module.

// arrived is a cumulative result on the log scale.
type arrived struct {
	name                    string
	year, month             int
	estimate, low, high, ln float64
}

var nineArrivals = []arrived{
	{"Halvorsen", 2009, 3, -0.5712363, -1.172631, 0.03015788, 0.8863497},
	{"Zielińska", 2011, 1, -0.4140296, -2.848754, 2.020694, -0.2531},
	{"Okwuosa", 2012, 5, -0.4648034, -1.262035, 0.3324281, 0.3063158},
	{"Brandão", 2014, 2, -0.3776827, -0.8040597, 0.04869424, 0.8334793},
	{"Marchetti-Ruiz", 2015, 9, -0.2509276, -0.6772423, 0.1753871, 0.06241575},
	{"Lindqvist", 2017, 10, -0.3374603, -0.6991899, 0.02426921, 0.8981059},
	{"Abernethy", 2019, 6, -0.3414218, -0.6324191, -0.05042452, 1.555449},
	{"Dvořák", 2021, 4, -0.3371542, -0.574581, -0.09972748, 2.300047},
	{"Obradović", 2024, 8, -0.3425008, -0.537828, -0.1471737, 3.361864},
}

// ninePoints is the cumulative chart of the nine invented trials.
func ninePoints() CumulativeInput {
	in := CumulativeInput{
		Title:    "Evidence as the trials arrived",
		Subtitle: "Brindle against none, flare within 24 weeks · risk ratio, random effects",
		Study:    "trial", Prior: 0.2, Level: 0.95,
		Scale:  EffectScale{Measure: "risk ratio", Ratio: true},
		Sides:  Sides{Lower: "fewer", Higher: "more"},
		Method: "restricted maximum likelihood, Hartung–Knapp interval, evidence matched to it",
		Notes:  []Note{{"Repeated looks", "of simulated sequences with no effect, 4% pass 3.7 : 1 at some look and 0.3% pass 14 : 1. Invented data."}},
	}
	for i, a := range nineArrivals {
		in.Points = append(in.Points, CumulativePoint{
			Entered: []Arrival{{Name: a.name, Year: fmt.Sprint(a.year)}}, Date: review.Date{Year: a.year, Month: a.month}, K: i + 1,
			Estimate: a.estimate, Low: a.low, High: a.high, LnEvidence: a.ln,
		})
	}
	return in
}

// manyPoints is a cumulative chart of k invented trials whose evidence wavers.
func manyPoints(k int) CumulativeInput {
	in := ninePoints()
	in.Title = fmt.Sprintf("Evidence as the trials arrived, %d of them", k)
	in.Points = nil
	src := rand.New(rand.NewPCG(11, uint64(k)))
	month, ln := 12*1995, 0.4
	for i := range k {
		month += src.IntN(1 + 2*300/k)
		half := 1.2/math.Sqrt(float64(i+1)) + 0.05
		if i == 1 {
			half = 3
		}
		y := -0.3 + 0.2*src.NormFloat64()/math.Sqrt(float64(i+1))
		in.Points = append(in.Points, CumulativePoint{
			Entered: []Arrival{{Name: inventedNames[i%len(inventedNames)], Year: fmt.Sprint(month / 12)}},
			Date:    review.Date{Year: month / 12, Month: month%12 + 1}, K: i + 1,
			Estimate: y, Low: y - half, High: y + half, LnEvidence: ln,
		})
		ln = math.Max(-mostForNone, ln+0.4*lnStep*src.NormFloat64()+4/float64(k))
	}
	return in
}

// nineOmissions is the leave-one-out chart of the nine invented trials.
func nineOmissions() LeaveOneOutInput {
	return LeaveOneOutInput{
		Title:    "What each trial carries",
		Subtitle: "Brindle against none, flare within 24 weeks · pooled again without one trial",
		Study:    "trial", Level: 0.95, Below: math.NaN(),
		Scale: EffectScale{Measure: "risk ratio", Ratio: true},
		Sides: Sides{Lower: "fewer flares", Higher: "more"},
		All:   Omission{Estimate: -0.3425008, Low: -0.537828, High: -0.1471737, Tau: 0.13457, LnEvidence: 3.361864},
		Rows: []Omission{
			{Name: "Halvorsen", Year: "2009", Estimate: -0.3271771, Low: -0.5376205, High: -0.1167337, Tau: 0.14103, LnEvidence: 2.681621},
			{Name: "Zielińska", Year: "2011", Estimate: -0.3475348, Low: -0.569574, High: -0.1254955, Tau: 0.15612, LnEvidence: 2.710955},
			{Name: "Okwuosa", Year: "2012", Estimate: -0.3311055, Low: -0.5319379, High: -0.1302731, Tau: 0.13299, LnEvidence: 2.942124},
			{Name: "Brandão", Year: "2014", Estimate: -0.3541358, Low: -0.584024, High: -0.1242475, Tau: 0.16223, LnEvidence: 2.641728},
			{Name: "Marchetti-Ruiz", Year: "2015", Estimate: -0.416167, Low: -0.5927178, High: -0.2396161, Tau: 0, LnEvidence: 4.730356},
			{Name: "Lindqvist", Year: "2017", Estimate: -0.2949454, Low: -0.4960797, High: -0.09381106, Tau: 0.1012, LnEvidence: 2.432458},
			{Name: "Abernethy", Year: "2019", Estimate: -0.3379818, Low: -0.5621936, High: -0.1137699, Tau: 0.15697, LnEvidence: 2.548692},
			{Name: "Dvořák", Year: "2021", Estimate: -0.3454629, Low: -0.5772896, High: -0.1136362, Tau: 0.1643, LnEvidence: 2.499921},
			{Name: "Obradović", Year: "2024", Estimate: -0.3371542, Low: -0.574581, High: -0.09972748, Tau: 0.16704, LnEvidence: 2.300047},
		},
		Notes: []Note{{Text: "Invented data."}},
	}
}

// manyOmissions is a leave-one-out chart of k invented trials.
func manyOmissions(k int) LeaveOneOutInput {
	in := nineOmissions()
	in.Title = fmt.Sprintf("What each of %d trials carries", k)
	in.Rows = nil
	src := rand.New(rand.NewPCG(13, uint64(k)))
	for i := range k {
		y := in.All.Estimate + 0.6*src.NormFloat64()/float64(k)
		half := 0.2 * (1 + src.Float64()/float64(k))
		in.Rows = append(in.Rows, Omission{
			Name: inventedNames[i%len(inventedNames)], Year: fmt.Sprint(1998 + i*26/k),
			Estimate: y, Low: y - half, High: y + half, Tau: 0.13 + 0.1*src.Float64(),
			LnEvidence: in.All.LnEvidence - 4*lnStep/float64(k)*(0.3+src.NormFloat64()),
		})
	}
	return in
}

func mustCumulative(t testing.TB, in CumulativeInput, style Style) Drawing {
	t.Helper()
	doc, err := Cumulative(in, style)
	if err != nil {
		t.Fatal(err)
	}
	if len(doc.Pages) != 1 {
		t.Fatalf("%d pages, want one", len(doc.Pages))
	}
	return doc.Pages[0]
}

func mustLeaveOneOut(t testing.TB, in LeaveOneOutInput, style Style) Document {
	t.Helper()
	doc, err := LeaveOneOut(in, style)
	if err != nil {
		t.Fatal(err)
	}
	return doc
}

// discsOf returns the discs with a fill.
func discsOf(items []Item, ink Ink) []Disc {
	var all []Disc
	each(items, func(it Item) {
		if d, ok := it.(Disc); ok && d.Paint.Fill == ink {
			all = append(all, d)
		}
	})
	return all
}
