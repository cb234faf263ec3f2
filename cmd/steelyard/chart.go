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
	flagNoTitle = "no-title"
	flagDPI     = "dpi"
)

func chartCommand() *cli.Command {
	flags := []cli.Flag{
		&cli.StringFlag{Name: flagOut, Usage: "file to write; its ending chooses the format: .svg, .pdf or .png"},
		&cli.BoolFlag{Name: flagOverwrite, Usage: "replace an output file that exists"},
		&cli.IntFlag{Name: flagWidth, Value: 180, Usage: "width in millimetres: 180 for a page, 85 for a column (default: 180)"},
		&cli.BoolFlag{Name: flagMono, Usage: "shades of grey only"},
		&cli.BoolFlag{Name: flagNoTitle, Usage: "leave title and subtitle to the caption"},
		&cli.IntFlag{Name: flagDPI, Value: 300, Usage: "dots per inch of a .png (default: 300)"},
	}
	return &cli.Command{
		Name:      "chart",
		Usage:     "draw a chart of a sheet",
		UsageText: "steelyard chart KIND FILE --out F.svg|pdf|png [flags]",
		Subcommands: []*cli.Command{{
			Name:      "forest",
			Usage:     "every study, the pooled effect, and the evidence of each",
			UsageText: "steelyard chart forest FILE --out F.svg|pdf|png [flags]",
			Flags:     slices.Concat(flags, sheetFlags(), settingFlags("forest")),
			Action:    chartForest,
		}},
		Action: func(c *cli.Context) error {
			return &callError{"which chart? the kinds are: forest; usage: steelyard chart forest FILE --out F.svg"}
		},
	}
}

func chartForest(c *cli.Context) error {
	out := c.String(flagOut)
	ink, err := inkFor(out)
	if err != nil {
		return err
	}
	style, err := forestStyle(c)
	if err != nil {
		return err
	}
	s, err := analyse(c, synthesis.Want{})
	if err != nil {
		return err
	}
	for i := range s.Outcomes {
		o := &s.Outcomes[i]
		in, err := layout.ForestOf(s, o)
		if err != nil {
			return err
		}
		document, err := layout.Forest(in, style)
		if err != nil {
			return err
		}
		missingGlyphs(c, document)
		if err := draw(c, ink, outcomePath(out, s, i), document); err != nil {
			return err
		}
	}
	if leftOut := incomplete(s); leftOut != nil {
		for _, o := range s.Outcomes {
			if o.Counts.Wrong > 0 {
				fmt.Fprintf(c.App.ErrWriter, "steelyard: %s: %d of %d rows pooled; \"steelyard pool\" names the others\n", heading(s, &o), len(o.Studies), o.Counts.Rows)
			}
		}
		return leftOut
	}
	return nil
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

func forestStyle(c *cli.Context) (layout.ForestStyle, error) {
	style := layout.ForestStyle{NoTitle: c.Bool(flagNoTitle)}
	switch width := c.Int(flagWidth); width {
	case 180:
	case 85:
		style.Width = layout.NarrowWidth
	default:
		return style, &callError{fmt.Sprintf("--width %d: charts are 180 mm wide, for a page, or 85 mm, for a column", width)}
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

// missingGlyphs warns of characters that the charts' font does not have.
func missingGlyphs(c *cli.Context, document layout.Document) {
	if len(document.Missing) > 0 {
		fmt.Fprintf(c.App.ErrWriter, "steelyard: the charts' font has no glyph for %q; they are drawn as □ in .pdf and .png\n", string(document.Missing))
	}
}
