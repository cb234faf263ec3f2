package layout

import (
	"fmt"
	"math"
	"math/rand/v2"
)

// The data here are invented: a fictional treatment, fictional trials.

// invented is a trial's counts: events and total with treatment, events and
// total without.
type invented struct {
	name, year     string
	e1, n1, e2, n2 int
	weight         float64
}

var ninetrials = []invented{
	{"Halvorsen", "2009", 11, 41, 19, 40, 0.064},
	{"Zielińska", "2011", 20, 75, 27, 74, 0.092},
	{"Okwuosa", "2012", 2, 17, 7, 18, 0.013},
	{"Brandão", "2014", 30, 98, 41, 101, 0.129},
	{"Marchetti-Ruiz", "2015", 44, 121, 38, 118, 0.142},
	{"Lindqvist", "2017", 36, 158, 66, 160, 0.148},
	{"Abernethy", "2019", 23, 88, 35, 90, 0.106},
	{"Dvořák", "2021", 0, 131, 0, 128, 0.135},
	{"Obradović", "2024", 50, 206, 74, 207, 0.171},
}

// inventedRow is a row of a log ratio with its standard error; evidence in the
// normal form, ln ER = (z² - 1 - ln 2)/2.
func inventedRow(name, year string, y, s, weight float64) ForestRow {
	z := y / s
	return ForestRow{Name: name, Year: year, Estimate: y, Low: y - 1.96*s, High: y + 1.96*s,
		Weight: weight, LnEvidence: (z*z - 1 - math.Ln2) / 2, Unwanted: y > 0}
}

// nineTrials is the chart of nine invented trials.
func nineTrials() ForestInput {
	in := ForestInput{
		Title:    "Flare within 24 weeks, Vane syndrome: Brindle against none",
		Subtitle: "9 trials, 1,871 participants · risk ratio, random effects",
		Study:    "trial", Level: 0.95,
		Scale: EffectScale{Measure: "risk ratio", Ratio: true},
		Sides: Sides{Lower: "fewer flares", Higher: "more", Arms: [2]string{"brindle", "without"}},
		ForestSummary: ForestSummary{
			Pooled: &ForestPooled{Estimate: math.Log(0.707), Low: math.Log(0.581), High: math.Log(0.861),
				LnEvidence: 2.5528 * lnStep, K: 9, Totals: [2]string{"935", "936"}},
			Prediction: &ForestPrediction{Low: math.Log(0.486), High: math.Log(1.029)},
			Spread:     &ForestSpread{Tau: 0.13, Low: 0, High: 0.48, HasLimits: true},
		},
		BiasOpen: true,
		Notes: []Note{{"Model", "random effects, restricted maximum likelihood; Hartung–Knapp interval, evidence matched to it." +
			" † Ratio as reported, events not given. Invented data."}},
	}
	for _, t := range ninetrials {
		e1, n1, e2, n2 := float64(t.e1), float64(t.n1), float64(t.e2), float64(t.n2)
		y, s := math.Log(e1/n1/(e2/n2)), math.Sqrt(1/e1-1/n1+1/e2-1/n2)
		count := func(e, n int) Count { return Count{fmt.Sprint(e), fmt.Sprint(n)} }
		counts := [2]Count{count(t.e1, t.n1), count(t.e2, t.n2)}
		if t.e1 == 0 { // a trial that reported a ratio only
			y, s = math.Log(0.71), math.Log(1.02/0.49)/3.92
			counts = [2]Count{{"", fmt.Sprint(t.n1)}, {"", fmt.Sprint(t.n2)}}
		}
		row := inventedRow(t.name, t.year, y, s, t.weight)
		row.Counts, row.Dagger = counts, t.e1 == 0
		row.Unwanted = false // the direction that is wanted is not stated
		in.Rows = append(in.Rows, row)
	}
	return in
}

var inventedNames = []string{
	"Ångström & Sjöberg", "Þórsdóttir, Guðmundsson & Árnadóttir", "Bełżecka-Świątkiewicz", "O'Driscoll-Featherstonehaugh",
	"Muñoz de la Peña y Ibáñez", "Kovačević", "Øvergård & Bjørnstad", "Çelik, Yıldız & Gündoğdu", "Hřebíčková", "van der Heijden-Oosterhuis",
	"Csíkszentmártoni & Őry", "Lefèvre-d'Hérouville", "Jõgeva & Kääriäinen", "Sørbø", "Weißenböck-Müllner", "Nascimento e Conceição",
	"Ştefănescu", "Żółkiewska, Gąsiorowska & Łącka", "Ó Súilleabháin", "Tkáčová", "Grünwald-Schäfer & Hößlin", "Đorđević",
	"Brindle after Mask Ventilation Study Group (multicentre, crossover period 1 only)", "Nguyễn Thị Thanh Hằng", "Иванов и Смирнова", "Παπαδόπουλος",
}

// manyTrials is a chart of k invented trials with scattered effects.
func manyTrials(k int) ForestInput {
	in := nineTrials()
	in.Title = fmt.Sprintf("Flare within 24 weeks, Vane syndrome: %d trials", k)
	in.Subtitle = "Risk ratio, random effects · by year"
	in.Pooled.K, in.Pooled.Totals = k, [2]string{"12,345", "12,346"}
	in.Rows = nil
	src := rand.New(rand.NewPCG(7, uint64(k)))
	total := 0.0
	for i := range k {
		s := 0.12 + 0.5*src.Float64()*src.Float64()
		y := -0.19 + 0.27*src.NormFloat64() + s*src.NormFloat64()
		w := 1 / (s*s + 0.07)
		total += w
		row := inventedRow(inventedNames[i%len(inventedNames)], fmt.Sprint(1998+i*26/max(k, 1)), y, s, w)
		n1, n2 := int(5/(s*s)), int(6/(s*s))
		row.Counts = [2]Count{{fmt.Sprint(n1 / 4), fmt.Sprint(n1)}, {fmt.Sprint(n2 / 3), fmt.Sprint(n2)}}
		in.Rows = append(in.Rows, row)
	}
	for i := range in.Rows {
		in.Rows[i].Weight /= total
	}
	if k == 1 {
		in.Pooled, in.Prediction, in.Spread = nil, nil, nil
	}
	return in
}
