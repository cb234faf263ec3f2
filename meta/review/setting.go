package review

import (
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"

	"steelyard/meta"
	"steelyard/meta/bayes"
	"steelyard/meta/choice"
	"steelyard/meta/dependence"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/sparse"
)

// Setting describes one setting of an analysis. Flags, the plan reader, help
// texts and the JSON schema are made from the one table that Settings returns.
type Setting struct {
	Name    string
	Values  []string // the choices; nil when the value is free
	Default string   // as text; blank when there is none
	Unless  string   // when the default differs, in words; blank if never
	Meaning string
	Unit    string // of the value, in words; blank for a choice
	Needs   string // the command that uses it, when that is not every pooling command
	check   func(text string) error
}

// Names of the settings.
const (
	SettingMeasure    = "measure"
	SettingEffects    = "effects"
	SettingMethod     = "method"
	SettingTau        = "tau"
	SettingInterval   = "interval"
	SettingPrediction = "prediction"
	SettingEvidence   = "evidence"
	SettingTauPrior   = "tau-prior"
	SettingTauScale   = "tau-scale"
	SettingEffectMean = "effect-mean"
	SettingEffectSD   = "effect-scale"
	SettingEffectSide = "effect-side"
	SettingLevel      = "level"
	SettingNull       = "null"
	SettingImportant  = "important"
	SettingBetter     = "better"
	SettingBaseline   = "baseline"
	SettingPer1000    = "important-per-1000"
	SettingSD         = "standard-deviation"
	SettingReduction  = "reduction"
	SettingPower      = "power"
	SettingPrior      = "prior"
	SettingOrder      = "order"
	SettingTies       = "ties"
	SettingDependence = "dependence"
	SettingCorrection = "correction"
	SettingWhere      = "where"
	SettingSeed       = "seed"
)

// Settings returns the table of all settings, in the order in which they are
// explained.
func Settings() []Setting { return slices.Clone(settings) }

var settings = slices.Concat(analysisSettings, triggerSettings)

