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
	Cautions []string
	Record   recordView

	data      Data
	positions positions
	figures   int // numbered so far
	tables    int
	spans     map[string]float64 // of the beams, in steps, by outcome
	baselines map[string]baselineStopsOf
}

// frame is what finish fills in.
type frame struct {
	Policy string
	Style  string
	Script string
	Data   string // JSON
}

func newView(s *synthesis.Synthesis, options Options) (*view, error) {
	v := &view{
		Title: "What did the " + words.Noun(s, 2) + " find?", Kicker: kicker(s), One: len(s.Outcomes) == 1,
		Findings: findingsOf(s), Cautions: pageCautions(s), Record: recordOf(s, options),
	}
	v.positions, v.spans = positions{}, map[string]float64{}
	v.baselines = map[string]baselineStopsOf{}
	for i := range s.Outcomes {
		o, err := v.outcome(s, i)
		if err != nil {
			return nil, err
		}
		v.Outcomes = append(v.Outcomes, o)
		v.Methods = append(v.Methods, methodsOf(s, &s.Outcomes[i]))
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
