package main

import (
	"fmt"
	"slices"

	"github.com/urfave/cli/v2"

	"steelyard/forest/words"
	"steelyard/meta/synthesis"
)

// Names of the flags of the accrual commands.
const (
	flagBelow  = "below"
	flagStudy  = "study"
	flagSample = "sample"
)

// accrualKind is a command that shows how the evidence came about.
type accrualKind struct {
	name, usage, description string
	flags                    []cli.Flag
	want                     func(c *cli.Context) (synthesis.Want, error)
	write                    func(p *page, s *synthesis.Synthesis, o *synthesis.Outcome)
	records                  []string // where the JSON holds its table; see records
}

func accrualCommands() []*cli.Command {
	var commands []*cli.Command
	for _, kind := range []accrualKind{
		{
			name: "cumulative", usage: "the result as each study arrived",
			description: "Studies enter by date; those of one date together unless --ties file. Without dates, and beyond\n" +
				"a column named by --order, they enter in the order of the file. The model is refitted at each step.\n" +
				"With --looks: how often looks at a growing review pass each step by chance alone.",
			flags:   looksFlags(),
			want:    wantCumulative,
			write:   (*page).cumulative,
			records: []string{"outcomes", "cumulative"},
		},
		{
			name: "leave-one-out", usage: "the result without each study, and what each carries",
			description: "With --below the tipping set too: the fewest studies whose removal brings the evidence for an\n" +
				"effect below that many steps (exact up to 20 studies, by greedy removal beyond).",
			flags: []cli.Flag{&cli.Float64Flag{Name: flagBelow, Usage: "steps of evidence for the tipping set, such as 2 (14 : 1)"}},
			want: func(c *cli.Context) (synthesis.Want, error) {
				want := synthesis.Want{LeaveOneOut: true}
				if c.IsSet(flagBelow) {
					below := c.Float64(flagBelow)
					if !(-1e6 < below && below < 1e6) {
						return want, &callError{fmt.Sprintf("--below %v: give a number of steps, such as 2", below)}
					}
					want.Below = &below
				}
				return want, nil
			},
			write:   (*page).leaveOneOut,
			records: []string{"outcomes", "leave_one_out"},
		},
		{
			name: "influence", usage: "how each study pulls on the result",
			want:    func(*cli.Context) (synthesis.Want, error) { return synthesis.Want{Influence: true}, nil },
			write:   (*page).influence,
			records: []string{"outcomes", "influence"},
		},
		{
			name: "subsets", usage: "the result of every subset of the studies",
			description: "Every subset of up to 24 studies; a seeded sample beyond.",
			flags:       subsetsFlags(),
			want:        wantSubsets,
			write:       (*page).subsets,
			records:     []string{"outcomes", "subsets"},
		},
		{
			name: "next-trial", usage: "what one more study could change",
			description: "The chance that the review, pooled anew with the next study, passes each step and that its\n" +
				"interval excludes no effect or the important difference; over sizes of the study, and the smallest\n" +
				"that suffices.\n" +
				"Example: steelyard next-trial FILE --size 400 --control-risk 0.2",
			flags:   nextFlags(),
			want:    wantNext,
			write:   (*page).next,
			records: []string{"outcomes", "next_trial", "size_curve"},
		},
	} {
		commands = append(commands, kind.command())
	}
	return commands
}

// subsetsFlags say which subsets are taken and told apart.
func subsetsFlags() []cli.Flag {
	return []cli.Flag{
		&cli.StringFlag{Name: flagStudy, Usage: "a study: subsets with and without it are counted apart"},
		&cli.IntFlag{Name: flagSample, Usage: "subsets to draw of more than 24 studies"},
	}
}

func wantSubsets(c *cli.Context) (synthesis.Want, error) {
	wanted := &synthesis.SubsetsWanted{Study: c.String(flagStudy), Sample: c.Int(flagSample)}
	if c.IsSet(flagSample) && (wanted.Sample < 100 || wanted.Sample > 1<<26) {
		return synthesis.Want{}, &callError{fmt.Sprintf("--sample %d: give 100 to %d", wanted.Sample, 1<<26)}
	}
	return synthesis.Want{Subsets: wanted}, nil
}

func (k accrualKind) command() *cli.Command {
	return &cli.Command{
		Name:        k.name,
		Usage:       k.usage,
		UsageText:   fmt.Sprintf("steelyard %s FILE [flags]", k.name),
		Description: k.description,
		Flags:       slices.Concat(k.flags, sheetFlags(), settingFlags(k.name), []cli.Flag{formatFlag()}, outputFlags(), workFlags()),
		Action: func(c *cli.Context) error {
			format, err := outputWanted(c)
			if err != nil {
				return err
			}
			want, err := k.want(c)
			if err != nil {
				return err
			}
			s, err := analyse(c, want)
			if err != nil {
				return err
			}
			records := k.records
			if next, ok := want.Next.(*synthesis.NextWanted); ok && next.SE > 0 { // no sizes to list: the outlook is the table
				records = []string{"outcomes", "next_trial", "outlook"}
			}
			if err := reply(c, format, accrualAnswer(s, k.write), s.Document(version), records...); err != nil {
				return err
			}
			return incomplete(s)
		},
	}
}

// accrualAnswer is the answer of an accrual command: each outcome's table, and the
// cautions that belong to it.
func accrualAnswer(s *synthesis.Synthesis, write func(*page, *synthesis.Synthesis, *synthesis.Outcome)) *page {
	var p page
	p.outcomes(s, func(o *synthesis.Outcome) {
		if text := words.Rests(o); text != "" && !o.Analysis.NullMissing {
			p.wrapped("", "Evidence: "+text)
		}
		p.line("")
		if o.Accrual != nil {
			write(&p, s, o)
		}
	})
	p.line("")
	p.flagged(s)
	p.item("·", synthesis.AccrualCaution)
	p.item("·", synthesis.EvidenceCaution(s.Forms()...))
	return &p
}

// outcomes writes for each outcome what was pooled and left out, then what write adds
// where there is a result, then what was assumed.
func (p *page) outcomes(s *synthesis.Synthesis, write func(*synthesis.Outcome)) {
	for i := range s.Outcomes {
		o := &s.Outcomes[i]
		if i > 0 {
			p.line("")
		}
		p.line(heading(s, o))
		p.leftOut(s, o)
		if o.Result == nil {
			p.wrapped("", "No result: "+o.Problem)
			continue
		}
		p.wrapped("", words.Pooled(s, o))
		write(o)
		for _, note := range o.Notes {
			p.item("·", note)
		}
	}
}
