package main

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"slices"
	"sync"

	"github.com/urfave/cli/v2"

	"steelyard/forest/layout"
	"steelyard/forest/report"
	"steelyard/forest/webpage"
	"steelyard/forest/whatif"
	"steelyard/forest/words"
	"steelyard/ingest/rules"
	"steelyard/meta"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// flagSince names an earlier sheet of the review.
const flagSince = "since"

func reportCommand() *cli.Command {
	return &cli.Command{
		Name:      "report",
		Usage:     "write one page that a panel can read, print and question, with figures and data",
		UsageText: "steelyard report FILE --out FOLDER [flags]",
		Description: "Writes report.html, which needs no network, results.json, audit.xlsx and figures/ (SVG, PDF and\n" +
			"PNG, 180 and 85 mm wide) to the folder. It is built aside and put in place whole; with\n" +
			"--overwrite only files that an earlier report wrote there are replaced. The same input gives the\n" +
			"same files.",
		Flags: slices.Concat([]cli.Flag{
			&cli.StringFlag{Name: flagOut, Usage: "folder to write"},
			&cli.BoolFlag{Name: flagOverwrite, Usage: "replace an earlier report in that folder"},
			&cli.StringFlag{Name: flagSince, Usage: "an earlier sheet of the same review, with its own plan: what changed since stands on the page"},
			&cli.BoolFlag{Name: flagMono, Usage: "figures in shades of grey only"},
			&cli.BoolFlag{Name: flagStatic, Usage: "leave out of the page what computes changed analyses: a smaller page that only shows"},
		}, sheetFlags(), reportSettings(), workFlags()),
		Action: writeReport,
	}
}

// reportSettings are the settings of all commands whose results the report shows.
func reportSettings() []cli.Flag {
	flags := settingFlags("cumulative")
	for _, command := range []string{"panel"} {
		for _, flag := range settingFlags(command) {
			if !slices.ContainsFunc(flags, func(f cli.Flag) bool { return f.Names()[0] == flag.Names()[0] }) {
				flags = append(flags, flag)
			}
		}
	}
	return flags
}

// reported is what the parts of a report are made from.
type reported struct {
	sheet *review.Extraction
	*synthesis.Synthesis
	theme  layout.Theme
	work   meta.Work
	change *synthesis.Change // since an earlier sheet; nil: not wanted
	live   *webpage.Live     // nil for a page that only shows
}

// reportParts make the files of a report, each its own.
var reportParts = []func(context.Context, reported) ([]report.File, error){
	reportPage,
	reportResults,
	reportFigures,
	reportAudit,
	reportChange,
}

// reportChange writes what changed since an earlier sheet, if one is named.
func reportChange(_ context.Context, r reported) ([]report.File, error) {
	if r.change == nil {
		return nil, nil
	}
	content, err := indented(r.change.Document(version, words.ChangeConclusion(r.change)))
	return []report.File{{Name: "change.json", Content: content}}, err
}

func reportPage(_ context.Context, r reported) ([]report.File, error) {
	content, err := webpage.Page(r.Synthesis, webpage.Options{Version: version, Change: r.change, Live: r.live})
	return []report.File{{Name: "report.html", Content: content}}, err
}

func reportResults(_ context.Context, r reported) ([]report.File, error) {
	content, err := indented(r.Document(version))
	return []report.File{{Name: "results.json", Content: content}}, err
}

func reportFigures(ctx context.Context, r reported) ([]report.File, error) {
	return report.Figures(ctx, r.Synthesis, r.theme, r.work)
}

func writeReport(c *cli.Context) error {
	folder := c.String(flagOut)
	if folder == "" || folder == "-" {
		return &callError{"where to? add --out FOLDER"}
	}
	if err := checkFolder(folder, c.Bool(flagOverwrite)); err != nil {
		return err
	}
	path, err := inputFile(c)
	if err != nil {
		return err
	}
	x, plan, err := plannedSheet(c, path)
	if err != nil {
		return err
	}
	live, static, err := livePage(c, x, plan)
	if err != nil {
		return err
	}
	rules.Apply(x, plan)
	s, err := pooledSheet(c, x, plan, webpage.Wanted())
	if err != nil {
		return err
	}
	r := reported{sheet: x, Synthesis: s, theme: layout.Light, live: live}
	if c.Bool(flagMono) {
		r.theme = layout.Mono
	}
	if r.work, err = work(c); err != nil {
		return err
	}
	if r.change, err = changeSince(c, x, s); err != nil {
		return err
	}
	if missing := missingGlyphs(s); missing != "" {
		fmt.Fprintln(c.App.ErrWriter, "steelyard: "+missing)
	}
	files, err := makeParts(c.Context, r)
	if err != nil {
		return err
	}
	if err := writeFolder(c.Context, folder, files, c.Bool(flagOverwrite)); err != nil {
		return err
	}
	fmt.Fprintf(c.App.Writer, "%s: %s\n", folder, reportContents(files))
	if static != "" {
		fmt.Fprintln(c.App.ErrWriter, "steelyard: report.html shows the analysis as planned and computes no other: "+static)
	}
	return incomplete(s)
}

// changeSince compares the sheet with the earlier one that the call names, if it does.
func changeSince(c *cli.Context, x *review.Extraction, s *synthesis.Synthesis) (*synthesis.Change, error) {
	path := c.String(flagSince)
	if path == "" {
		return nil, nil
	}
	before, plan, err := checkedSheet(c, path)
	if err != nil {
		return nil, err
	}
	earlier, err := pooledSheet(c, before, plan, webpage.Wanted())
	if err != nil {
		return nil, err
	}
	return synthesis.Compare(synthesis.State{Extraction: before, Synthesis: earlier}, synthesis.State{Extraction: x, Synthesis: s}), nil
}

// livePage returns what lets the page compute changed analyses of the sheet, which is as
// it was read, before the rules are applied; or why the page will only show.
func livePage(c *cli.Context, x *review.Extraction, plan *review.Plan) (live *webpage.Live, static string, err error) {
	if c.Bool(flagStatic) {
		return nil, "as --static asks", nil
	}
	engine, ok := whatif.Packed()
	if !ok {
		return nil, "this program was built without the engine for that; \"make build\" in the source tree builds one with it", nil
	}
	sheet, err := json.Marshal(struct {
		Version    string             `json:"version"`
		Extraction *review.Extraction `json:"extraction"`
		Plan       *review.Plan       `json:"plan"`
	}{version, x, plan})
	if err != nil {
		return nil, "", fmt.Errorf("the sheet for the page: %w", err)
	}
	return &webpage.Live{Code: engine.Code, Worker: engine.Worker, Script: engine.Script, Sheet: sheet}, "", nil
}

// makeParts makes the parts of a report side by side; the files come in the order of the
// parts.
func makeParts(ctx context.Context, r reported) ([]report.File, error) {
	parts := make([][]report.File, len(reportParts))
	errs := make([]error, len(reportParts))
	var group sync.WaitGroup
	for i, part := range reportParts {
		group.Go(func() { parts[i], errs[i] = part(ctx, r) })
	}
	group.Wait()
	return slices.Concat(parts...), errors.Join(errs...)
}

// reportContents says what a report's folder holds.
func reportContents(files []report.File) string {
	figures := 0
	text := ""
	for _, f := range files {
		if len(f.Name) > len("figures/") && f.Name[:len("figures/")] == "figures/" {
			figures++
			continue
		}
		text += f.Name + ", "
	}
	return fmt.Sprintf("%s%d figures", text, figures)
}
