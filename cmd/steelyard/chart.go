package main

import (
	"bytes"
	"fmt"
	"path/filepath"
	"slices"
	"strings"

	"github.com/urfave/cli/v2"

	"steelyard/forest"
	"steelyard/forest/layout"
	"steelyard/meta/synthesis"
)

// Names of the charts' own flags.
const (
	flagWidth   = "width"
	flagMono    = "mono"
	flagStatic  = "static"
	flagNoTitle = "no-title"
	flagDPI     = "dpi"
)

// chartKind is a chart that the command draws of each outcome.
type chartKind struct {
	name    string
	usage   string
	setting string // whose settings it takes besides the common ones
	flags   []cli.Flag
	want    func(*cli.Context) (synthesis.Want, error) // beyond the pooled results
	draw    func(*synthesis.Synthesis, *synthesis.Outcome, layout.Style) (layout.Document, error)
}

var chartKinds = []chartKind{
	{
		name: "forest", usage: "every study, the pooled effect, and the evidence of each", setting: "forest", want: wanting(synthesis.Want{}),
		draw: laidOut(layout.ForestOf, layout.Forest),
	},
	{
		name: "cumulative", usage: "how the evidence arrived, study by study", setting: "cumulative",
		flags: slices.Concat(looksFlags(), workFlags()), want: wantCumulative,
		draw: laidOut(layout.CumulativeOf, layout.Cumulative),
	},
	{
		name: "leave-one-out", usage: "how much of the evidence each study carries", setting: "leave-one-out", want: wanting(synthesis.Want{LeaveOneOut: true}),
		draw: laidOut(layout.LeaveOneOutOf, layout.LeaveOneOut),
	},
	{
		name: "influence", usage: "how each study pulls on the result", setting: "influence", want: wanting(synthesis.Want{Influence: true}),
		draw: laidOut(layout.InfluenceOf, layout.Influence),
	},
	{
		name: "subsets", usage: "evidence and effect over the subsets of the studies", setting: "subsets",
		flags: slices.Concat(subsetsFlags(), workFlags()), want: wantSubsets,
		draw: laidOut(layout.SubsetsOf, layout.Subsets),
	},
	{
		name: "next-trial", usage: "what the next study could change, over its size", setting: "next-trial",
		flags: nextFlags(), want: wantNext,
		draw: laidOut(layout.NextTrialOf, layout.NextTrial),
	},
	{
		name: "panel", usage: "is the effect large enough to matter, at each baseline risk", setting: "panel",
		flags: []cli.Flag{earlierFlag()}, want: wantPanel,
		draw: laidOut(layout.BenefitOf, layout.Benefit),
	},
	{
		name: "subgroups", usage: "the forest chart by subgroups, each with its pooled effect", setting: "forest",
		flags: slices.Concat(subgroupsFlags(), plannedFlags()), want: wantSubgroupsChart,
		draw: laidOut(layout.SubgroupsOf, layout.Forest),
	},
	{
		name: "regression", usage: "effects along a covariate, with the line of the regression", setting: "explain",
		flags: slices.Concat(regressionFlags(), plannedFlags()), want: wantRegressionChart,
		draw: laidOut(layout.RegressionOf, layout.Regression),
	},
	{
		name: "prior-sensitivity", usage: "evidence by the width of a prior", setting: "pool", want: wanting(synthesis.Want{Beliefs: true}),
		draw: laidOut(layout.PriorSensitivityOf, layout.PriorSensitivity),
	},
	{
		name: "funnel", usage: "whether small studies show other effects, over contours of evidence or p", setting: "small-study",
		flags: contourFlags(), want: wanting(wantAsymmetry()),
		draw: laidOut(layout.FunnelOf, layout.Funnel),
	},
	{
		name: "radial", usage: "each study's distance from none against its precision", setting: "small-study", want: wanting(synthesis.Want{}),
		draw: laidOut(layout.RadialOf, layout.Radial),
	},
	{
		name: "contribution", usage: "which studies make the results differ, and which move the answer", setting: "influence", want: wanting(synthesis.Want{Influence: true}),
		draw: laidOut(layout.ContributionOf, layout.Contribution),
	},
}

