package webpage

import (
	"bytes"
	"fmt"
	"slices"
	"strings"

	"steelyard/forest/layout"
	"steelyard/meta/synthesis"
)

// figureView is a chart in its wide and narrow forms; the style sheet shows one.
type figureView struct {
	ID           string
	Number       int
	Title        string
	Notes        []noteView
	Wide, Narrow string // one is blank where the other serves both, or until it is drawn
	Small        bool   // the narrow form serves both
	Long         bool   // the wide form serves both, and scrolls
	Problem      string // why there is no chart
}

// narrowType is the type size of the narrow form in points: larger than in print, as
// it is shown at up to twice its size.
const narrowType = 8.3

// Chart is a kind of chart: its name, and how it is laid out of an outcome.
type Chart struct {
	Name string
	Lay  func(*synthesis.Synthesis, *synthesis.Outcome, layout.Style) (layout.Document, error)
}

// chart is a chart as the page shows it. A small one is shown in its narrow form at any width; a long one of many studies only in its wide
// form, which scrolls in a narrow window, so that the page stays small.
type chart struct {
	Chart
	small bool
	long  bool
}

// mostTwice is the number of studies up to which a long chart has both forms.
const mostTwice = 40

// kinds are the charts of a report, in the order of the page.
var kinds = []chart{
	{Chart{"forest", laidOut(layout.ForestOf, layout.Forest)}, false, false},
	{Chart{"cumulative", laidOut(layout.CumulativeOf, layout.Cumulative)}, false, true},
	{Chart{"leave-one-out", laidOut(layout.LeaveOneOutOf, layout.LeaveOneOut)}, false, true},
	{Chart{"benefit", laidOut(layout.BenefitOf, layout.Benefit)}, false, false},
	{Chart{"prior-sensitivity", laidOut(layout.PriorSensitivityOf, layout.PriorSensitivity)}, true, false},
	{Chart{"funnel", laidOut(layout.FunnelOf, layout.Funnel)}, true, false},
}

// Charts returns the charts that the page shows of each outcome, in its order.
func Charts() []Chart {
	all := make([]Chart, len(kinds))
	for i, k := range kinds {
		all[i] = k.Chart
	}
	return all
}

func kind(name string) chart {
	for _, k := range kinds {
		if k.Name == name {
			return k
		}
	}
	panic("webpage: no chart of kind " + name) // a slip of this package
}

// laidOut joins what a chart shows of an outcome with its layout.
func laidOut[Input any](
	of func(*synthesis.Synthesis, *synthesis.Outcome) (Input, error),
	lay func(Input, layout.Style) (layout.Document, error),
) func(*synthesis.Synthesis, *synthesis.Outcome, layout.Style) (layout.Document, error) {
	return func(s *synthesis.Synthesis, o *synthesis.Outcome, style layout.Style) (layout.Document, error) {
		in, err := of(s, o)
		if err != nil {
			return layout.Document{}, err
		}
		return lay(in, style)
	}
}

// figure draws a chart for the page. A chart that cannot be drawn says why in its
// place.
func (v *view) figure(s *synthesis.Synthesis, o *synthesis.Outcome, id string, k chart) (figureView, error) {
	v.figures++
	f := figureView{ID: id + "-" + k.Name, Number: v.figures}
	long := k.long && len(o.Studies) > mostTwice
	both := !k.small && !long
	if both && v.extent == FirstNarrow {
		return f, f.drawNarrow(s, o, k, "")
	}
	wide, err := k.Lay(s, o, layout.Style{ID: f.ID + "-w", NoTitle: true})
	if err != nil {
		f.Problem = err.Error()
		return f, nil
	}
	f.take(&wide)
	if k.small {
		return f, f.drawNarrow(s, o, k, "")
	}
	if f.Wide, err = inline(wide, ""); err != nil || long || v.extent == First {
		f.Long = long
		return f, err
	}
	return f, f.drawNarrow(s, o, k, wide.Pages[0].ID)
}

// take takes title and notes from a chart.
func (f *figureView) take(d *layout.Document) {
	f.Title = d.Pages[0].Title
	if !strings.HasSuffix(f.Title, "?") {
		f.Title += "."
	}
	f.Notes = takeNotes(d)
}

// drawNarrow draws the narrow form; described names the chart that describes it too.
func (f *figureView) drawNarrow(s *synthesis.Synthesis, o *synthesis.Outcome, k chart, described string) error {
	narrow, err := k.Lay(s, o, layout.Style{ID: f.ID + "-n", NoTitle: true, Width: layout.NarrowWidth, TypeSize: narrowType})
	if err != nil {
		narrow, err = k.Lay(s, o, layout.Style{ID: f.ID + "-n", NoTitle: true, Width: layout.NarrowWidth})
	}
	if err != nil {
		return fmt.Errorf("chart %s of %s in the narrow form: %w", k.Name, outcomeName(s, o), err)
	}
	if f.Title == "" {
		f.take(&narrow)
	} else {
		takeNotes(&narrow)
	}
	f.Small = k.small
	f.Narrow, err = inline(narrow, described)
	return err
}

// noteView is a note under a chart: its head word and text.
type noteView struct{ Head, Text string }

// takeNotes takes the notes off the pages of a chart, where they would be set in the
// small type of print, and returns them for the caption.
func takeNotes(d *layout.Document) []noteView {
	var notes []noteView
	for i := range d.Pages {
		page := &d.Pages[i]
		for j, item := range page.Items {
			if g, ok := item.(layout.Group); ok && g.ID == "notes" {
				if i == len(d.Pages)-1 {
					notes = notesOf(g)
				}
				if first, ok := firstText(g); ok {
					page.Height = first.Y - first.Size - aboveNotes
				}
				page.Items = slices.Delete(slices.Clone(page.Items), j, j+1)
				break
			}
		}
	}
	return notes
}

// aboveNotes is what stays free below a chart without its notes, in points less.
const aboveNotes = 2

func firstText(g layout.Group) (layout.Text, bool) {
	for _, item := range g.Items {
		if t, ok := item.(layout.Text); ok && len(t.Spans) > 0 {
			return t, true
		}
	}
	return layout.Text{}, false
}

// notesOf joins the lines of notes; a line that begins in bold begins a note.
func notesOf(g layout.Group) []noteView {
	var notes []noteView
	for _, item := range g.Items {
		t, ok := item.(layout.Text)
		if !ok || len(t.Spans) == 0 {
			continue
		}
		spans := t.Spans
		if spans[0].Bold || len(notes) == 0 {
			notes = append(notes, noteView{})
		}
		note := &notes[len(notes)-1]
		if spans[0].Bold {
			note.Head, spans = spans[0].Text, spans[1:]
		}
		for _, span := range spans {
			note.Text = strings.TrimSpace(note.Text + " " + strings.TrimSpace(span.Text))
		}
	}
	return notes
}

// inline writes the pages of a chart below each other.
func inline(d layout.Document, described string) (string, error) {
	var out bytes.Buffer
	for i, page := range d.Pages {
		page.ID = pageID(page.ID, i)
		if err := layout.WriteInline(&out, page, "chart", described); err != nil {
			return "", err
		}
	}
	return out.String(), nil // layout escapes all text
}

// pageID keeps the ids of a chart's pages apart.
func pageID(id string, page int) string {
	if page == 0 {
		return id
	}
	return fmt.Sprintf("%s-p%d", id, page+1)
}
