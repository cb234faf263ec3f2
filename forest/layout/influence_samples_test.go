package layout

import (
	"fmt"
	"math"
	"math/rand/v2"
)

// nineInfluences are pull, residual, leverage and evidence carried of the nine
// invented trials, computed apart from this code in Python with SciPy 1.x:
// restricted maximum likelihood, Hartung–Knapp intervals, each trial left out in
// turn.
var nineInfluences = []struct {
	name, year                        string
	pull, residual, leverage, carried float64
}{
	{"Halvorsen", "2009", -0.1722, -0.6989, 0.0639, 0.5165},
	{"Zielińska", "2011", 0.0536, 0.1113, 0.0916, 0.4943},
	{"Okwuosa", "2012", -0.1342, -1.1621, 0.0131, 0.3187},
	{"Brandão", "2014", 0.1197, 0.2655, 0.1287, 0.5468},
	{"Marchetti-Ruiz", "2015", 0.9866, 2.7626, 0.1423, -1.0391},
	{"Lindqvist", "2017", -0.5591, -1.3654, 0.1481, 0.7057},
	{"Abernethy", "2019", -0.0477, -0.2059, 0.1060, 0.6175},
	{"Dvořák", "2021", 0.0302, 0.0111, 0.1351, 0.6545},
	{"Obradović", "2024", -0.0532, -0.2013, 0.1711, 0.8063},
}

// nineInfluence is the chart of influence of the nine invented trials.
func nineInfluence() InfluenceInput {
	forest := nineTrials()
	in := InfluenceInput{
		Title: "What each trial does to the result", Subtitle: "Brindle against none, flare within 24 weeks · each trial against the eight others",
		Study: "trial", Level: 0.95, Scale: forest.Scale, Sides: forest.Sides, Pooled: *forest.Pooled,
		Notes: []Note{{"Model", "random effects, restricted maximum likelihood; Hartung–Knapp interval, evidence matched to it. † Ratio as reported, events not given. Invented data."}},
	}
	for _, t := range nineInfluences {
		in.Rows = append(in.Rows, InfluenceRow{Name: t.name, Year: t.year, Dagger: t.name == "Dvořák", Pull: t.pull, Carried: t.carried,
			Weights: &InfluenceWeight{Residual: t.residual, Leverage: t.leverage}})
	}
	return in
}

// manyInfluences is a chart of k invented trials.
func manyInfluences(k int) InfluenceInput {
	in := nineInfluence()
	in.Title, in.Subtitle = fmt.Sprintf("What each of %d trials does to the result", k), "Risk ratio, random effects · by pull"
	in.Pooled.K, in.ByPull, in.Rows = k, true, nil
	src := rand.New(rand.NewPCG(3, uint64(k)))
	total := 0.0
	for i := range k {
		w := 0.1 + src.Float64()
		residual := 1.1 * src.NormFloat64()
		total += w
		in.Rows = append(in.Rows, InfluenceRow{Name: inventedNames[i%len(inventedNames)], Year: fmt.Sprint(1998 + i*26/k),
			Pull: residual / math.Sqrt(float64(k)), Carried: (0.3 - 0.2*residual) * 3 / math.Sqrt(float64(k)),
			Weights: &InfluenceWeight{Residual: residual, Leverage: w}})
	}
	for i := range in.Rows {
		in.Rows[i].Weights.Leverage /= total
	}
	return in
}
