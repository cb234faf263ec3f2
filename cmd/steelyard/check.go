package main

import (
	"fmt"
	"slices"
	"strings"

	"github.com/urfave/cli/v2"

	"steelyard/forest/words"
	"steelyard/ingest/rules"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// Names of check's own flags: the catalogue in place of a sheet's findings, another
// extraction to compare with, and the workbook to settle the differences in.
const (
	flagRules   = "rules"
	flagCompare = "compare"
	flagSettle  = "settle"
)

func checkCommand() *cli.Command {
	return &cli.Command{
		Name:      "check",
		Usage:     "look through a sheet for errors of extraction before it is pooled",
		UsageText: "steelyard check FILE [--compare OTHER [--settle F.xlsx]] [flags]\n  steelyard check --rules",
		Description: "Lists what the catalogue of rules finds, errors first. Rows with an error are not pooled until they\n" +
			"are mended, or accepted by writing the rule and a reason in the accept column. Nothing is corrected;\n" +
			"where a number can be read in two ways, the pooled answer under each is printed. With --compare, two\n" +
			"extractions of the same studies are set side by side, rows paired by outcome and id, else by\n" +
			"name and year.",
		Flags: slices.Concat([]cli.Flag{
			&cli.BoolFlag{Name: flagRules, Usage: "list the catalogue: every rule with its threshold and source"},
			&cli.StringFlag{Name: flagCompare, Usage: "another extraction of the same studies: what differs, and what each choice does to the answer"},
			&cli.StringFlag{Name: flagSettle, Usage: "workbook to write, F.xlsx, in which the differences are settled; it is read back as the agreed sheet"},
		},
			sheetFlags(), settingFlags("check"), []cli.Flag{formatFlag()}, outputFlags()),
		Action: check,
	}
}

func check(c *cli.Context) error {
	format, err := outputWanted(c)
	if err != nil {
		return err
	}
	if c.Bool(flagRules) {
		return listRules(c, format)
	}
	s, x, compared, err := checkSheet(c)
	if err != nil {
		return err
	}
	unchecked := rules.NotChecked(x)
	numbers := 0
	for i := range x.Studies {
		numbers += len(x.Studies[i].Numbers)
	}
	d := s.CheckDocument(version, len(x.Studies), numbers, notCheckedDocuments(unchecked))
	d.Compared = compared
	if err := reply(c, format, checkAnswer(s, x, unchecked, compared), d, "findings"); err != nil {
		return err
	}
	if s.CountFindings().Errors > 0 {
		return &rowsLeftOut{}
	}
	return nil
}

func notCheckedDocuments(unchecked []rules.Unchecked) []synthesis.NotCheckedDocument {
	all := []synthesis.NotCheckedDocument{}
	for _, r := range unchecked {
		d := synthesis.NotCheckedDocument{Rule: r.ID, Title: r.Title}
		for _, f := range r.Missing {
			d.Missing = append(d.Missing, f.String())
		}
		all = append(all, d)
	}
	return all
}

// checkAnswer is the answer of check.
func checkAnswer(s *synthesis.Synthesis, x *review.Extraction, unchecked []rules.Unchecked, compared *synthesis.ComparedDocument) *page {
	var p page
	n := s.CountFindings()
	numbers := 0
	for i := range x.Studies {
		numbers += len(x.Studies[i].Numbers)
	}
	p.line(s.Source.File)
	text := fmt.Sprintf("%s, %s: %s, %s, %s", words.Number(len(x.Studies), "row", "rows"), words.Number(numbers, "number", "numbers"),
		words.Number(n.Errors, "error", "errors"), words.Number(n.Warnings, "warning", "warnings"), words.Number(n.Notes, "note", "notes"))
	if n.Accepted > 0 {
		text += fmt.Sprintf("; %s accepted", words.Count(n.Accepted))
	}
	p.wrapped("", text)
	if compared != nil {
		p.wrapped("", comparedText(compared))
	}
	titles := map[string]string{review.RulePlan: "the plan", review.RuleJudgement: "the panel's judgements"}
	for _, r := range rules.Catalogue() {
		titles[r.ID] = r.Title
	}
	for _, part := range []struct {
		head string
		in   func(f review.Finding) bool
	}{
		{"Errors: not pooled until mended, or accepted with a reason", func(f review.Finding) bool { return f.Severity == review.Error && f.Accepted == "" }},
		{"Warnings", func(f review.Finding) bool { return f.Severity == review.Warning && f.Accepted == "" }},
		{"Notes", func(f review.Finding) bool { return f.Severity == review.Note && f.Accepted == "" }},
		{"Accepted by the reviewers", func(f review.Finding) bool { return f.Accepted != "" }},
	} {
		p.checked(s, part.head, titles, part.in)
	}
	p.unchecked(unchecked)
	p.line("")
	p.item("·", "A clean check does not mean correct data: it finds what contradicts itself or stands out. Have a second person check every number.")
	return &p
}

// checked writes the findings of one kind, grouped by rule.
func (p *page) checked(s *synthesis.Synthesis, head string, titles map[string]string, in func(review.Finding) bool) {
	var those []int
	for i, f := range s.Findings {
		if in(f) {
			those = append(those, i)
		}
	}
	if len(those) == 0 {
		return
	}
	order := map[string]int{}
	for i, r := range rules.Catalogue() {
		order[r.ID] = i
	}
	slices.SortStableFunc(those, func(i, j int) int { return order[s.Findings[i].Rule] - order[s.Findings[j].Rule] })
	p.line("")
	p.line(head)
	rule := ""
	for _, i := range those {
		f := s.Findings[i]
		if f.Rule != rule {
			rule = f.Rule
			p.wrapped(pad(rule, 5), titles[rule])
		}
		p.finding(f)
		p.readings(s, i)
	}
}

// finding writes a finding below its rule: place, study and message.
func (p *page) finding(f review.Finding) {
	text := f.Place.String()
	if about := findingAbout(f); about != "" {
		text += ", " + about
	}
	p.item("·", text+": "+verdict(f))
}

// unchecked writes the rules that the sheet lacks columns for, by the columns; those
// that lack a whole kind of numbers are named together.
func (p *page) unchecked(unchecked []rules.Unchecked) {
	const kind = 3 // columns
	if len(unchecked) == 0 {
		return
	}
	p.line("")
	p.line("Not checked for want of columns")
	var others, order []string
	byColumns := map[string][]string{}
	for _, r := range unchecked {
		if len(r.Missing) >= kind {
			others = append(others, r.ID)
			continue
		}
		var missing []string
		for _, f := range r.Missing {
			missing = append(missing, f.String())
		}
		columns := strings.Join(missing, ", ")
		if byColumns[columns] == nil {
			order = append(order, columns)
		}
		byColumns[columns] = append(byColumns[columns], r.ID+" "+r.Title)
	}
	for _, columns := range order {
		p.item("·", columns+": "+strings.Join(byColumns[columns], "; "))
	}
	if len(others) > 0 {
		p.item("·", "another kind of numbers: "+strings.Join(others, ", "))
	}
}

// ruleList is the catalogue as a table.
type ruleList struct {
	Rules []listedRule `json:"rules"`
}

// listedRule is a rule of the catalogue as a table shows it.
type listedRule struct {
	Rule      string `json:"rule"`
	Title     string `json:"title"`
	Severity  string `json:"severity"`
	Threshold string `json:"threshold"`
	Source    string `json:"source"`
}

// listRules writes the catalogue.
func listRules(c *cli.Context, format answerFormat) error {
	switch {
	case c.NArg() > 0:
		return &callError{fmt.Sprintf("--%s lists the catalogue and takes no file; leave out one of the two: %s", flagRules, c.Args().First())}
	case format == asJSON:
		return &callError{fmt.Sprintf("--%s is for reading; leave --%s json away", flagRules, flagFormat)}
	}
	var p page
	var all ruleList
	for _, r := range rules.Catalogue() {
		p.wrapped(pad(r.ID, 5), r.Title+" ("+r.Severity+"): "+r.Threshold+". Source: "+r.Source+".")
		all.Rules = append(all.Rules, listedRule{r.ID, r.Title, r.Severity, r.Threshold, r.Source})
	}
	return reply(c, format, &p, all, "rules")
}
