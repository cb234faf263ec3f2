package webpage

import (
	"fmt"
	"maps"
	"path"
	"slices"
	"strings"

	"steelyard/forest/words"
	"steelyard/meta/synthesis"
)

// Options say how the page is written.
type Options struct {
	Version string            // of the program
	Change  *synthesis.Change // what differs from an earlier state; nil: not wanted
	Live    *Live             // what lets the page compute changed analyses; nil writes a page that stays as it is
}

// Live is what a page needs to compute changed analyses by itself.
type Live struct {
	Code   string // the engine, packed as text without < or &
	Worker string // script of the worker that unpacks and asks it
	Script string // what joins the page's own script
	Sheet  []byte // JSON of the sheet as it was read and of the plan: members "version", "extraction" and "plan"
}

// view is what the page shows; all its texts are plain, and escaped where they are
// written.
type view struct {
	frame
	Title    string
	Kicker   string
	One      bool // one outcome only
	Outcomes []*outcomeView
	Eligible *tableView
	Changes  *changesView
	Findings findingsView
	Methods  []methodsView
	Defaults []settingView // of all outcomes
	Cautions []string
	Record   recordView

	drawn
}

// drawn is what grows while outcomes are laid out.
type drawn struct {
	data      Data
	positions positions
	figures   int // numbered so far
	tables    int
	spans     map[string]float64 // of the beams, in steps, by outcome
	baselines map[string]baselineStopsOf
	places    []Place
	extent    Extent
}

func newDrawn() drawn {
	return drawn{positions: positions{}, spans: map[string]float64{}, baselines: map[string]baselineStopsOf{}}
}

// frame is what finish fills in.
type frame struct {
	Policy string
	Style  string
	Script string
	Data   string // JSON
	Sheet  string // JSON for the engine
	Live   *Live
}

func newView(s *synthesis.Synthesis, options Options) (*view, error) {
	v := &view{
		Title: "What did the " + words.Noun(s, 2) + " find?", Kicker: kicker(s), One: len(s.Outcomes) == 1,
		Findings: findingsOf(s), Defaults: defaultsOf(s), Cautions: pageCautions(s), Record: recordOf(s, options),
	}
	v.drawn, v.Live = newDrawn(), options.Live
	for i := range s.Outcomes {
		at := Place{Outcome: s.Outcomes[i].Name, ID: fmt.Sprintf("o%d", i+1), Figures: v.figures, Tables: v.tables}
		o, err := v.outcome(s, i, &at)
		if err != nil {
			return nil, err
		}
		v.places = append(v.places, at)
		v.Outcomes = append(v.Outcomes, o)
		v.Methods = append(v.Methods, methodsOf(s, &s.Outcomes[i], at.ID))
	}
	v.Eligible, v.Changes = v.eligible(s), v.changes(options.Change)
	if v.One {
		v.Title = v.Outcomes[0].Name
	}
	return v, nil
}

// kicker names the source, and the arms where the sheet names them.
func kicker(s *synthesis.Synthesis) string {
	var all []string
	if s.Arms[0] != "treated" && s.Arms[0] != "" {
		all = append(all, fmt.Sprintf("%s against %s", s.Arms[0], s.Arms[1]))
	}
	all = append(all, s.Source.File)
	if n := len(s.Outcomes); n > 1 {
		all = append(all, words.NumberInSentence(n)+" outcomes")
	}
	return strings.Join(all, " · ")
}

// outcomeName is the outcome's name, or the file's where the sheet has none.
func outcomeName(s *synthesis.Synthesis, o *synthesis.Outcome) string {
	if o.Name == "" {
		return words.Capital(strings.TrimSuffix(s.Source.File, path.Ext(s.Source.File)))
	}
	return words.Capital(o.Name)
}

// positions are places on the page, in percent, as rules of the style sheet: the
// policy allows no style beside it.
type positions map[string]string

// at returns the class that sets a property to a share of the whole.
func (p positions) at(property string, share float64) string {
	value := fmt.Sprintf("%.2f", 100*share)
	class := "x-" + property + "-" + strings.NewReplacer(".", "_", "-", "m").Replace(value)
	p[class] = fmt.Sprintf(".%s{%s:%s%%}", class, property, value)
	return class
}

func (p positions) css() string {
	var out strings.Builder
	for _, class := range slices.Sorted(maps.Keys(p)) {
		out.WriteString(p[class])
	}
	return out.String()
}
