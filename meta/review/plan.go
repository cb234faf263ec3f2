package review

import (
	"cmp"
	"errors"
	"fmt"
	"maps"
	"slices"
	"strings"

	"steelyard/meta"
	"steelyard/meta/choice"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
)

// From says where the value of a setting came from; a later one wins.
type From int

// The origins, weakest first.
const (
	FromDefault From = iota
	FromSheet
	FromFlag
)

var fromNames = choice.Of[From]("origin", "default", "sheet", "flag")

// String returns "default", "sheet" or "flag".
func (f From) String() string { return fromNames.String(f) }

// MarshalText writes the name of the origin.
func (f From) MarshalText() ([]byte, error) { return []byte(f.String()), nil }

// Value is the value of a setting, as text, with its origin.
type Value struct {
	Text   string
	From   From
	Place  Place  // of a value from the plan sheet
	Reason string // as the plan gives it
	Date   Date   // on which it was agreed, as the plan gives it; zero: not given
}

// Run is a planned sensitivity analysis: a filter, or changed settings, or both.
type Run struct {
	Name    string
	Outcome string            // blank for all
	Changes map[string]string // setting → value, "where" included
	Place   Place
}

// Plan holds the settings of an analysis: for all outcomes and for single ones.
// The zero Plan is all defaults.
type Plan struct {
	values map[planKey]Value
	Runs   []Run
}

type planKey struct {
	setting, outcome string
	from             From
}

// ErrGivenTwice reports a setting that the plan gives two different values.
var ErrGivenTwice = errors.New("the setting is given two different values; keep one")

// Set gives a setting a value, for one outcome or, with a blank outcome, for
// all. Names are matched as choice.Fold does. It returns an error if the setting
// or its value is unknown, or if the same origin already gave another value.
func (p *Plan) Set(setting, outcome string, v Value) error {
	s, err := FindSetting(setting)
	if err != nil {
		return err
	}
	v.Text = strings.TrimSpace(v.Text)
	if err := s.Check(v.Text); err != nil {
		return fmt.Errorf("%s: %w", s.Name, err)
	}
	key := planKey{s.Name, choice.Fold(outcome), v.From}
	if old, ok := p.values[key]; ok && old.Text != v.Text {
		return fmt.Errorf("%s: %q and %q: %w", s.Name, old.Text, v.Text, ErrGivenTwice)
	}
	if p.values == nil {
		p.values = map[planKey]Value{}
	}
	p.values[key] = v
	return nil
}

// Value returns the value of a setting for an outcome: flag before sheet before
// default, and the outcome's own before the one for all.
func (p *Plan) Value(setting, outcome string) Value {
	for from := FromFlag; from > FromDefault; from-- {
		for _, name := range []string{choice.Fold(outcome), ""} {
			if v, ok := p.values[planKey{setting, name, from}]; ok {
				return v
			}
		}
	}
	s, err := FindSetting(setting)
	if err != nil {
		return Value{}
	}
	return Value{Text: s.Default}
}

// Outcomes returns the outcomes that have settings or runs of their own, as folded
// names in order, each with the place of the first of these.
func (p *Plan) Outcomes() (names []string, places map[string]Place) {
	places = map[string]Place{}
	add := func(outcome string, at Place) {
		if old, seen := places[outcome]; outcome != "" && (!seen || before(at, old)) {
			places[outcome] = at
		}
	}
	for key, v := range p.values {
		add(key.outcome, v.Place)
	}
	for _, run := range p.Runs {
		add(choice.Fold(run.Outcome), run.Place)
	}
	return slices.Sorted(maps.Keys(places)), places
}

// With returns the plan for one outcome as a planned run changes it: the run's
// settings go before all others, and its filter holds besides the plan's own. The
// error of a value that ParseRun has checked cannot occur.
func (p *Plan) With(run Run, outcome string) (*Plan, error) {
	changed := &Plan{values: maps.Clone(p.values), Runs: p.Runs}
	if changed.values == nil {
		changed.values = map[planKey]Value{}
	}
	for _, setting := range slices.Sorted(maps.Keys(run.Changes)) {
		text := run.Changes[setting]
		if own := p.Value(SettingWhere, outcome).Text; setting == SettingWhere && own != "" {
			both, err := bothFilters(own, text)
			if err != nil {
				return nil, err
			}
			text = both
		}
		delete(changed.values, planKey{setting, choice.Fold(outcome), FromFlag})
		if err := changed.Set(setting, outcome, Value{Text: text, From: FromFlag, Place: run.Place}); err != nil {
			return nil, err
		}
	}
	return changed, nil
}

// bothFilters joins two filters into one that holds where both do.
func bothFilters(a, b string) (string, error) {
	first, err := ParseFilter(a)
	if err != nil {
		return "", err
	}
	second, err := ParseFilter(b)
	if err != nil {
		return "", err
	}
	return first.And(second).String(), nil
}

// before reports whether a stands before b in reading order.
func before(a, b Place) bool { return a.Row < b.Row || (a.Row == b.Row && a.Col < b.Col) }

// Given is a setting as somebody gave it.
type Given struct {
	Setting string
	Outcome string // folded; blank for all
	Value   Value
}