var analysisSettings = []Setting{
	choiceSetting(SettingMeasure, effect.MeasureNames(), "", "what the estimates measure; ratios are pooled as logarithms").
		unless("from the sheet; for counts risk ratio, or odds ratio by a method for them; for means mean difference"),
	choiceSetting(SettingEffects, meta.EffectsNames(), meta.RandomEffects.String(), "whether the studies' true effects vary around a mean or are one common effect").
		unless("common for mantel-haenszel, peto and conditional-exact"),
	choiceSetting(SettingMethod, MethodNames(), InverseVariance.String(), "how studies are weighted and combined; all but the first pool events and totals as counted"),
	choiceSetting(SettingTau, meta.TauNames(), meta.RestrictedML.String(), "estimator of the variance τ² between studies").
		unless("maximum-likelihood beside profile-likelihood, dersimonian-laird beside henmi-copas"),
	choiceSetting(SettingInterval, meta.IntervalNames(), meta.HartungKnappFloor.String(), "interval and p-value of the mean effect; the evidence agrees with it").
		unless("wald for a common effect or one study"),
	choiceSetting(SettingDependence, dependence.WayNames(), dependence.Independent.String(), "how several estimates from one study (the same cluster, id or name) are treated"),
	choiceSetting(SettingPrediction, meta.PredictionNames(), meta.PredictionTwoLess.String(), "interval for the true effect in a new setting"),
	choiceSetting(SettingEvidence, evidence.FormNames(), evidence.Empirical.String(), "form of the evidence ratio; the last four rest on the priors below"),
	choiceSetting(SettingTauPrior, bayes.TauPriorNames(), "", "prior distribution of the spread τ between studies, for integrated and averaged evidence and for the posterior").
		unless("half-normal; uniform for a measure whose unit is not known"),
	freeSetting(SettingTauScale, "", "scale of that prior, as τ is counted; for log-normal the mean and the standard deviation of ln τ (half of those of ln τ²)", "on the analysis scale, such as 0.5, or \"-1.3, 0.8\"", checkTauScale).
		unless("0.5 for log ratios and standardised differences, 0.5 standard deviations for mean differences"),
	freeSetting(SettingEffectMean, "", "centre of the prior for the effect under normal-prior", "in the reader's unit", checkNumber).unless("no effect"),
	freeSetting(SettingEffectSD, "", "scale of the prior for the effect: standard deviation of normal-prior, half width at half height of cauchy-prior; none is assumed", "on the analysis scale, such as 0.5 for a log ratio", checkPositive),
	choiceSetting(SettingEffectSide, bayes.SideNames(), bayes.BothSides.String(), "on which side of no effect these two priors allow effects"),
	freeSetting(SettingLevel, "0.95", "level of every interval", "a fraction between 0 and 1", checkLevel),
	freeSetting(SettingNull, "", "the effect that counts as none", "in the reader's unit", checkNumber).unless("1 for ratios, else 0"),
	freeSetting(SettingImportant, "", "smallest important difference; one value is mirrored, two give both sides", "in the reader's unit, such as 0.8 for a ratio", checkNumbers),
	choiceSetting(SettingBetter, BetterNames(), "", "which direction of the effect is wanted"),
	freeSetting(SettingBaseline, "", "risks without treatment, each with a name", "such as \"low 0.05, high 0.2\"", checkBaselines).unless("the median risk of the studies' control arms, labelled so").of(panelCommand),
	freeSetting(SettingPer1000, "", "smallest important difference per 1000 people at any baseline risk, in place of important; one value is mirrored, two give both sides", "such as 40, or \"-40, 20\" for 40 fewer and 20 more", checkPer1000).of(panelCommand),
	freeSetting(SettingSD, "", "standard deviation of the outcome, to read standardised differences in its unit and for the information size of means", "in the unit of the outcome", checkPositive).of(panelCommand),
	freeSetting(SettingReduction, "0.25", "relative reduction of the risk that the optimal information size is for, where no important difference is given", "a fraction between 0 and 1", checkFraction).of(panelCommand),
	freeSetting(SettingPower, "0.8", "power of the optimal information size; its level is what the intervals leave", "a fraction between 0 and 1", checkFraction).of(panelCommand),
	freeSetting(SettingPrior, "0.1, 0.25, 0.5, 0.75", "probabilities of an effect before the data, turned into probabilities after", "each between 0 and 1", checkPriors),
	freeSetting(SettingOrder, "", "column that orders the studies as they accrue", "column name", checkText).unless("the date").of("cumulative"),
	choiceSetting(SettingTies, TiesNames(), TiesTogether.String(), "whether studies of one date enter together or in the order of the file").of("cumulative"),
	choiceSetting(SettingCorrection, effect.CorrectionNames(), effect.Half.String(), "what is added to a 2×2 table whose zero cell leaves no estimate"),
	freeSetting(SettingWhere, "", "pool only the rows for which this holds", "such as \"risk of bias is not high and year >= 2010\", or \"converted is no\"", checkFilter),
	freeSetting(SettingSeed, "1", "start of every random sequence", "whole number", checkSeed),
}

// panelCommand is the command that alone uses a panel's settings.
const panelCommand = "panel"

// FindSetting returns the setting of a name; the error lists the valid names.
func FindSetting(name string) (Setting, error) {
	var names []string
	for _, s := range settings {
		if choice.Fold(name) == s.Name {
			return s, nil
		}
		names = append(names, s.Name)
	}
	return Setting{}, &choice.UnknownError{What: "setting", Text: name, Valid: names}
}

// Check reports whether text is a valid value of the setting.
func (s Setting) Check(text string) error { return s.check(strings.TrimSpace(text)) }

func choiceSetting(name string, values []string, fallback, meaning string) Setting {
	names := choice.Of[int](name, values...)
	return Setting{Name: name, Values: values, Default: fallback, Meaning: meaning, check: func(text string) error {
		// The typed parser also knows synonyms; it is asked first where there is one.
		if parse, ok := synonymParsers[name]; ok {
			return parse(text)
		}
		_, err := names.Parse(text)
		return err
	}}
}

var synonymParsers = map[string]func(string) error{
	SettingMeasure:    func(t string) error { _, err := effect.ParseMeasure(t); return err },
	SettingEffects:    func(t string) error { _, err := meta.ParseEffects(t); return err },
	SettingTau:        func(t string) error { _, err := meta.ParseTau(t); return err },
	SettingCorrection: func(t string) error { _, err := effect.ParseCorrection(t); return err },
}

func freeSetting(name, fallback, meaning, unit string, check func(string) error) Setting {
	return Setting{Name: name, Default: fallback, Meaning: meaning, Unit: unit, check: check}
}

func (s Setting) unless(words string) Setting { s.Unless = words; return s }
func (s Setting) of(command string) Setting   { s.Needs = command; return s }

