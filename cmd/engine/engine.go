package main

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"maps"
	"slices"
	"strconv"
	"strings"

	"steelyard/forest/webpage"
	"steelyard/ingest/rules"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// opened is what the page hands over once: the sheet as read, before the catalogue of
// rules, and the plan.
type opened struct {
	Version    string             `json:"version"`
	Extraction *review.Extraction `json:"extraction"`
	Plan       *review.Plan       `json:"plan"`
	Outcomes   []webpage.Place    `json:"outcomes"` // where each stands on the page; absent where there is none
}

// variant is a changed analysis of one outcome.
type variant struct {
	Outcome string            `json:"outcome"`            // as the sheet spells it
	Changes map[string]string `json:"changes,omitempty"`  // setting → value; "where" holds besides the plan's own
	LeftOut []int             `json:"left_out,omitempty"` // rows of the sheet
	Added   *addition         `json:"added,omitempty"`    // a study that nobody has done
	First   bool              `json:"first,omitempty"`    // only what is worked out at once
	Narrow  bool              `json:"narrow,omitempty"`   // and of charts the narrow form
}

// addition is a hypothetical study.
type addition struct {
	Name    string             `json:"study"`
	Year    int                `json:"year,omitempty"`
	Numbers map[string]float64 `json:"numbers"` // by the names of their fields
}

// reply is the answer to a variant; without a result Problem says why.
type reply struct {
	Document *synthesis.Document `json:"document,omitempty"`
	Command  string              `json:"command,omitempty"` // that gives the same on a command line; blank with an added study
	Problem  string              `json:"problem,omitempty"`
	*shown
}

// shown is what the page shows of the outcome; nil where it is on no page.
type shown struct {
	Lead     string              `json:"lead"`     // HTML of the opening sentence
	Sections []webpage.Section   `json:"sections"` // of the outcome, in the page's order, and its methods
	Late     []string            `json:"late"`     // ids of sections that were left out
	CSS      string              `json:"css"`      // rules for the places in them
	Data     webpage.OutcomeData `json:"data"`
}

// open reads what the page hands over.
func open(data []byte) (*opened, error) {
	o := &opened{}
	if err := json.Unmarshal(data, o); err != nil {
		return nil, fmt.Errorf("the page's data cannot be read: %w", err)
	}
	if o.Extraction == nil || o.Plan == nil {
		return nil, errors.New("the page's data lacks the sheet or the plan")
	}
	return o, nil
}

// answer runs a changed analysis. It never panics: a defect is a problem in the reply.
func (o *opened) answer(request []byte) (r reply) {
	defer func() {
		if defect := recover(); defect != nil {
			r = reply{Problem: fmt.Sprintf("the engine met a defect (%v); the numbers shown are those before the change", defect)}
		}
	}()
	var v variant
	if err := json.Unmarshal(request, &v); err != nil {
		return reply{Problem: "the change cannot be read: " + err.Error()}
	}
	s, command, err := o.run(v)
	if err != nil {
		return reply{Problem: err.Error()}
	}
	d := s.Document(o.Version)
	r = reply{Document: &d, Command: command}
	if r.shown, err = o.show(s, v.extent()); err != nil {
		return reply{Problem: err.Error()}
	}
	return r
}

// show writes the outcome for its place on the page.
func (o *opened) show(s *synthesis.Synthesis, extent webpage.Extent) (*shown, error) {
	for _, at := range o.Outcomes {
		for i := range s.Outcomes {
			if s.Outcomes[i].Name != at.Outcome {
				continue
			}
			part, err := webpage.PartOf(s, i, at, extent)
			if err != nil {
				return nil, err
			}
			return &shown{part.Lead, part.Sections, part.Late, part.CSS, part.Data}, nil
		}
	}
	return nil, nil
}

// run analyses the outcome as changed, the same way as the command line does.
func (o *opened) run(v variant) (*synthesis.Synthesis, string, error) {
	changes, err := v.settings()
	if err != nil {
		return nil, "", err
	}
	plan, err := o.Plan.With(review.Run{Changes: changes}, v.Outcome)
	if err != nil {
		return nil, "", err
	}
	x := *o.Extraction
	x.Studies, x.Findings = slices.Clone(x.Studies), slices.Clone(x.Findings)
	command := o.command(v.Outcome, plan)
	if v.Added != nil {
		study, err := v.Added.study(&x, v.Outcome)
		if err != nil {
			return nil, "", err
		}
		x.Studies = append(x.Studies, study)
		command = ""
	}
	rules.Apply(&x, plan)
	s, err := synthesis.Run(context.Background(), &x, plan, v.want())
	if err != nil {
		return nil, "", err
	}
	s.Outcomes = slices.DeleteFunc(s.Outcomes, func(o synthesis.Outcome) bool { return o.Name != v.Outcome })
	return s, command, nil
}

