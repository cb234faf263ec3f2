package main

import (
	"fmt"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"github.com/urfave/cli/v2"

	"steelyard/forest/report/cards"
	"steelyard/forest/words"
	"steelyard/meta/panel"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// flagEarlier names an earlier result to hold the thresholds against.
const flagEarlier = "earlier"

func panelCommand() *cli.Command {
	return &cli.Command{
		Name:      "panel",
		Usage:     "what a guideline panel reads: absolute effects, thresholds, domains of certainty",
		UsageText: "steelyard panel FILE [flags]",
		Description: "One card per outcome: the effect per 1000 people at each baseline risk, the number needed to treat,\n" +
			"what the data say of an important difference, and the numbers beside each domain of certainty. No\n" +
			"certainty is computed: ratings and reasons come from the sheet \"judgement\", or NAME.judgement.csv\n" +
			"beside a text file (outcome, domain, rating, reason, by, date), and are printed as the panel's own.\n" +
			"Example: steelyard panel FILE --baseline \"low 0.05, high 0.2\" --important-per-1000 20\n" +
			"With --out CARDS.xlsx the cards are written as a workbook.",
		Flags: slices.Concat(sheetFlags(), settingFlags("panel"), []cli.Flag{
			earlierFlag(),
			formatFlag(),
		}, outputFlags()),
		Action: runPanel,
	}
}

func earlierFlag() cli.Flag {
	return &cli.StringFlag{Name: flagEarlier, Usage: "an earlier result in JSON: a threshold that it did not have is flagged as entered after results"}
}

func runPanel(c *cli.Context) error {
	workbook := strings.ToLower(filepath.Ext(c.String(flagOut))) == ".xlsx"
	var format answerFormat
	var err error
	switch {
	case workbook && c.IsSet(flagFormat):
		return &callError{fmt.Sprintf("--out %s is a workbook; leave --format %s away", c.String(flagOut), c.String(flagFormat))}
	case !workbook:
		if format, err = outputWanted(c); err != nil {
			return err
		}
	}
	want, err := wantPanel(c)
	if err != nil {
		return err
	}
	s, err := analyse(c, want)
	if err != nil {
		return err
	}
	if err := panelUsable(c, s); err != nil {
		return err
	}
	if err := replyCards(c, workbook, format, s); err != nil {
		return err
	}
	return incomplete(s)
}

// replyCards delivers the cards as a workbook or in a format; CSV has a row for each
// outcome and baseline.
func replyCards(c *cli.Context, workbook bool, format answerFormat, s *synthesis.Synthesis) error {
	if !workbook {
		return reply(c, format, panelAnswer(s), s.Document(version), "outcomes", "panel", "rows")
	}
	content, err := cards.Workbook(s)
	if err != nil {
		return err
	}
	return deliver(c, content)
}

// mostEarlier bounds what is read of an earlier result, in bytes.
const mostEarlier = 64 << 20

// wantPanel reads the flags of the panel's cards.
func wantPanel(c *cli.Context) (synthesis.Want, error) {
	wanted := &synthesis.PanelWanted{}
	want := synthesis.Want{Further: synthesis.Further{Panel: wanted}}
	path := c.String(flagEarlier)
	if path == "" {
		return want, nil
	}
	f, err := os.Open(path)
	if err != nil {
		return want, &fileError{fmt.Errorf("--earlier %s: %w", path, plainCause(err))}
	}
	defer f.Close()
	data, err := io.ReadAll(io.LimitReader(f, mostEarlier+1))
	switch {
	case err != nil:
		return want, &fileError{fmt.Errorf("--earlier %s: %w", path, plainCause(err))}
	case len(data) > mostEarlier:
		return want, &fileError{fmt.Errorf("--earlier %s is larger than %d MB; name a result that --format json wrote", path, mostEarlier>>20)}
	}
	if wanted.Earlier, err = synthesis.ReadEarlier(data, filepath.Base(path)); err != nil {
		return want, &fileError{fmt.Errorf("--earlier: %w", err)}
	}
	return want, nil
}

// panelUsable refuses cards on which a judgement would be missing, and settings of the
// call that no outcome can use.
func panelUsable(c *cli.Context, s *synthesis.Synthesis) error {
	var wrong []string
	for _, f := range s.Findings {
		if f.Rule == review.RuleJudgement {
			wrong = append(wrong, fmt.Sprintf("%s: %s", f.Place, f.Message))
		}
	}
	if len(wrong) > 0 {
		return fmt.Errorf("the panel's judgements cannot be read whole, and none may be dropped in silence:\n  %s", strings.Join(wrong, "\n  "))
	}
	unused := ""
	for i := range s.Outcomes {
		p := s.Outcomes[i].Panel
		if p == nil {
			continue
		}
		if panel.HasAbsolute(s.Outcomes[i].Analysis.Measure) {
			return nil
		}
		unused = p.NoAbsolute
	}
	for _, name := range []string{review.SettingBaseline, review.SettingPer1000} {
		if c.IsSet(name) && unused != "" {
			return &callError{fmt.Sprintf("--%s has no use here: %s", name, unused)}
		}
	}
	return nil
}

// panelAnswer writes the cards.
func panelAnswer(s *synthesis.Synthesis) *page {
	var p page
	for i := range s.Outcomes {
		o := &s.Outcomes[i]
		if i > 0 {
			p.line("")
		}
		if o.Result == nil || o.Panel == nil {
			p.line(heading(s, o))
			p.leftOut(s, o)
			p.wrapped("", "No result: "+o.Problem)
			continue
		}
		p.card(s, o, words.PanelCard(s, o))
	}
	p.findings(s)
	p.line("")
	p.line("Cautions")
	for _, caution := range s.Cautions {
		p.item("·", caution)
	}
	return &p
}

// card writes one card.
func (p *page) card(s *synthesis.Synthesis, o *synthesis.Outcome, card words.Card) {
	p.line(card.Title)
	p.leftOut(s, o)
	p.wrapped("", card.Pooled)
	p.line("")
	for _, sentence := range card.Sentences {
		p.wrapped("", sentence)
	}
	p.line("")
	for _, fact := range card.Facts {
		p.row(fact.Label, fact.Text)
	}
	if t := card.Absolute; t != nil {
		p.line("")
		p.absolute(*t)
	}
	if len(card.Large) > 0 {
		p.line("")
		p.section("  Large enough to matter?")
	}
	for _, fact := range card.Large {
		if fact.Label != "" {
			p.item("·", fact.Label)
		}
		p.item(" ", fact.Text)
	}
	p.line("")
	p.section("  Domains of certainty: the numbers each asks about, and the panel's own rating")
	for _, domain := range append(slices.Clone(card.Domains), card.Certainty) {
		p.row(domain.Domain, ratingText(domain))
		for _, number := range domain.Numbers {
			p.row("", number)
		}
	}
	p.line("")
	for _, remark := range card.Remarks {
		p.item("·", remark)
	}
}

// widestNeeded is how wide the numbers needed to treat may be to stand in the table.
const widestNeeded = 28

// absolute writes the effects by baseline; numbers needed that are too long for the
// table follow below it.
func (p *page) absolute(t words.Table) {
	last := len(t.Heads) - 1
	long := slices.ContainsFunc(t.Rows, func(row []string) bool { return width(row[last]) > widestNeeded })
	shown := last + 1
	if long {
		shown = last
	}
	columns := make([]column, shown)
	var rows [][]string
	for i, head := range t.Heads[:shown] {
		columns[i] = column{head: head}
	}
	for _, row := range t.Rows {
		rows = append(rows, slices.Clone(row[:shown]))
	}
	const narrowestBaseline, widestBaseline = 20, 40
	p.tableNamed(columns, rows, narrowestBaseline, widestBaseline)
	if !long {
		return
	}
	for _, row := range t.Rows {
		p.item("·", t.Heads[last]+", from "+row[0]+": "+row[last])
	}
}

// ratingText is the panel's rating with its reason.
func ratingText(d words.DomainCard) string {
	if !d.Rated {
		return d.Rating
	}
	return fmt.Sprintf("panel: %s; %s", d.Rating, d.Reason)
}
