package main

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"

	"github.com/urfave/cli/v2"

	"steelyard/meta/choice"
	"steelyard/meta/explain"
	"steelyard/meta/synthesis"
)

// Names of the flags on comparisons of studies.
const (
	flagSubgroups    = "subgroups"
	flagSharedTau    = "shared-tau"
	flagOn           = "on"
	flagReference    = "reference"
	flagAt           = "at"
	flagPermutations = "permutations"
	flagPlanned      = "planned"
)

// usualPermutations is how many permutations are drawn unless told otherwise.
const usualPermutations = 1000

func subgroupsFlags() []cli.Flag {
	return []cli.Flag{
		&cli.StringFlag{Name: flagSubgroups, Usage: "column whose entries make the subgroups, such as subgroup, \"risk of bias\" or converted"},
		&cli.BoolFlag{Name: flagSharedTau, Usage: "one τ² for all subgroups, in place of one for each"},
	}
}

func plannedFlags() []cli.Flag {
	return []cli.Flag{&cli.BoolFlag{Name: flagPlanned, Usage: "the comparison was planned before results were seen"}}
}

func regressionFlags() []cli.Flag {
	return []cli.Flag{
		&cli.StringFlag{Name: flagOn, Usage: "columns to regress the effects on, such as \"latitude, year\"; a*b adds an interaction"},
		&cli.StringSliceFlag{Name: flagReference, Usage: "category that a column's others are compared with, such as \"allocation=random\" (default: the commonest); may be given more than once"},
	}
}

func explainCommand() *cli.Command {
	return &cli.Command{
		Name:      "explain",
		Usage:     "why the studies differ: subgroups and regression on covariates",
		UsageText: "steelyard explain FILE --subgroups COLUMN | --on COLUMNS [flags]",
		Description: "Any column of the sheet can explain: one of numbers is centred at its mean, any other makes\n" +
			"categories. Studies with a blank cell are left out and named. Both questions may be asked at once;\n" +
			"--format csv then holds the groups, and the coefficients without --subgroups.\n" +
			"Example: steelyard explain FILE --on \"latitude, year\" --subgroups allocation",
		Flags: slices.Concat(subgroupsFlags(), regressionFlags(), []cli.Flag{
			&cli.StringSliceFlag{Name: flagAt, Usage: "covariates at which to predict the effect, such as \"latitude=40\" (default: means and references); may be given more than once"},
			&cli.IntFlag{Name: flagPermutations, Usage: "permutations of the regression's test by dealing the covariates anew, 100 or more, or 0 for none; all of them for 7 studies or fewer", Value: usualPermutations},
		}, plannedFlags(), sheetFlags(), settingFlags("explain"), []cli.Flag{formatFlag()}, outputFlags(), workFlags()),
		Action: explainStudies,
	}
}

func explainStudies(c *cli.Context) error {
	format, err := outputWanted(c)
	if err != nil {
		return err
	}
	want, err := wantExplain(c)
	if err != nil {
		return err
	}
	s, err := analyse(c, want)
	if err != nil {
		return err
	}
	table := []string{"outcomes", "explain", "regression", "coefficients"}
	if strings.TrimSpace(c.String(flagSubgroups)) != "" {
		table = []string{"outcomes", "explain", "subgroups", "groups"}
	}
	if err := reply(c, format, explainAnswer(s), s.Document(version), table...); err != nil {
		return err
	}
	for i := range s.Outcomes {
		if s.Outcomes[i].Explain.Unexplained() {
			return &rowsLeftOut{}
		}
	}
	return incomplete(s)
}

