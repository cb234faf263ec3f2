package main

import (
	"fmt"
	"slices"

	"github.com/urfave/cli/v2"

	"steelyard/meta/synthesis"
)

// Names of the flags on small studies.
const (
	flagAllowFew = "allow-few"
	flagStep     = "step"
)

func smallStudyCommand() *cli.Command {
	return &cli.Command{
		Name:      "small-study",
		Usage:     "whether small studies show other effects, and what if some are missing",
		UsageText: "steelyard small-study FILE [flags]",
		Description: "Tests of asymmetry, and the effect and its evidence under several ideas of what is missing. Not run\n" +
			"below 10 studies unless --allow-few, nor where all are alike in precision. Asymmetry has other\n" +
			"causes than missing studies; see also: steelyard chart funnel.",
		Flags: slices.Concat([]cli.Flag{
			&cli.BoolFlag{Name: flagAllowFew, Usage: "run below 10 studies too, where such tests find little and mislead easily"},
			&cli.Float64Flag{Name: flagStep, Usage: "one-sided p above which the selection model takes results to be seen less often (default: 0.025)", Value: 0.025},
		}, sheetFlags(), settingFlags("small-study"), []cli.Flag{formatFlag()}, outputFlags()),
		Action: smallStudy,
	}
}

func smallStudy(c *cli.Context) error {
	format, err := outputWanted(c)
	if err != nil {
		return err
	}
	step := c.Float64(flagStep)
	if !(step > 0 && step < 0.5) {
		return &callError{fmt.Sprintf("--step %v: give a one-sided p above 0 and below 0.5, such as 0.025", step)}
	}
	s, err := analyse(c, synthesis.Want{Further: synthesis.Further{SmallStudy: &synthesis.SmallStudyWanted{AllowFew: c.Bool(flagAllowFew), Step: step}}})
	if err != nil {
		return err
	}
	if err := reply(c, format, smallStudyAnswer(s), s.Document(version), "outcomes", "small_study", "adjusted"); err != nil {
		return err
	}
	return incomplete(s)
}

// smallStudyAnswer is the text of the command: each outcome's tests and adjusted
// results, and the cautions that belong to them.
func smallStudyAnswer(s *synthesis.Synthesis) *page {
	var p page
	p.outcomes(s, func(o *synthesis.Outcome) {
		p.line("")
		p.smallStudies(s, o)
	})
	p.line("")
	p.line("Cautions")
	p.flagged(s)
	p.item("·", synthesis.SmallStudyCaution)
	p.item("·", synthesis.NoProofCaution)
	p.item("·", synthesis.EvidenceCaution(s.Forms()...))
	return &p
}
