package main

import (
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"

	"github.com/urfave/cli/v2"

	"steelyard/forest/words"
	"steelyard/meta"
	"steelyard/meta/accrual"
	"steelyard/meta/evidence"
	"steelyard/meta/synthesis"
)

// Names of the flags on the next study; its standard error is --se.
const (
	flagSize        = "size"
	flagArms        = "arms"
	flagControlRisk = "control-risk"
	flagSD          = "sd"
	flagToward      = "toward"
	flagChance      = "chance"
)

// nextFlags say what the next study is like, and what is looked for.
func nextFlags() []cli.Flag {
	return []cli.Flag{
		&cli.Float64Flag{Name: flagSize, Usage: "people in the next study, half of them in each arm"},
		&cli.StringFlag{Name: flagArms, Usage: "people in its treated and its control arm, such as 200,100, in place of --size"},
		&cli.Float64Flag{Name: flagControlRisk, Usage: "risk in its control arm, for an odds ratio, a risk ratio or a risk difference (default: the median of the studies' control arms, named as such)"},
		&cli.Float64Flag{Name: flagSD, Usage: "standard deviation of the outcome, for a mean difference"},
		&cli.Float64Flag{Name: flagSE, Usage: "its standard error, of the logarithm for a ratio, in place of --size"},
		&cli.Float64Flag{Name: flagToward, Usage: "steps that the evidence is to reach, below 0 for none, such as 3 (default: the next whole step above the present evidence)"},
		&cli.Float64Flag{Name: flagChance, Usage: "chance with which the smallest size is to reach them (default: 0.8)", Value: 0.8},
	}
}

// wantNext reads the flags on the next study.
func wantNext(c *cli.Context) (synthesis.Want, error) {
	w := &synthesis.NextWanted{
		ControlRisk: c.Float64(flagControlRisk), SD: c.Float64(flagSD), SE: c.Float64(flagSE),
		Toward: c.Float64(flagToward), Chance: c.Float64(flagChance),
	}
	want := synthesis.Want{Next: w}
	given := 0
	for _, name := range []string{flagSize, flagArms, flagSE} {
		if c.IsSet(name) {
			given++
		}
	}
	if given != 1 {
		return want, &callError{fmt.Sprintf("how large is the next study? give one of --size, --arms and --se; %d are given", given)}
	}
	if err := nextArms(c, w); err != nil {
		return want, err
	}
	for _, name := range []string{flagControlRisk, flagChance} {
		if x := c.Float64(name); c.IsSet(name) && !(x > 0 && x < 1) {
			return want, &callError{fmt.Sprintf("--%s %v: give a fraction above 0 and below 1", name, x)}
		}
	}
	for _, name := range []string{flagSD, flagSE} {
		if x := c.Float64(name); c.IsSet(name) && !(x > 0 && !math.IsInf(x, 1)) {
			return want, &callError{fmt.Sprintf("--%s %v: give a finite number above 0", name, x)}
		}
	}
	if c.IsSet(flagSE) {
		for _, name := range []string{flagControlRisk, flagSD, flagChance} {
			if c.IsSet(name) {
				return want, &callError{fmt.Sprintf("--%s is for --size or --arms; beside --se leave it away", name)}
			}
		}
	}
	if c.IsSet(flagToward) && !(math.Abs(w.Toward) < 1e6 && w.Toward != 0) {
		return want, &callError{fmt.Sprintf("--toward %v: give steps above 0 for an effect, or below 0 for none", w.Toward)}
	}
	return want, nil
}

// nextArms reads the sizes of the arms.
func nextArms(c *cli.Context, w *synthesis.NextWanted) error {
	if c.IsSet(flagSize) {
		n := c.Float64(flagSize)
		if !(n >= 2 && n <= 1e9) {
			return &callError{fmt.Sprintf("--size %v: give 2 people or more", n)}
		}
		w.Treated, w.Control = n/2, n/2
	}
	if !c.IsSet(flagArms) {
		return nil
	}
	parts := strings.Split(c.String(flagArms), ",")
	var arms []float64
	for _, part := range parts {
		n, err := strconv.ParseFloat(strings.TrimSpace(part), 64)
		if err != nil || !(n >= 1 && n <= 1e9) {
			return &callError{fmt.Sprintf("--arms %s: %q is no number of people; write two, such as 200,100", c.String(flagArms), part)}
		}
		arms = append(arms, n)
	}
	if len(arms) != 2 {
		return &callError{fmt.Sprintf("--arms %s: give two numbers, of the treated and of the control arm, such as 200,100", c.String(flagArms))}
	}
	w.Treated, w.Control = arms[0], arms[1]
	return nil
}

