package main

import (
	"fmt"
	"math"

	"github.com/urfave/cli/v2"

	"steelyard/forest/words"
	"steelyard/meta/accrual"
	"steelyard/meta/evidence"
	"steelyard/meta/synthesis"
)

// Names of the flags of repeated looks.
const (
	flagLooks  = "looks"
	flagEffect = "effect"
)

// The numbers of sequences that may be simulated.
const (
	leastDraws = 100
	mostDraws  = 10_000_000
)

// looksFlags ask for repeated looks beside a cumulative analysis.
func looksFlags() []cli.Flag {
	return []cli.Flag{
		&cli.IntFlag{Name: flagLooks, Usage: "simulate the same sequence of studies this many times under no effect and under a stated effect: what repeated looks show by chance; 10000 for a first view, 100000 for a report"},
		&cli.Float64Flag{Name: flagEffect, Usage: "the stated effect of --looks, in the reader's unit (default: the pooled estimate)"},
	}
}

// wantCumulative reads the flags of a cumulative analysis.
func wantCumulative(c *cli.Context) (synthesis.Want, error) {
	want := synthesis.Want{Cumulative: true}
	if !c.IsSet(flagLooks) {
		if c.IsSet(flagEffect) {
			return want, &callError{"--effect is for --looks; add --looks 10000"}
		}
		return want, nil
	}
	looks := &synthesis.LooksWanted{Draws: c.Int(flagLooks)}
	want.Looks = looks
	if n := looks.Draws; n < leastDraws || n > mostDraws {
		return want, &callError{fmt.Sprintf("--looks %d: give %d to %d sequences to simulate", n, leastDraws, mostDraws)}
	}
	if c.IsSet(flagEffect) {
		stated := c.Float64(flagEffect)
		if math.IsNaN(stated) || math.IsInf(stated, 0) {
			return want, &callError{fmt.Sprintf("--effect %v: give a number in the reader's unit, such as 0.8 for a ratio", stated)}
		}
		looks.Effect = &stated
	}
	return want, nil
}

// looks writes what repeated looks show: a table with two rows for each truth.
func (p *page) looks(s *synthesis.Synthesis, o *synthesis.Outcome) {
	l := o.Accrual.Looks
	if l == nil {
		return
	}
	first := l.Scenarios[0]
	p.line("")
	p.wrapped("", fmt.Sprintf("Repeated looks, simulated: %s sequences of the same standard errors under each truth; chance to pass a step for an effect at one of the %s, from two %s on",
		words.Count(first.Sequences), words.Number(first.Looks, "look", "looks"), words.Noun(s, 2)))
	columns := []column{{head: "if there is"}, {head: "τ", right: true}, {head: ""}}
	for _, c := range first.AnyLook {
		columns = append(columns, column{head: words.Odds(c.Steps * evidence.LnStep), right: true})
	}
	columns = append(columns, column{head: "most: 50%", right: true}, column{head: "95%", right: true})
	var rows [][]string
	chanceError, stepsError := 0.0, 0.0
	for i, r := range l.Scenarios {
		truth := "no effect"
		if l.Stated(i) {
			truth = fmt.Sprintf("%s %s", words.Measure(o.Analysis.Measure), words.ReaderValue(o, l.Effect))
		}
		rows = append(rows,
			append(append([]string{truth, words.Tau(math.Sqrt(r.Scenario.Tau2)), "any look"}, chanceCells(r.AnyLook)...), words.Steps(r.Median.Value), words.Steps(r.High.Value)),
			append(append([]string{"", "", "last look"}, chanceCells(r.LastLook)...), "", ""))
		for j := range r.AnyLook {
			chanceError = max(chanceError, r.AnyLook[j].Error, r.LastLook[j].Error)
		}
		stepsError = max(stepsError, r.Median.Error, r.High.Error)
	}
	p.tableNamed(columns, rows, widestName, widestName)
	p.line("")
	p.item("·", fmt.Sprintf("most: the largest number of steps over the looks, by its median and 95%% quantile; the mean of the largest ratio does not exist (it is infinite). Monte-Carlo standard error: at most %s percentage points and %s steps.",
		words.Linear(100*chanceError, 2), words.Linear(stepsError, 3)))
	if l.Pooled {
		p.item("·", "The effect stated is the pooled estimate, nothing else being given by --effect; an estimate is more often too large than too small where it was the reason to look.")
	}
	p.item("·", synthesis.LooksEndless)
}

// chanceCells are the chances of a row.
func chanceCells(chances []accrual.Chance) []string {
	cells := make([]string, len(chances))
	for i, c := range chances {
		cells[i] = words.Probability(c.Value.Value)
	}
	return cells
}
