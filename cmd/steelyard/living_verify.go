package main

import (
	"errors"
	"fmt"

	"github.com/urfave/cli/v2"

	"steelyard/forest/words"
	"steelyard/ingest/ledger"
	"steelyard/meta"
	"steelyard/meta/synthesis"
)

func livingVerify(c *cli.Context) error {
	format, err := outputWanted(c)
	if err != nil {
		return err
	}
	if c.NArg() > 0 {
		return &callError{fmt.Sprintf("verify looks through the whole record and takes no operand; leave out %q", c.Args().First())}
	}
	l, err := openLedger(c)
	if err != nil {
		return err
	}
	problems, err := l.Verify(c.Context)
	if err != nil {
		return err
	}
	d := synthesis.VerifyDocument{
		Format: synthesis.VerifyFormat, Program: synthesis.ProgramDocument{Version: version}, States: len(l.States), Intact: true,
		Problems: []synthesis.ProblemDocument{}, Different: []synthesis.DifferentDocument{}, Caution: ledger.AccidentsOnly,
	}
	for _, problem := range problems {
		d.Intact = d.Intact && problem.Gravity != ledger.Damage
		d.Problems = append(d.Problems, synthesis.ProblemDocument{Line: problem.Line, Gravity: problem.Gravity.String(), Text: problem.Text})
	}
	if !c.Bool(flagQuick) {
		work, err := work(c)
		if err != nil {
			return err
		}
		if err := computeAll(c, l, &d, work); err != nil {
			return err
		}
	}
	var p page
	p.verified(&d, problems)
	if err := reply(c, format, &p, d, "problems"); err != nil {
		return err
	}
	if !d.Intact || len(d.Different) > 0 {
		return &rowsLeftOut{}
	}
	return nil
}

// computeAll computes every state again; a sheet that Verify has found missing is not
// reported twice.
func computeAll(c *cli.Context, l *ledger.Ledger, d *synthesis.VerifyDocument, work meta.Work) error {
	for i := range l.States {
		s := &l.States[i]
		if err := c.Context.Err(); err != nil {
			return err
		}
		var missing *ledger.SheetError
		now, err := l.Again(c.Context, s)
		switch {
		case errors.As(err, &missing):
			continue
		case err != nil:
			d.Intact = false
			d.Problems = append(d.Problems, synthesis.ProblemDocument{Line: s.Line(), Gravity: ledger.Damage.String(), Text: "cannot be computed again: " + err.Error()})
			continue
		}
		d.Computed++
		for _, difference := range s.Differences(now.Synthesis) {
			d.Different = append(d.Different, synthesis.DifferentDocument{State: s.Number, RecomputedDocument: synthesis.RecomputedDocument(difference)})
		}
		if work.Progress != nil {
			work.Progress(i+1, len(l.States))
		}
	}
	return nil
}

// verified writes what a look through the ledger found.
func (p *page) verified(d *synthesis.VerifyDocument, problems []ledger.Problem) {
	verdict := "every line, the chain and the input sheets are as they were written"
	if !d.Intact {
		verdict = "not everything is as it was written"
	}
	p.wrapped("", fmt.Sprintf("%s: %s.", words.Number(d.States, "state", "states"), verdict))
	for _, problem := range problems {
		p.item("·", problem.Gravity.String()+": "+problem.String())
	}
	for _, problem := range d.Problems[len(problems):] {
		p.item("·", fmt.Sprintf("%s: line %d: %s", problem.Gravity, problem.Line, problem.Text))
	}
	if d.Computed > 0 {
		text := fmt.Sprintf("%s computed again: the same numbers.", words.Number(d.Computed, "state", "states"))
		if len(d.Different) > 0 {
			text = fmt.Sprintf("%s computed again; these numbers are other than recorded:", words.Number(d.Computed, "state", "states"))
		}
		p.wrapped("", text)
	}
	for _, different := range d.Different {
		p.item("·", fmt.Sprintf("state %d: %s", different.State, ledger.Difference(different.RecomputedDocument)))
	}
	p.line("")
	p.item("·", d.Caution)
}
