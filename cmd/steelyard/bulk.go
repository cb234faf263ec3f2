package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"runtime"
	"slices"

	"github.com/urfave/cli/v2"

	"steelyard/ingest"
	"steelyard/ingest/stream"
	"steelyard/meta"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// Names of bulk's own flags.
const (
	flagSet        = "set"
	flagGroup      = "group"
	flagCollection = "collection"
)

// bulkSettings are the settings that bulk knows.
var bulkSettings = []string{review.SettingMeasure, review.SettingEffects, review.SettingTau, review.SettingInterval,
	review.SettingEvidence, review.SettingLevel, review.SettingNull, review.SettingCorrection}

func bulkCommand() *cli.Command {
	flags := []cli.Flag{
		&cli.StringFlag{Name: flagSet, Usage: "header of the column that names the set of each row (default: set)"},
		&cli.StringSliceFlag{Name: flagColumn, Usage: "which column is which, such as \"estimate=beta\"; may be given more than once"},
		&cli.BoolFlag{Name: flagGroup, Usage: "the rows of a set do not stand together: sort a copy by set on disk, in the folder for temporary files; the results come in that order"},
		&cli.BoolFlag{Name: flagCollection, Usage: "besides, each set beside all others: p adjusted for their number (Benjamini & Hochberg 1995) and its evidence in a collection of sets with and without an effect (Efron 2010)"},
	}
	for _, name := range bulkSettings {
		setting, err := review.FindSetting(name)
		if err != nil {
			panic(err) // a name that the table of settings does not have is a bug of this file
		}
		flags = append(flags, &cli.StringFlag{Name: name, Usage: settingHelp(setting)})
	}
	return &cli.Command{
		Name:      "bulk",
		Usage:     "pool very many sets of a long table, one row of results for each",
		UsageText: "steelyard bulk FILE [flags]",
		Description: "FILE is a text table (.csv, .tsv) with one row for each study and a column \"set\"; - reads\n" +
			"standard input. The rows of a set stand together, in any order of the sets up to a million,\n" +
			"sorted beyond; else --group. Every set is pooled as pool does it alone, to the last digit, but\n" +
			"without the catalogue of rules. A set with a row that cannot be read is reported and left out.\n" +
			"Columns of results: estimate and limits on the analysis scale; effect in the reader's unit;\n" +
			"i2 by tau2; ln_evidence, the natural logarithm of the evidence ratio, and its steps.",
		Flags: slices.Concat(flags, []cli.Flag{
			&cli.StringFlag{Name: flagFormat, Value: "csv", Usage: "csv, or json: one object on each line"},
		}, workFlags(), outputFlags()),
		Action: bulk,
	}
}

func bulk(c *cli.Context) error {
	job, err := newBulkJob(c)
	if err != nil {
		return err
	}
	in, size, err := job.open(c)
	if err != nil {
		return err
	}
	defer in.Close()
	reader, err := job.reader(c, in)
	if err != nil {
		return err
	}
	if job.pooling, err = newBulkPooling(reader.Table, job.asked); err != nil {
		return &callError{err.Error()}
	}
	if c.Bool(flagGroup) {
		sorted, done, err := stream.Group(c.Context, reader)
		if err != nil {
			return bulkFailure(c, err)
		}
		defer done()
		reader = sorted
	}
	out, err := newBulkOutput(c, job.json, job.pooling.scaled)
	if err != nil {
		return err
	}
	defer out.close()
	order := stream.NewOrder(job.file)
	report := &bulkReport{to: c.App.ErrWriter}
	workers := job.work.Workers
	if workers == 0 {
		workers = runtime.GOMAXPROCS(0)
	}
	err = stream.Each(c.Context, reader, workers, func() func(*stream.Block, *bulkResult) { return job.pooling.worker(reader.Table, job.json) },
		func(b *stream.Block, r *bulkResult) error {
			for _, set := range r.sets {
				if err := order.Add(set.name, set.line); err != nil {
					return err
				}
			}
			report.take(r)
			if job.work.Progress != nil && size > 0 {
				job.work.Progress(int(min(b.End, size)), int(size))
			}
			return out.take(r)
		})
	if err == nil {
		err = out.finish(c)
	}
	if err != nil {
		return out.interrupted(c, bulkFailure(c, err))
	}
	return report.close()
}

// bulkJob is what a call of bulk asks for.
type bulkJob struct {
	path, file string
	json       bool
	asked      review.Analysis
	work       meta.Work
	pooling    *bulkPooling
}

func newBulkJob(c *cli.Context) (*bulkJob, error) {
	j := &bulkJob{}
	var err error
	if j.path, err = oneFile(c); err != nil {
		return nil, err
	}
	switch format := c.String(flagFormat); format {
	case "csv":
		err = checkOut(c, asCSV)
	case "json":
		j.json = true
		if filepath.Ext(c.String(flagOut)) != ".jsonl" {
			err = checkOut(c, asJSON)
		}
	default:
		err = &callError{fmt.Sprintf("--format: bulk writes csv or json, not %q", format)}
	}
	if err != nil {
		return nil, err
	}
	plan := &review.Plan{}
	for _, name := range bulkSettings {
		if !c.IsSet(name) {
			continue
		}
		if err := plan.Set(name, "", review.Value{Text: c.String(name), From: review.FromFlag}); err != nil {
			return nil, &callError{"--" + err.Error()}
		}
	}
	if j.asked, err = plan.Analysis(""); err != nil {
		return nil, &callError{err.Error()}
	}
	j.work, err = work(c)
	return j, err
}

// open opens the table; size is 0 where it is not known.
func (j *bulkJob) open(c *cli.Context) (in io.ReadCloser, size int64, err error) {
	if j.path == "-" {
		j.file = "standard input"
		return io.NopCloser(c.App.Reader), 0, nil
	}
	j.file = filepath.Base(j.path)
	if sameFile(j.path, c.String(flagOut)) {
		return nil, 0, &callError{"the input is never overwritten; choose another name for --out"}
	}
	file, err := os.Open(j.path)
	if err != nil {
		return nil, 0, &fileError{fmt.Errorf("cannot read %s: %w", j.path, plainCause(err))}
	}
	if info, err := file.Stat(); err == nil && info.Mode().IsRegular() {
		size = info.Size()
	}
	return file, size, nil
}

// reader reads the header.
func (j *bulkJob) reader(c *cli.Context, in io.Reader) (*stream.Reader, error) {
	options := stream.Options{File: j.file, Set: c.String(flagSet), Columns: map[string]string{}}
	for _, text := range c.StringSlice(flagColumn) {
		field, header, err := ingest.ParseColumn(text)
		if err != nil {
			return nil, &callError{"--column: " + err.Error()}
		}
		options.Columns[field] = header
	}
	type opened struct {
		reader *stream.Reader
		err    error
	}
	ready := make(chan opened, 1)
	go func() {
		r, err := stream.NewReader(in, options)
		ready <- opened{r, err}
	}()
	select {
	case <-c.Context.Done():
		return nil, context.Cause(c.Context)
	case got := <-ready:
		return got.reader, bulkFailure(c, got.err)
	}
}

// bulkFailure tells a file that cannot be read from a table that is wrong.
func bulkFailure(c *cli.Context, err error) error {
	var path *fs.PathError
	if err != nil && c.Context.Err() == nil && errors.As(err, &path) {
		return &fileError{err}
	}
	return err
}

// bulkPooling is how every set is pooled.
type bulkPooling struct {
	rule   *synthesis.SetRule
	fields bulkFields
	scaled bool // the reader's unit is not that of the analysis
}
