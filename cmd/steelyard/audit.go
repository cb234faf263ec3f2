package main

import (
	"bytes"
	"context"
	"fmt"
	"path/filepath"
	"slices"
	"strings"

	"github.com/urfave/cli/v2"

	"steelyard/forest/report"
	"steelyard/forest/report/audit"
)

func auditCommand() *cli.Command {
	return &cli.Command{
		Name:      "audit",
		Usage:     "write a workbook that shows every step as a formula",
		UsageText: "steelyard audit FILE --out F.xlsx [flags]",
		Description: "The workbook leads from the numbers as read to the answer by formulas that can be followed and\n" +
			"changed in a spreadsheet program: effects, weights, the spread, interval, evidence, cumulative and\n" +
			"leave-one-out results. Its first sheet says what moves and what the program has entered.",
		Flags:  slices.Concat(outputFlags(), sheetFlags(), settingFlags("cumulative"), workFlags()),
		Action: writeAudit,
	}
}

// reportAudit makes the workbook that goes with a report.
func reportAudit(_ context.Context, r reported) ([]report.File, error) {
	var b bytes.Buffer
	err := audit.Write(&b, r.Synthesis, r.sheet, version)
	return []report.File{{Name: "audit.xlsx", Content: b.Bytes()}}, err
}

func writeAudit(c *cli.Context) error {
	out := c.String(flagOut)
	switch {
	case out == "":
		return &callError{"where to? add --out F.xlsx"}
	case !strings.EqualFold(filepath.Ext(out), ".xlsx"):
		return &callError{fmt.Sprintf("--out %s: the audit is a workbook; name it .xlsx", out)}
	}
	s, x, err := analyseSheet(c, audit.Wanted())
	if err != nil {
		return err
	}
	var b bytes.Buffer
	if err := audit.Write(&b, s, x, version); err != nil {
		return err
	}
	if err := written(c, out, b.Bytes()); err != nil {
		return err
	}
	for i := range s.Outcomes {
		o := &s.Outcomes[i]
		switch {
		case o.Result == nil:
			fmt.Fprintf(c.App.ErrWriter, "steelyard: no sheets for %s: %s\n", heading(s, o), o.Problem)
		case o.Counts.Wrong > 0:
			fmt.Fprintf(c.App.ErrWriter, "steelyard: %s: %d of %d rows pooled; \"steelyard pool\" names the others\n", heading(s, o), len(o.Studies), o.Counts.Rows)
		}
	}
	return incomplete(s)
}
