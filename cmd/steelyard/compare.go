package main

import (
	"fmt"
	"path/filepath"
	"strings"

	"github.com/urfave/cli/v2"

	"steelyard/forest/words"
	"steelyard/ingest/agree"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// checkSheet reads and pools the call's sheet; with --compare it adds how another
// extraction differs, and what each choice does to the answer.
func checkSheet(c *cli.Context) (*synthesis.Synthesis, *review.Extraction, *synthesis.ComparedDocument, error) {
	settle := c.String(flagSettle)
	switch {
	case settle != "" && c.String(flagCompare) == "":
		return nil, nil, nil, &callError{fmt.Sprintf("--%s writes what two sheets differ in; name the other with --%s", flagSettle, flagCompare)}
	case settle != "" && !strings.EqualFold(filepath.Ext(settle), ".xlsx"):
		return nil, nil, nil, &callError{fmt.Sprintf("--%s %s: it is a workbook; name it .xlsx", flagSettle, settle)}
	}
	s, x, err := analyseSheet(c, synthesis.Want{})
	if err != nil || c.String(flagCompare) == "" {
		return s, x, nil, err
	}
	other, _, err := checkedSheet(c, c.String(flagCompare))
	if err != nil {
		return nil, nil, nil, err
	}
	t, err := pooledSheet(c, other, s.Plan, synthesis.Want{})
	if err != nil {
		return nil, nil, nil, err
	}
	comparison := agree.Compare(x, other)
	comparison.Weigh(s, t)
	x.Findings = append(x.Findings, comparison.Findings()...)
	if s, err = pooledSheet(c, x, s.Plan, synthesis.Want{}); err != nil {
		return nil, nil, nil, err
	}
	if settle != "" {
		content, err := comparison.Workbook(s.Plan)
		if err != nil {
			return nil, nil, nil, err
		}
		if sameFile(c.Args().First(), settle) || sameFile(c.String(flagCompare), settle) {
			return nil, nil, nil, &callError{fmt.Sprintf("the input is never overwritten; choose another name for --%s", flagSettle)}
		}
		if err := writeWhole(settle, content, c.Bool(flagOverwrite)); err != nil {
			return nil, nil, nil, err
		}
	}
	return s, x, comparedDocument(comparison), nil
}

func comparedDocument(c *agree.Comparison) *synthesis.ComparedDocument {
	source := c.Second.Source
	d := &synthesis.ComparedDocument{
		Other:     synthesis.SourceDocument{File: source.File, Sheet: source.Sheet, SHA256: source.SHA256},
		OnlyFirst: len(c.OnlyFirst), OnlySecond: len(c.OnlySecond),
	}
	for i := range c.Pairs {
		switch p := &c.Pairs[i]; {
		case p.Differing():
			d.Differing++
			if p.Large {
				d.Large++
			}
		case len(p.Cells) > 0:
			d.Rounding++
		default:
			d.Identical++
		}
	}
	return d
}

// comparedText says how many rows of two sheets agree.
func comparedText(d *synthesis.ComparedDocument) string {
	text := fmt.Sprintf("compared with %s: %s identical, %s within rounding, %s",
		d.Other.File, words.Number(d.Identical, "row", "rows"), words.Count(d.Rounding), words.Number(d.Differing, "differs", "differ"))
	if d.Large > 0 {
		text += fmt.Sprintf(" (%s by 0.1 SD or 10%%)", words.Count(d.Large))
	}
	if d.OnlyFirst+d.OnlySecond > 0 {
		text += fmt.Sprintf("; %s in the first sheet only, %s in the second only", words.Count(d.OnlyFirst), words.Count(d.OnlySecond))
	}
	return text
}