// wanting asks for the same whatever the flags.
func wanting(want synthesis.Want) func(*cli.Context) (synthesis.Want, error) {
	return func(*cli.Context) (synthesis.Want, error) { return want, nil }
}

// laidOut joins what a chart shows of an outcome with its layout.
func laidOut[Input any](
	of func(*synthesis.Synthesis, *synthesis.Outcome) (Input, error),
	lay func(Input, layout.Style) (layout.Document, error),
) func(*synthesis.Synthesis, *synthesis.Outcome, layout.Style) (layout.Document, error) {
	return func(s *synthesis.Synthesis, o *synthesis.Outcome, style layout.Style) (layout.Document, error) {
		in, err := of(s, o)
		if err != nil {
			return layout.Document{}, err
		}
		return lay(in, style)
	}
}

func chartCommand() *cli.Command {
	command := &cli.Command{
		Name:      "chart",
		Usage:     "draw a chart of a sheet",
		UsageText: "steelyard chart KIND FILE --out F.svg|pdf|png [flags]",
		Action: func(c *cli.Context) error {
			var names []string
			for _, kind := range chartKinds {
				names = append(names, kind.name)
			}
			return &callError{"which chart? the kinds are: " + strings.Join(names, ", ") + "; usage: steelyard chart forest FILE --out F.svg"}
		},
	}
	for _, kind := range chartKinds {
		command.Subcommands = append(command.Subcommands, &cli.Command{
			Name:      kind.name,
			Usage:     kind.usage,
			UsageText: fmt.Sprintf("steelyard chart %s FILE --out F.svg|pdf|png [flags]", kind.name),
			Flags:     slices.Concat(chartFlags(), kind.flags, sheetFlags(), settingFlags(kind.setting)),
			Action:    func(c *cli.Context) error { return drawChart(c, kind) },
		})
	}
	return command
}

// chartFlags are the flags of every chart.
func chartFlags() []cli.Flag {
	return []cli.Flag{
		&cli.StringFlag{Name: flagOut, Usage: "file to write; its ending chooses the format: .svg, .pdf or .png"},
		&cli.BoolFlag{Name: flagOverwrite, Usage: "replace an output file that exists"},
		&cli.IntFlag{Name: flagWidth, Value: 180, Usage: "width in millimetres: 180 for a page, 85 for a column (default: 180)"},
		&cli.BoolFlag{Name: flagMono, Usage: "shades of grey only"},
		&cli.BoolFlag{Name: flagNoTitle, Usage: "leave title and subtitle to the caption"},
		&cli.IntFlag{Name: flagDPI, Value: 300, Usage: "dots per inch of a .png (default: 300)"},
	}
}

// drawChart draws a chart of each outcome.
func drawChart(c *cli.Context, kind chartKind) error {
	out := c.String(flagOut)
	ink, err := inkFor(out)
	if err != nil {
		return err
	}
	style, err := chartStyle(c, out)
	if err != nil {
		return err
	}
	want, err := kind.want(c)
	if err != nil {
		return err
	}
	s, err := analyse(c, want)
	if err != nil {
		return err
	}
	missing := missingGlyphs(s)
	if ink != ".svg" && missing != "" {
		fmt.Fprintln(c.App.ErrWriter, "steelyard: "+missing)
	}
	undrawn := false
	for i := range s.Outcomes {
		o := &s.Outcomes[i]
		document, err := kind.draw(s, o, style)
		switch {
		case err != nil && len(s.Outcomes) == 1:
			return err
		case err != nil:
			undrawn = true
			fmt.Fprintf(c.App.ErrWriter, "steelyard: no chart of %s: %s\n", heading(s, o), err)
			continue
		}
		if err := draw(c, ink, outcomePath(out, s, i), document); err != nil {
			return err
		}
		if o.Counts.Wrong > 0 {
			fmt.Fprintf(c.App.ErrWriter, "steelyard: %s: %d of %d rows pooled; \"steelyard pool\" names the others\n", heading(s, o), len(o.Studies), o.Counts.Rows)
		}
	}
	if undrawn {
		return &rowsLeftOut{}
	}
	return incomplete(s)
}

