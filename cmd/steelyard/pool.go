package main

import (
	"slices"

	"github.com/urfave/cli/v2"

	"steelyard/meta/synthesis"
)

// Names of pool's own flags: flagAllMethods asks for a comparison of methods,
// flagBeliefs for what sceptics make of the evidence, flagPosterior for the
// posterior distribution, flagRuns for the planned
// sensitivity runs.
const (
	flagAllMethods = "all-methods"
	flagBeliefs    = "beliefs"
	flagPosterior  = "posterior"
	flagRuns       = "runs"
)

func poolCommand() *cli.Command {
	return &cli.Command{
		Name:      "pool",
		Usage:     "pool the studies of a sheet: effect, interval, evidence",
		UsageText: "steelyard pool FILE [flags]",
		Description: "FILE is a workbook (.xlsx) or a text file (.csv, .tsv); - reads text from standard input.\n" +
			"One row per study and outcome. A sheet named \"plan\", or NAME.plan.csv beside a text file,\n" +
			"holds settings; flags go before it.",
		Flags: slices.Concat(sheetFlags(), settingFlags("pool"), []cli.Flag{
			&cli.BoolFlag{Name: flagAllMethods, Usage: "besides, the results of all methods for counts and all zero-cell corrections side by side, and which are apt here"},
			&cli.BoolFlag{Name: flagBeliefs, Usage: "besides, what sceptics make of the evidence: beliefs over a range of priors, the scepticism limit, Bayes factors by the scale of a prior and their bound"},
			&cli.BoolFlag{Name: flagPosterior, Usage: "besides, the posterior distribution of mean effect and spread under a flat prior for the mean and the prior for τ of --tau-prior: limits, a new setting, each study drawn towards the mean, probabilities beyond no effect and the important difference"},
			&cli.BoolFlag{Name: flagRuns, Usage: "besides, the sensitivity runs that the plan names, side by side"},
			formatFlag(),
		}, outputFlags()),
		Action: pool,
	}
}

func pool(c *cli.Context) error {
	format, err := outputWanted(c)
	if err != nil {
		return err
	}
	s, err := analyse(c, synthesis.Want{Methods: c.Bool(flagAllMethods), Beliefs: c.Bool(flagBeliefs), Runs: c.Bool(flagRuns), Further: synthesis.Further{Posterior: c.Bool(flagPosterior)}})
	if err != nil {
		return err
	}
	table := []string{"outcomes"}
	switch {
	case c.Bool(flagAllMethods):
		table = append(table, "methods", "rows")
	case c.Bool(flagRuns):
		table = append(table, "runs")
	}
	if err := reply(c, format, answer(s), s.Document(version), table...); err != nil {
		return err
	}
	return incomplete(s)
}