// Given returns the settings of an origin, in the order of the settings' table, those
// for all outcomes first.
func (p *Plan) Given(from From) []Given {
	var all []Given
	for key, v := range p.values {
		if key.from == from {
			all = append(all, Given{key.setting, key.outcome, v})
		}
	}
	rank := func(name string) int {
		return slices.IndexFunc(settings, func(s Setting) bool { return s.Name == name })
	}
	slices.SortFunc(all, func(a, b Given) int {
		return cmp.Or(cmp.Compare(rank(a.Setting), rank(b.Setting)), cmp.Compare(a.Outcome, b.Outcome))
	})
	return all
}

// Analysis is the typed form of the settings for one outcome.
type Analysis struct {
	Measure    effect.Measure // Unspecified when neither plan nor flag says
	MeasureSet bool
	Better     Better
	Method     Method
	EffectsSet bool
	Model      meta.Model // Null is not yet on the analysis scale: see NullGiven
	Null       *float64   // in the reader's unit; nil for the measure's own
	Important  []float64  // in the reader's unit; one or two values, or nil
	Weighing   Weighing
	Correction effect.Correction
	Where      *Filter // nil pools every row
	Panel      PanelSettings
}

// PanelSettings are the settings that only a panel's card uses.
type PanelSettings struct {
	Baselines []Baseline
	Per1000   []float64 // important difference per 1000, below 0 for fewer; one or two values, or nil
	SD        float64   // in the unit of the outcome; 0: not stated
	Reduction float64   // relative reduction of the risk that the information size is for
	Power     float64   // with which
}

// Analysis returns the settings for an outcome, with Model.Tau and
// Model.Interval left at their defaults unless somebody asked for a method.
// The error of a value that Set has not checked cannot occur.
func (p *Plan) Analysis(outcome string) (Analysis, error) {
	var a Analysis
	var errs []error
	read := func(setting string, parse func(text string) error) {
		v := p.Value(setting, outcome)
		if v.Text == "" || (v.From == FromDefault && (setting == SettingTau || setting == SettingInterval)) {
			return
		}
		if err := parse(v.Text); err != nil {
			errs = append(errs, fmt.Errorf("%s: %w", setting, err))
		}
	}
	read(SettingMeasure, func(t string) (err error) {
		a.Measure, err = effect.ParseMeasure(t)
		a.MeasureSet = true
		return err
	})
	read(SettingEffects, func(t string) (err error) { a.Model.Effects, err = meta.ParseEffects(t); return err })
	a.EffectsSet = p.Value(SettingEffects, outcome).From != FromDefault
	read(SettingMethod, func(t string) (err error) { a.Method, err = ParseMethod(t); return err })
	read(SettingTau, func(t string) (err error) { a.Model.Tau, err = meta.ParseTau(t); return err })
	read(SettingInterval, func(t string) (err error) { a.Model.Interval, err = meta.ParseInterval(t); return err })
	read(SettingPrediction, func(t string) (err error) { a.Model.Prediction, err = meta.ParsePrediction(t); return err })
	read(SettingLevel, func(t string) (err error) { a.Model.Level, err = parseLevel(t); return err })
	read(SettingSeed, func(t string) (err error) { a.Model.Seed, err = parseSeed(t); return err })
	read(SettingNull, func(t string) error {
		null, err := parseNumber(t)
		a.Null = &null
		return err
	})
	read(SettingImportant, func(t string) (err error) { a.Important, err = parseNumbers(t); return err })
	read(SettingBetter, func(t string) (err error) { a.Better, err = ParseBetter(t); return err })
	read(SettingBaseline, func(t string) (err error) { a.Panel.Baselines, err = parseBaselines(t); return err })
	read(SettingPer1000, func(t string) (err error) { a.Panel.Per1000, err = parsePer1000(t); return err })
	read(SettingSD, func(t string) (err error) { a.Panel.SD, err = parsePositive(t); return err })
	read(SettingReduction, func(t string) (err error) { a.Panel.Reduction, err = parseFraction(t); return err })
	read(SettingPower, func(t string) (err error) { a.Panel.Power, err = parseFraction(t); return err })
	read(SettingCorrection, func(t string) (err error) { a.Correction, err = effect.ParseCorrection(t); return err })
	read(SettingWhere, func(t string) (err error) { a.Where, err = ParseFilter(t); return err })
	a.Weighing.read(read)
	if a.Weighing.Form == evidence.StudentForm {
		a.Model.Evidence = evidence.StudentForm
	}
	return a, errors.Join(errs...)
}

// ParseRun reads the value of a plan's "run" row: "NAME: setting = value;
// setting = value", or "NAME: FILTER".
func ParseRun(text string) (Run, error) {
	name, rest, found := strings.Cut(text, ":")
	if !found || strings.TrimSpace(name) == "" || strings.TrimSpace(rest) == "" {
		return Run{}, fmt.Errorf("%q is no planned run; write \"NAME: FILTER\" or \"NAME: setting = value\"", text)
	}
	run := Run{Name: strings.TrimSpace(name), Changes: map[string]string{}}
	for _, part := range strings.Split(rest, ";") {
		left, right, isChange := strings.Cut(part, "=")
		setting, err := FindSetting(left)
		if !isChange || err != nil {
			setting, right = Setting{Name: SettingWhere, check: checkFilter}, part
		}
		if err := setting.Check(right); err != nil {
			return Run{}, fmt.Errorf("planned run %q: %s: %w", run.Name, setting.Name, err)
		}
		run.Changes[setting.Name] = strings.TrimSpace(right)
	}
	return run, nil
}
