package main

import (
	"encoding/json"
	"fmt"
	"path/filepath"
	"slices"
	"strings"

	"github.com/urfave/cli/v2"
)

// answerFormat is the form in which an answer is delivered.
type answerFormat int

const (
	asText     answerFormat = iota // for reading on a terminal
	asJSON                         // for programs: the documented JSON
	asCSV                          // for programs: one row for each entry of the command's table
	asMarkdown                     // for pasting into a document
)

// formatNames are the values of --format, in the order of the constants.
var formatNames = []string{"text", "json", "csv", "markdown"}

// formatEndings are the endings of file names that promise a format.
var formatEndings = map[string]answerFormat{".json": asJSON, ".csv": asCSV, ".md": asMarkdown, ".markdown": asMarkdown}

func formatFlag() cli.Flag {
	return &cli.StringFlag{Name: flagFormat, Value: "text", Usage: "text for reading, markdown for a document, json or csv for programs"}
}

// outputWanted reads --format and checks that --out fits it.
func outputWanted(c *cli.Context) (answerFormat, error) {
	at := slices.Index(formatNames, c.String(flagFormat))
	if at < 0 {
		return asText, &callError{fmt.Sprintf("--format: %q is not known; use one of: %s", c.String(flagFormat), strings.Join(formatNames, ", "))}
	}
	return answerFormat(at), checkOut(c, answerFormat(at))
}

// checkOut refuses an output whose name promises another kind of file.
func checkOut(c *cli.Context, format answerFormat) error {
	path := c.String(flagOut)
	if path == "" && c.IsSet(flagOut) {
		return &callError{"--out needs the name of a file, or - for the terminal"}
	}
	ending := strings.ToLower(filepath.Ext(path))
	promised, promises := formatEndings[ending]
	switch {
	case promises && promised != format:
		return &callError{fmt.Sprintf("--out %s would hold %s; add --format %s, or name it %s", path, formatNames[format], formatNames[promised], usualEnding(format))}
	case slices.Contains([]string{".svg", ".pdf", ".png", ".xlsx", ".html"}, ending):
		kinds := "text, Markdown, JSON or CSV"
		if c.Command.Name == "panel" {
			kinds = "text, Markdown, JSON, CSV or a workbook (.xlsx)"
		}
		return &callError{fmt.Sprintf("--out %s: this command writes %s; name it %s", path, kinds, usualEnding(format))}
	}
	return nil
}

// usualEnding is how a file of a format is named.
func usualEnding(format answerFormat) string {
	return [...]string{asText: ".txt", asJSON: ".json", asCSV: ".csv", asMarkdown: ".md"}[format]
}

// reply delivers a command's answer in the wanted format. Text and Markdown are made
// from the page; JSON is the document itself, and CSV the list of the document that
// stands at table, a path of JSON names such as "outcomes", "cumulative": one row for
// each entry, in full precision (see records). Without a path CSV is one row.
func reply(c *cli.Context, format answerFormat, p *page, document any, table ...string) error {
	var content []byte
	var err error
	switch format {
	case asJSON:
		content, err = indented(document)
	case asCSV:
		content = records(document, table...)
	case asMarkdown:
		content = []byte(markdown(p))
	default:
		content = []byte(p.String())
	}
	if err != nil {
		return err
	}
	return deliver(c, content)
}

// indented returns a value as JSON for reading, with a line end.
func indented(v any) ([]byte, error) {
	content, err := json.MarshalIndent(v, "", "  ")
	return append(content, '\n'), err
}
