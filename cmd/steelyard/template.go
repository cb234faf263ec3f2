package main

import (
	"errors"
	"fmt"
	"path/filepath"
	"strings"

	"github.com/urfave/cli/v2"

	"steelyard/ingest"
	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// flagFrom names the kinds of numbers of a template.
const flagFrom = "from"

func templateCommand() *cli.Command {
	return &cli.Command{
		Name:      "template",
		Usage:     "write an empty workbook for a measure, to be filled in by hand",
		UsageText: "steelyard template --measure NAME --out F.xlsx [--from KIND,KIND] [--overwrite]",
		Description: "The workbook has the sheets studies (one row for each study and outcome, with drop-downs,\n" +
			"limits and a comment on each column), plan (every setting with its default and meaning),\n" +
			"guide, and judgement (the panel's ratings). Filled in, it is read by every command.",
		Flags: []cli.Flag{
			&cli.StringFlag{Name: review.SettingMeasure, Usage: "what the studies' effects measure: " + strings.Join(effect.MeasureNames(), ", ")},
			&cli.StringFlag{Name: flagFrom, Usage: "kinds of numbers that the reports give, parted by commas: " + strings.Join(ingest.KindNames(), ", ") + " (default: the most usual kind of the measure)"},
			&cli.StringFlag{Name: flagOut, Usage: "workbook to write, F.xlsx"},
			&cli.BoolFlag{Name: flagOverwrite, Usage: "replace an output file that exists"},
		},
		Action: writeTemplate,
	}
}

func writeTemplate(c *cli.Context) error {
	measure, kinds, err := templateCall(c)
	if err != nil {
		return err
	}
	content, err := ingest.Template(measure, kinds...)
	var wrong *ingest.KindError
	switch {
	case errors.As(err, &wrong):
		return &callError{"--" + flagFrom + " " + err.Error()}
	case err != nil:
		return err
	}
	return written(c, c.String(flagOut), content)
}

// templateCall reads what the call asks for.
func templateCall(c *cli.Context) (effect.Measure, []ingest.Kind, error) {
	refuse := func(text string) (effect.Measure, []ingest.Kind, error) { return 0, nil, &callError{text} }
	out := c.String(flagOut)
	switch {
	case c.NArg() > 0:
		return refuse(fmt.Sprintf("a template is made from no file; name the new workbook with --%s %s", flagOut, c.Args().First()))
	case c.String(review.SettingMeasure) == "":
		return refuse("which measure? add --measure with one of: " + strings.Join(effect.MeasureNames(), ", "))
	case out == "":
		return refuse("where to? add --out F.xlsx")
	case !strings.EqualFold(filepath.Ext(out), ".xlsx"):
		return refuse(fmt.Sprintf("--out %s: a template is a workbook; name it .xlsx", out))
	}
	measure, err := effect.ParseMeasure(c.String(review.SettingMeasure))
	if err != nil {
		return refuse("--measure: " + err.Error())
	}
	if !c.IsSet(flagFrom) {
		return measure, nil, nil
	}
	kinds, err := ingest.ParseKinds(c.String(flagFrom))
	if err != nil {
		return refuse("--" + flagFrom + ": " + err.Error())
	}
	return measure, kinds, nil
}
