package main

import (
	"strings"

	"github.com/urfave/cli/v2"

	"steelyard/forest/layout"
	"steelyard/meta/synthesis"
)

// flagContours chooses what the lines of a funnel chart join.
const flagContours = "contours"

func contourFlags() []cli.Flag {
	return []cli.Flag{&cli.StringFlag{Name: flagContours, Usage: "what its lines join: " + strings.Join(layout.ContourNames(), " or ") + " (default: evidence, a step apart)"}}
}

// contours reads what the lines of a funnel chart join.
func contours(c *cli.Context) (layout.Contours, error) {
	if !c.IsSet(flagContours) {
		return layout.EvidenceContours, nil
	}
	kind, err := layout.ParseContours(c.String(flagContours))
	if err != nil {
		return kind, &callError{"--contours: " + err.Error()}
	}
	return kind, nil
}

// wantAsymmetry asks for the tests that a note on a chart speaks of.
func wantAsymmetry() synthesis.Want {
	return synthesis.Want{Further: synthesis.Further{SmallStudy: &synthesis.SmallStudyWanted{}}}
}
