package main

import (
	"fmt"

	"github.com/urfave/cli/v2"

	"steelyard/forest/layout"
	"steelyard/ingest/ledger"
	"steelyard/meta"
	"steelyard/meta/accrual"
	"steelyard/meta/choice"
)

// drawUpdates draws the cumulative evidence with a point for each update that brought
// studies.
func drawUpdates(c *cli.Context, l *ledger.Ledger, outcomes []string) error {
	out := c.String(flagChart)
	ink, err := inkFor(out)
	if err != nil {
		return err
	}
	style, err := chartStyle(c, out)
	if err != nil {
		return err
	}
	last := l.Last()
	if last == nil {
		return fmt.Errorf("the ledger has no state that can be read; see: steelyard living verify")
	}
	now, err := l.Again(c.Context, last)
	if err != nil {
		return err
	}
	updates, err := updatesTo(l, last)
	if err != nil {
		return err
	}
	s := now.Synthesis
	if len(outcomes) > 0 {
		kept := s.Outcomes[:0:0]
		for _, o := range s.Outcomes {
			for _, name := range outcomes {
				if choice.Fold(name) == choice.Fold(o.Name) {
					kept = append(kept, o)
				}
			}
		}
		s.Outcomes = kept
	}
	complain(c, ledgerMessages(l))
	for i := range s.Outcomes {
		o := &s.Outcomes[i]
		if err := o.AccrueByUpdate(c.Context, updates, meta.Work{}); err != nil {
			return err
		}
		looks, err := o.LookAgain(c.Context, updates, accrual.Draws{N: usualLooks, Seed: o.Analysis.Model.Seed})
		if err != nil {
			return err
		}
		in, err := layout.UpdatesOf(s, o, looks)
		if err != nil && len(s.Outcomes) > 1 {
			fmt.Fprintf(c.App.ErrWriter, "steelyard: no chart of %s: %s\n", heading(s, o), err)
			continue
		}
		if err != nil {
			return err
		}
		document, err := layout.Cumulative(in, style)
		if err != nil {
			return err
		}
		if err := draw(c, ink, outcomePath(out, s, i), document); err != nil {
			return err
		}
	}
	return nil
}