// next writes what one more study could change.
func (p *page) next(s *synthesis.Synthesis, o *synthesis.Outcome) {
	n := o.Accrual.Next
	if n == nil {
		return
	}
	study := words.Noun(s, 1)
	about := "standard error " + words.Linear(n.Outlook.SE, 3)
	if n.Wanted.SE == 0 {
		about = fmt.Sprintf("%s people treated, %s in the control arm; %s%s", words.People(n.Wanted.Treated), words.People(n.Wanted.Control), words.AssumedRisk(s, n), about)
	}
	p.row("Next "+study, about)
	p.row("Evidence now", fmt.Sprintf("%s, %s steps", words.OddsInSentence(n.Now*evidence.LnStep), words.Steps(n.Now)))
	p.row("With it", fmt.Sprintf("%s steps expected; %s", words.Steps(n.Outlook.Expected.Value), spreadText(n.Outlook)))
	label := "Chance"
	for _, c := range n.Outlook.Passing {
		side := "for an effect"
		if c.Steps < 0 {
			side = "for none"
		}
		p.row(label, fmt.Sprintf("%s that the evidence reaches %s %s", words.Probability(c.Value.Value), words.Odds(c.Steps*evidence.LnStep), side))
		label = ""
	}
	level := words.Level(o.Result.Fit.Model.Level)
	p.row("", fmt.Sprintf("%s that the %s interval excludes no effect", words.Probability(n.Outlook.ExcludesNull.Value), level))
	p.zone(o, n.Outlook, level)
	p.sizes(n)
	p.line("")
	p.item("·", fmt.Sprintf("Over what the next %s may find: its estimate is drawn around the pooled one with the variance of the mean, between studies (τ %s) and of its own; τ is estimated anew with it.", study, words.Tau(n.Tau)))
	if n.MostForNone != nil {
		p.item("·", fmt.Sprintf("For none the evidence can reach %s at most, however large the %s.", words.Odds(*n.MostForNone*evidence.LnStep), study))
	}
}

// zone writes what the next study could show about an important difference.
func (p *page) zone(o *synthesis.Outcome, outlook *accrual.Outlook, level string) {
	z := outlook.Zone
	if z == nil {
		return
	}
	zone := words.ReaderInterval(o, meta.Limits{Low: o.Analysis.Important.Low, High: o.Analysis.Important.High})
	p.row("", fmt.Sprintf("%s that it excludes every effect too small to matter (%s)", words.Probability(z.Outside.Value), zone))
	p.row("", fmt.Sprintf("%s that it excludes every important effect", words.Probability(z.Inside.Value)))
}

// spreadText gives the middle nine tenths of the updated steps.
func spreadText(o *accrual.Outlook) string {
	first, last := o.Spread[0], o.Spread[len(o.Spread)-1]
	return fmt.Sprintf("%s to %s with a chance of %s", words.Steps(first.Steps), words.Steps(last.Steps), words.Percent(last.P-first.P))
}

// sizes writes the size curve, and the smallest size that suffices.
func (p *page) sizes(n *synthesis.Next) {
	if n.Smallest == nil {
		return
	}
	p.line("")
	columns := []column{{head: "people", right: true}, {head: "se", right: true}}
	for _, c := range n.Outlook.Passing {
		columns = append(columns, column{head: words.Odds(c.Steps * evidence.LnStep), right: true})
	}
	columns = append(columns, column{head: "excludes none", right: true}, column{head: "steps", right: true})
	var rows [][]string
	for _, point := range n.Curve {
		if !slices.Contains([]string{"1", "2", "5"}, strings.TrimRight(strconv.FormatFloat(point.Size, 'f', 0, 64), "0")) {
			continue // the chart has finer steps
		}
		row := append([]string{words.People(point.Size), words.Linear(point.Outlook.SE, 3)}, chanceCells(point.Outlook.Passing)...)
		rows = append(rows, append(row, words.Probability(point.Outlook.ExcludesNull.Value), words.Steps(point.Outlook.Expected.Value)))
	}
	p.table(columns, rows)
	p.line("")
	p.item("·", "Smallest size: "+words.SmallestSize(n))
}