// inkFor chooses the format by the ending of the output's name.
func inkFor(out string) (string, error) {
	switch ending := strings.ToLower(filepath.Ext(out)); ending {
	case ".svg", ".pdf", ".png":
		return ending, nil
	case "":
		if out == "" {
			return "", &callError{"where to? add --out F.svg, F.pdf or F.png"}
		}
		return "", &callError{fmt.Sprintf("--out %s has no ending; name it .svg, .pdf or .png", out)}
	default:
		return "", &callError{fmt.Sprintf("--out %s: %s is no format of a chart; name it .svg, .pdf or .png", out, ending)}
	}
}

// chartStyle reads the flags on how a chart looks.
func chartStyle(c *cli.Context, out string) (layout.Style, error) {
	style := layout.Style{NoTitle: c.Bool(flagNoTitle)}
	switch width := c.Int(flagWidth); width {
	case 180:
	case 85:
		style.Width = layout.NarrowWidth
	default:
		return style, &callError{fmt.Sprintf("--width %d: charts are 180 mm wide, for a page, or 85 mm, for a column", width)}
	}
	if ending := strings.ToLower(filepath.Ext(out)); c.IsSet(flagDPI) && ending != ".png" {
		return style, &callError{fmt.Sprintf("--dpi is for .png; %s is sharp at any size", ending)}
	}
	var err error
	if style.Contours, err = contours(c); err != nil {
		return style, err
	}
	if dpi := c.Int(flagDPI); dpi < 50 || dpi > 1200 {
		return style, &callError{fmt.Sprintf("--dpi %d: give 50 to 1200", dpi)}
	}
	return style, nil
}

// outcomePath is the output's name; with several outcomes each has its number
// and name in it.
func outcomePath(out string, s *synthesis.Synthesis, i int) string {
	if len(s.Outcomes) == 1 {
		return out
	}
	ending := filepath.Ext(out)
	return fmt.Sprintf("%s-%d%s", strings.TrimSuffix(out, ending), i+1, ending)
}

// draw writes a chart in the format of its ending. An image of a chart of several
// pages has a file for each.
func draw(c *cli.Context, ink, path string, document layout.Document) error {
	theme := layout.Light
	if c.Bool(flagMono) {
		theme = layout.Mono
	}
	if ink == ".pdf" {
		var b bytes.Buffer
		if err := forest.WritePDF(&b, document, theme); err != nil {
			return err
		}
		return written(c, path, b.Bytes())
	}
	for i, page := range document.Pages {
		var b bytes.Buffer
		var err error
		if ink == ".svg" {
			err = forest.WriteSVG(&b, page, theme)
		} else {
			err = forest.WritePNG(&b, page, theme, c.Int(flagDPI))
		}
		if err != nil {
			return err
		}
		name := path
		if len(document.Pages) > 1 {
			name = fmt.Sprintf("%s-page%d%s", strings.TrimSuffix(path, ink), i+1, ink)
		}
		if err := written(c, name, b.Bytes()); err != nil {
			return err
		}
	}
	return nil
}

// written writes a chart and names it on standard output.
func written(c *cli.Context, path string, content []byte) error {
	if err := writeWhole(path, content, c.Bool(flagOverwrite)); err != nil {
		return err
	}
	fmt.Fprintln(c.App.Writer, path)
	return nil
}

// missingGlyphs names the studies whose names the charts' font cannot write;
// blank if there is none.
func missingGlyphs(s *synthesis.Synthesis) string {
	var names []string
	for _, o := range s.Outcomes {
		for _, study := range o.Studies {
			name := study.Source.Name
			lacks := strings.ContainsFunc(name, func(r rune) bool { return !layout.Has(r) })
			if lacks && !slices.Contains(names, name) {
				names = append(names, name)
			}
		}
	}
	if len(names) == 0 {
		return ""
	}
	shown := names[:min(len(names), mostFindings)]
	text := fmt.Sprintf("the charts' font cannot write all of %s", strings.Join(shown, ", "))
	if len(names) > len(shown) {
		text += fmt.Sprintf(" and %d more", len(names)-len(shown))
	}
	return text + "; what it lacks is drawn as □ in .pdf and .png: use .svg, or other spellings"
}