// Method is how studies are weighted and combined.
type Method int

// InverseVariance weights by the inverse of each study's variance; the others pool
// the counts of 2×2 tables.
const (
	InverseVariance Method = iota
	MantelHaenszel
	Peto
	ConditionalExact
	BinomialNormal
)

var methodNames = choice.Of[Method]("pooling method", slices.Insert(sparse.MethodNames(), 0, "inverse-variance")...)

// Tables returns the method as one for 2×2 tables; ok is false for InverseVariance.
func (m Method) Tables() (method sparse.Method, ok bool) {
	return sparse.Method(m - MantelHaenszel), m != InverseVariance
}

// String returns the method's name.
func (m Method) String() string { return methodNames.String(m) }

// MethodNames returns the names of all methods.
func MethodNames() []string { return methodNames.All() }

// ParseMethod returns the method that text names.
func ParseMethod(text string) (Method, error) { return methodNames.Parse(text) }

// Ties says what happens to studies of one date in a cumulative analysis.
type Ties int

// TiesTogether lets them enter as one step, TiesFile in the order of the file.
const (
	TiesTogether Ties = iota
	TiesFile
)

var tiesNames = choice.Of[Ties]("rule for ties", "together", "file")

// String returns the rule's name.
func (t Ties) String() string { return tiesNames.String(t) }

// TiesNames returns the names of all rules.
func TiesNames() []string { return tiesNames.All() }

// ParseTies returns the rule that text names.
func ParseTies(text string) (Ties, error) { return tiesNames.Parse(text) }

func parseNumber(text string) (float64, error) {
	text = strings.NewReplacer("\u2212", "-", "\u2013", "-").Replace(strings.TrimSpace(text))
	x, err := strconv.ParseFloat(text, 64)
	if err != nil || math.IsNaN(x) || math.IsInf(x, 0) || strings.ContainsAny(text, "xX_pP") {
		return 0, fmt.Errorf("%q is not a number; write it with a decimal point, such as 0.8", text)
	}
	return x, nil
}

func parseNumbers(text string) ([]float64, error) {
	var all []float64
	for _, part := range strings.FieldsFunc(text, func(r rune) bool { return r == ',' || r == ';' }) {
		x, err := parseNumber(part)
		if err != nil {
			return nil, err
		}
		all = append(all, x)
	}
	if len(all) == 0 {
		return nil, fmt.Errorf("a number is missing")
	}
	return all, nil
}

func parseLevel(text string) (float64, error) {
	percent, isPercent := strings.CutSuffix(text, "%")
	x, err := parseNumber(percent)
	if err != nil {
		return 0, err
	}
	if isPercent {
		x /= 100
	}
	if !(0 < x && x < 1) {
		hint := "such as 0.95"
		if !isPercent && 1 < x && x < 100 {
			hint = fmt.Sprintf("for %s%% write %s", strings.TrimSpace(text), strconv.FormatFloat(x/100, 'g', -1, 64))
		}
		return 0, fmt.Errorf("%q is no level; it is a fraction between 0 and 1: %s", text, hint)
	}
	return x, nil
}

func parseProbabilities(text string) ([]float64, error) {
	all, err := parseNumbers(text)
	if err != nil {
		return nil, err
	}
	for _, p := range all {
		if !(0 < p && p < 1) {
			return nil, fmt.Errorf("%s is no probability strictly between 0 and 1; 20%% is written 0.2", strconv.FormatFloat(p, 'g', -1, 64))
		}
	}
	return all, nil
}

func checkLevel(text string) error  { _, err := parseLevel(text); return err }
func checkNumber(text string) error { _, err := parseNumber(text); return err }
func checkPriors(text string) error { _, err := parseProbabilities(text); return err }
func checkFilter(text string) error { _, err := ParseFilter(text); return err }
func checkSeed(text string) error   { _, err := parseSeed(text); return err }

func checkText(text string) error {
	if text == "" {
		return fmt.Errorf("a name is missing")
	}
	return nil
}

func checkNumbers(text string) error {
	all, err := parseNumbers(text)
	if err == nil && len(all) > 2 {
		err = fmt.Errorf("%d numbers given; give one, or one for each side", len(all))
	}
	return err
}

func parseSeed(text string) (uint64, error) {
	seed, err := strconv.ParseUint(text, 10, 64)
	if err != nil {
		return 0, fmt.Errorf("%q is not a whole number from 0 up", text)
	}
	return seed, nil
}
