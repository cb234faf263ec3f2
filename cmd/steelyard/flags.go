package main

import (
	"fmt"
	"strings"

	"github.com/urfave/cli/v2"

	"steelyard/meta/review"
)

// Names of the flags that are not settings.
const (
	flagOutcome   = "outcome"
	flagColumn    = "column"
	flagSheet     = "sheet"
	flagFormat    = "format"
	flagOut       = "out"
	flagOverwrite = "overwrite"
)

// settingFlags returns a flag for every setting that the command uses: those of
// all commands and its own.
func settingFlags(command string) []cli.Flag {
	var flags []cli.Flag
	for _, s := range review.Settings() {
		if s.Needs == "" || s.Needs == command {
			flags = append(flags, &cli.StringFlag{Name: s.Name, Usage: settingHelp(s)})
		}
	}
	return flags
}

// settingHelp explains a setting: meaning, values or unit, default.
func settingHelp(s review.Setting) string {
	help := s.Meaning
	switch {
	case s.Values != nil:
		help += ": " + strings.Join(s.Values, ", ")
	case s.Unit != "":
		help += "; " + s.Unit
	}
	var fallback []string
	if s.Default != "" {
		fallback = append(fallback, s.Default)
	}
	if s.Unless != "" {
		fallback = append(fallback, s.Unless)
	}
	if len(fallback) > 0 {
		help += fmt.Sprintf(" (default: %s)", strings.Join(fallback, "; "))
	}
	return help
}

// sheetFlags are the flags of every command that reads a sheet.
func sheetFlags() []cli.Flag {
	return []cli.Flag{
		&cli.StringSliceFlag{Name: flagOutcome, Usage: "only this outcome; may be given more than once (default: all)"},
		&cli.StringSliceFlag{Name: flagColumn, Usage: "which column is which, such as \"events treated=Deaths, drug arm\"; may be given more than once"},
		&cli.StringFlag{Name: flagSheet, Usage: "sheet of the workbook that holds the studies"},
	}
}

// outputFlags are the flags of every command that writes.
func outputFlags() []cli.Flag {
	return []cli.Flag{
		&cli.StringFlag{Name: flagOut, Usage: "file to write instead of the terminal"},
		&cli.BoolFlag{Name: flagOverwrite, Usage: "replace an output file that exists"},
	}
}

// applySettings puts the settings given as flags into the plan.
func applySettings(c *cli.Context, plan *review.Plan) error {
	for _, s := range review.Settings() {
		if !c.IsSet(s.Name) {
			continue
		}
		if err := plan.Set(s.Name, "", review.Value{Text: c.String(s.Name), From: review.FromFlag}); err != nil {
			return &callError{"--" + err.Error()}
		}
	}
	return nil
}

// oneFile returns the call's single operand.
func oneFile(c *cli.Context) (string, error) {
	switch args := c.Args().Slice(); len(args) {
	case 1:
		return args[0], nil
	case 0:
		return "", &callError{fmt.Sprintf("which file? usage: %s", c.Command.UsageText)}
	default:
		return "", &callError{fmt.Sprintf("one file is taken, %d are given: %q; a value with blanks needs quotes", len(args), args)}
	}
}
