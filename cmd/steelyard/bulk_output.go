package main

import (
	"bufio"
	"errors"
	"fmt"
	"io"
	"math"
	"os"

	"github.com/urfave/cli/v2"

	"steelyard/meta/collection"
	"steelyard/meta/numeric"
)

// bulkOutput takes the rows of results: to the terminal or the file as they come, or
// for a collection to a temporary file until all are there.
type bulkOutput struct {
	to         *bufio.Writer
	file       *wholeFile // nil on the terminal
	spill      *os.File   // nil unless a collection is wanted
	json       bool
	begun      bool // something has gone to the terminal
	z, lnP     []float64
	head       string
	spillLines *bufio.Writer
}

func newBulkOutput(c *cli.Context, json, scaled bool) (*bulkOutput, error) {
	o := &bulkOutput{json: json}
	var to io.Writer = c.App.Writer
	if path := c.String(flagOut); path != "" && path != "-" {
		file, err := createWhole(path, c.Bool(flagOverwrite))
		if err != nil {
			return nil, err
		}
		o.file, to = file, file
	}
	o.to = bufio.NewWriterSize(to, 256<<10)
	if !json {
		o.head = bulkColumns(scaled, c.Bool(flagCollection))
	}
	if !c.Bool(flagCollection) {
		return o, nil
	}
	spill, err := os.CreateTemp("", "steelyard-bulk-*")
	if err != nil {
		o.close()
		return nil, &fileError{fmt.Errorf("no temporary file for the collection: %w; set TMPDIR to a folder with room for the results", plainCause(err))}
	}
	_ = os.Remove(spill.Name()) // a system that keeps names of open files has it removed on closing
	o.spill, o.spillLines = spill, bufio.NewWriterSize(spill, 256<<10)
	return o, nil
}

// take writes the results of a block.
func (o *bulkOutput) take(r *bulkResult) error {
	if o.spill != nil {
		for _, m := range r.mean {
			z := math.Copysign(numeric.NormalFromLogTail(m.lnP-math.Ln2), m.statistic)
			o.z, o.lnP = append(o.z, z), append(o.lnP, m.lnP)
		}
		if _, err := o.spillLines.Write(r.out); err != nil {
			return &fileError{fmt.Errorf("temporary file for the collection: %w", plainCause(err))}
		}
		return nil
	}
	return o.write(r.out)
}

// write puts rows out, after the header.
func (o *bulkOutput) write(rows []byte) error {
	if len(rows) == 0 {
		return nil
	}
	if !o.begun {
		o.begun = true
		if _, err := o.to.WriteString(o.head); err != nil {
			return &fileError{fmt.Errorf("writing the output: %w", err)}
		}
	}
	if _, err := o.to.Write(rows); err != nil {
		return &fileError{fmt.Errorf("writing the output: %w", err)}
	}
	return nil
}

// finish writes what is left, with the columns of the collection.
func (o *bulkOutput) finish(c *cli.Context) error {
	if o.spill != nil {
		if err := o.weigh(c); err != nil {
			return err
		}
	}
	if err := o.to.Flush(); err != nil {
		return &fileError{fmt.Errorf("writing the output: %w", err)}
	}
	if o.file != nil {
		return o.file.commit()
	}
	return nil
}

// weigh adds to each row what the whole collection says of it.
func (o *bulkOutput) weigh(c *cli.Context) error {
	if len(o.z) == 0 {
		return nil
	}
	adjusted := collection.Adjusted(o.lnP)
	groups, err := collection.NewTwoGroups(o.z)
	if err != nil {
		fmt.Fprintf(c.App.ErrWriter, "steelyard: %s; those columns are blank\n", err)
	}
	explainCollection(c.App.ErrWriter, groups, len(o.z))
	if err := o.spillLines.Flush(); err != nil {
		return &fileError{fmt.Errorf("temporary file for the collection: %w", plainCause(err))}
	}
	if _, err := o.spill.Seek(0, io.SeekStart); err != nil {
		return &fileError{err}
	}
	lines := bufio.NewReaderSize(o.spill, 256<<10)
	for i, lnP := range adjusted {
		if i%4096 == 0 && c.Context.Err() != nil {
			return c.Context.Err()
		}
		line, err := lines.ReadBytes('\n')
		if err != nil {
			return &fileError{fmt.Errorf("temporary file for the collection: %w", plainCause(err))}
		}
		row := bulkRow{out: line[:len(line)-1], json: o.json}
		if o.json {
			row.out = row.out[:len(row.out)-1]
		}
		row.number("p_adjusted", math.Exp(lnP))
		row.number("ln_p_adjusted", lnP)
		rate, ln, steps := math.NaN(), math.NaN(), math.NaN()
		if groups != nil {
			rate = groups.LocalRate(o.z[i])
			if ratio, ok := groups.Evidence(o.z[i]); ok {
				ln, steps = ratio.Ln(), ratio.Steps()
			}
		}
		row.number("local_rate", rate)
		row.number("collection_ln_evidence", ln)
		row.number("collection_steps", steps)
		if err := o.write(row.end()); err != nil {
			return err
		}
	}
	return nil
}

// explainCollection says what the columns of a collection mean, and what they rest on.
func explainCollection(to io.Writer, groups *collection.TwoGroups, sets int) {
	fmt.Fprintf(to, "p_adjusted: the least rate of false discoveries among the sets called at that p or below, of %d\n"+
		"sets (Benjamini & Hochberg 1995).\n", sets)
	if groups != nil {
		fmt.Fprintf(to, "collection_ln_evidence: evidence for an effect in a collection that is seen as a mixture of sets with\n"+
			"and without one (two-group empirical Bayes, Efron 2010); about %s of the sets have none.\n"+
			"local_rate: the share without an effect among sets with this statistic. Blank evidence: none there.\n", wholePercent(groups.None))
	}
	fmt.Fprint(to, "Caution: these rest on sets of one kind that do not depend on one another much, on statistics that are\n"+
		"standard normal where there is no effect, and on nobody having chosen the sets by their results.\n"+
		"Bias of the studies is not in these numbers; few studies in a set, or shared studies, break them.\n")
}

// interrupted says of a stopped call whether part of its output stands.
func (o *bulkOutput) interrupted(c *cli.Context, err error) error {
	if c.Context.Err() == nil || o.file != nil || !o.begun {
		return err
	}
	return &partWritten{text: "the rows above are complete, the others were not pooled", err: errors.Join(err, o.to.Flush())}
}

// close takes the temporary files away.
func (o *bulkOutput) close() {
	if o.file != nil {
		o.file.discard()
	}
	if o.spill != nil {
		_ = o.spill.Close()
		_ = os.Remove(o.spill.Name())
	}
}

// wholePercent returns a share as a whole percentage.
func wholePercent(share float64) string { return fmt.Sprintf("%.0f %%", 100*share) }
