package main

import (
	"errors"
	"fmt"
	"io"
	"os"

	"github.com/urfave/cli/v2"

	"steelyard/ingest"
	"steelyard/ingest/rules"
	"steelyard/meta/accrual"
	"steelyard/meta/choice"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// mostInput bounds what is read from standard input, in bytes.
const mostInput = 200 << 20

// analyse reads the call's file and runs the plan over it; want says which parts
// beyond the pooled results.
func analyse(c *cli.Context, want synthesis.Want) (*synthesis.Synthesis, error) {
	s, _, err := analyseSheet(c, want)
	return s, err
}

// analyseSheet is analyse that hands on the sheet too, as it was read and checked by
// the catalogue of rules.
func analyseSheet(c *cli.Context, want synthesis.Want) (*synthesis.Synthesis, *review.Extraction, error) {
	path, err := inputFile(c)
	if err != nil {
		return nil, nil, err
	}
	x, plan, err := checkedSheet(c, path)
	if err != nil {
		return nil, nil, err
	}
	s, err := pooledSheet(c, x, plan, want)
	return s, x, err
}

// inputFile returns the file that a call names, which no output may replace.
func inputFile(c *cli.Context) (string, error) {
	path, err := oneFile(c)
	if err == nil && sameFile(path, c.String(flagOut)) {
		return "", &callError{"the input is never overwritten; choose another name for --out"}
	}
	return path, err
}

// checkedSheet reads a file with its plan and the call's settings, and adds what the
// catalogue of rules finds.
func checkedSheet(c *cli.Context, path string) (*review.Extraction, *review.Plan, error) {
	x, plan, err := plannedSheet(c, path)
	if err == nil {
		rules.Apply(x, plan)
	}
	return x, plan, err
}

// plannedSheet reads a file with its plan and the call's settings.
func plannedSheet(c *cli.Context, path string) (*review.Extraction, *review.Plan, error) {
	x, plan, err := readSheet(c, path)
	if err != nil {
		return nil, nil, err
	}
	return x, plan, applySettings(c, plan)
}

// pooledSheet runs the plan over a sheet; want says which parts.
func pooledSheet(c *cli.Context, x *review.Extraction, plan *review.Plan, want synthesis.Want) (*synthesis.Synthesis, error) {
	var err error
	want.Outcomes = c.StringSlice(flagOutcome)
	if want.Work, err = work(c); err != nil {
		return nil, err
	}
	s, err := synthesis.Run(c.Context, x, plan, want)
	var unknown *choice.UnknownError
	var input *accrual.InputError
	if errors.As(err, &unknown) || errors.As(err, &input) || isCovariateError(err) {
		return nil, &callError{err.Error()}
	}
	return s, err
}

// readSheet reads a file, or standard input for "-".
func readSheet(c *cli.Context, path string) (*review.Extraction, *review.Plan, error) {
	options := ingest.Options{Sheet: c.String(flagSheet), Columns: map[string]string{}}
	for _, text := range c.StringSlice(flagColumn) {
		field, header, err := ingest.ParseColumn(text)
		if err != nil {
			return nil, nil, &callError{"--column: " + err.Error()}
		}
		options.Columns[field] = header
	}
	if path != "-" {
		return ingest.Open(c.Context, path, options)
	}
	data, err := readInput(c)
	if err != nil {
		return nil, nil, err
	}
	x, plan, err := ingest.Read(c.Context, data, standardInput, options)
	var unknown *ingest.HeaderError
	if errors.As(err, &unknown) {
		unknown.Call = ingest.Call{Path: "-", Sheet: options.Sheet}
	}
	return x, plan, err
}

// standardInput is what messages call a sheet that is read from there.
const standardInput = "standard input"

// inCall is how a sheet's file is named in a call: "-" for standard input.
func inCall(file string) string {
	if file == standardInput {
		return "-"
	}
	return file
}

// readInput reads standard input whole, and stops waiting for it when the call is
// interrupted.
func readInput(c *cli.Context) ([]byte, error) {
	type input struct {
		data []byte
		err  error
	}
	read := make(chan input, 1)
	go func() {
		data, err := io.ReadAll(io.LimitReader(c.App.Reader, mostInput+1))
		read <- input{data, err}
	}()
	select {
	case <-c.Context.Done():
		return nil, c.Context.Err()
	case got := <-read:
		switch {
		case got.err != nil:
			return nil, &fileError{fmt.Errorf("standard input: %w", got.err)}
		case len(got.data) > mostInput:
			return nil, &fileError{fmt.Errorf("standard input is larger than %d MB; save it as a file and name that", mostInput>>20)}
		}
		return got.data, nil
	}
}

// incomplete returns rowsLeftOut if an outcome has no result or misses rows
// because the sheet or the plan is wrong.
func incomplete(s *synthesis.Synthesis) error {
	for _, o := range s.Outcomes {
		if o.Result == nil || o.Counts.Wrong > 0 {
			return &rowsLeftOut{}
		}
	}
	return nil
}

// sameFile reports whether an output would replace the input.
func sameFile(input, output string) bool {
	a, errA := os.Stat(input)
	b, errB := os.Stat(output)
	return errA == nil && errB == nil && os.SameFile(a, b)
}