// wantExplain reads the flags on comparisons.
func wantExplain(c *cli.Context) (synthesis.Want, error) {
	w := &synthesis.ExplainWanted{Subgroups: strings.TrimSpace(c.String(flagSubgroups)), Shared: c.Bool(flagSharedTau), Planned: c.Bool(flagPlanned)}
	want := synthesis.Want{Further: synthesis.Further{Explain: w}}
	on := strings.TrimSpace(c.String(flagOn))
	if w.Subgroups == "" && on == "" {
		return want, &callError{"explain by what? give --subgroups COLUMN, or --on \"COLUMN, COLUMN\", or both"}
	}
	if w.Shared && w.Subgroups == "" {
		return want, &callError{"--shared-tau is for --subgroups COLUMN"}
	}
	for _, name := range []string{flagReference, flagAt, flagPermutations} {
		if on == "" && c.IsSet(name) {
			return want, &callError{fmt.Sprintf("--%s is for --on COLUMNS", name)}
		}
	}
	if on == "" {
		return want, nil
	}
	if w.Permutations = c.Int(flagPermutations); w.Permutations != 0 && (w.Permutations < 100 || w.Permutations > 10_000_000) {
		return want, &callError{fmt.Sprintf("--permutations %d: give 100 to 10000000, or 0 for none", w.Permutations)}
	}
	return want, regressionWanted(c, on, w)
}

// wantSubgroupsChart reads the flags of the chart of subgroups.
func wantSubgroupsChart(c *cli.Context) (synthesis.Want, error) {
	w := &synthesis.ExplainWanted{Subgroups: strings.TrimSpace(c.String(flagSubgroups)), Shared: c.Bool(flagSharedTau), Planned: c.Bool(flagPlanned)}
	if w.Subgroups == "" {
		return synthesis.Want{}, &callError{"which subgroups? name their column with --subgroups COLUMN"}
	}
	return synthesis.Want{Further: synthesis.Further{Explain: w}}, nil
}

// wantRegressionChart reads the flags of the chart of a regression.
func wantRegressionChart(c *cli.Context) (synthesis.Want, error) {
	w := &synthesis.ExplainWanted{Planned: c.Bool(flagPlanned)}
	on := strings.TrimSpace(c.String(flagOn))
	if on == "" {
		return synthesis.Want{}, &callError{"along what? name a column of numbers with --on COLUMN; the first named is drawn"}
	}
	return synthesis.Want{Further: synthesis.Further{Explain: w}}, regressionWanted(c, on, w)
}

// regressionWanted reads what is regressed on, and where an effect is predicted.
func regressionWanted(c *cli.Context, on string, w *synthesis.ExplainWanted) error {
	var err error
	if w.Terms, err = explain.ParseTerms(on); err != nil {
		return &callError{"--on " + err.Error()}
	}
	w.References = map[string]string{}
	for _, text := range c.StringSlice(flagReference) {
		column, category, ok := assigned(text)
		if !ok {
			return &callError{fmt.Sprintf("--reference %q: write COLUMN=CATEGORY, such as \"allocation=random\"", text)}
		}
		w.References[choice.Fold(column)] = category
	}
	for _, text := range c.StringSlice(flagAt) {
		column, value, ok := assigned(text)
		if !ok {
			return &callError{fmt.Sprintf("--at %q: write COLUMN=VALUE, such as \"latitude=40\"", text)}
		}
		number, err := strconv.ParseFloat(strings.ReplaceAll(value, "−", "-"), 64)
		if err != nil {
			number = math.NaN() // a category, or refused where numbers are wanted
		}
		w.At = append(w.At, explain.Point{Covariate: column, Number: number, Level: value})
	}
	return nil
}

// assigned splits NAME=VALUE.
func assigned(text string) (name, value string, ok bool) {
	name, value, ok = strings.Cut(text, "=")
	name, value = strings.Trim(strings.TrimSpace(name), `"`), strings.Trim(strings.TrimSpace(value), `"`)
	return name, value, ok && name != "" && value != ""
}

// isCovariateError reports an error about a column or a point that the call names.
func isCovariateError(err error) bool {
	var column *synthesis.ColumnError
	var point *explain.PointError
	return errors.As(err, &column) || errors.As(err, &point)
}