// extent says how much of the outcome is wanted.
func (v variant) extent() webpage.Extent {
	switch {
	case v.First && v.Narrow:
		return webpage.FirstNarrow
	case v.First:
		return webpage.First
	}
	return webpage.Whole
}

// want asks for what the page shows of an outcome.
func (v variant) want() synthesis.Want {
	want := webpage.WantedOf(v.extent())
	if v.Outcome != "" {
		want.Outcomes = []string{v.Outcome}
	}
	return want
}

// settings returns the changed settings, checked, with the filter for the rows left out.
func (v variant) settings() (map[string]string, error) {
	changes := map[string]string{}
	for _, name := range slices.Sorted(maps.Keys(v.Changes)) {
		setting, err := review.FindSetting(name)
		if err != nil {
			return nil, err
		}
		if err := setting.Check(v.Changes[name]); err != nil {
			return nil, fmt.Errorf("%s: %w", setting.Name, err)
		}
		changes[setting.Name] = v.Changes[name]
	}
	where, err := v.where(changes[review.SettingWhere])
	if err != nil {
		return nil, err
	}
	if where != nil {
		changes[review.SettingWhere] = where.String()
	}
	return changes, nil
}

// where joins the change's filter with one that leaves rows out; nil keeps every row.
func (v variant) where(text string) (*review.Filter, error) {
	var where *review.Filter
	var err error
	if text != "" {
		if where, err = review.ParseFilter(text); err != nil {
			return nil, err
		}
	}
	var out []string
	for _, row := range v.LeftOut {
		out = append(out, review.RowColumn+" is not "+strconv.Itoa(row))
	}
	if len(out) == 0 {
		return where, nil
	}
	without, err := review.ParseFilter(strings.Join(out, " and "))
	if err != nil {
		return nil, err
	}
	return where.And(without), nil
}

// study returns the hypothetical study as a row below the sheet's last.
func (a *addition) study(x *review.Extraction, outcome string) (review.Study, error) {
	place := review.Place{File: x.Source.File, Sheet: x.Source.Sheet, Row: 1}
	for i := range x.Studies {
		place.File, place.Sheet = x.Studies[i].Row.File, x.Studies[i].Row.Sheet
		place.Row = max(place.Row, x.Studies[i].Row.Row+1)
	}
	s := review.Study{Name: a.Name, Outcome: outcome, Row: place, Date: review.Date{Year: a.Year}}
	if s.Name == "" {
		s.Name = "hypothetical study"
	}
	for _, name := range slices.Sorted(maps.Keys(a.Numbers)) {
		field, err := review.ParseField(name)
		if err != nil || !field.Numeric() {
			return s, fmt.Errorf("%q is no number of a study", name)
		}
		value := a.Numbers[name]
		text := strconv.FormatFloat(value, 'g', -1, 64)
		s.Numbers = append(s.Numbers, review.Number{Field: field, Value: value, Place: review.Spot{Row: place.Row, Text: text}})
	}
	for i := range x.Studies { // measured like the others
		if other := &x.Studies[i]; other.Outcome == outcome {
			s.Measure, s.Better = other.Measure, other.Better
			break
		}
	}
	return s, nil
}

// command returns the call that gives the same answer, in the quoting of a POSIX shell.
func (o *opened) command(outcome string, plan *review.Plan) string {
	words := []string{"steelyard", "pool", quoted(o.Extraction.Source.File)}
	if outcome != "" {
		words = append(words, "--outcome", quoted(outcome))
	}
	for _, g := range plan.Given(review.FromFlag) {
		words = append(words, "--"+g.Setting, quoted(g.Value.Text))
	}
	return strings.Join(words, " ")
}

// quoted returns a word as a shell takes it.
func quoted(word string) string {
	plain := word != "" && strings.IndexFunc(word, func(r rune) bool {
		return !(r >= '0' && r <= '9' || r >= 'A' && r <= 'Z' || r >= 'a' && r <= 'z' || strings.ContainsRune("._-/:,@%+=", r))
	}) < 0
	if plain && word[0] != '-' {
		return word
	}
	return "'" + strings.ReplaceAll(word, "'", `'\''`) + "'"
}
