package main

import (
	"cmp"
	"fmt"
	"maps"
	"slices"
	"strings"

	"github.com/urfave/cli/v2"

	"steelyard/forest/words"
	"steelyard/meta"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// Names of weigh's own flags.
const (
	flagZ        = "z"
	flagT        = "t"
	flagChi2     = "chi2"
	flagF        = "f"
	flagP        = "p"
	flagEstimate = "estimate"
	flagDF       = "df"
	flagDF2      = "df2"
	flagSE       = "se"
	flagLow      = "ci-low"
	flagHigh     = "ci-high"
	flagRatio    = "ratio"
	flagOneSided = "one-sided"
	flagNamed    = "categories"
)

func weighCommand() *cli.Command {
	number := func(name, usage string) cli.Flag { return &cli.Float64Flag{Name: name, Usage: usage} }
	flags := []cli.Flag{
		number(flagZ, "a normal statistic"),
		number(flagT, "Student's t; needs --df"),
		number(flagChi2, "a chi-square statistic; needs --df"),
		number(flagF, "an F statistic; needs --df and --df2"),
		number(flagP, "a two-sided p-value, when there is nothing else"),
		number(flagEstimate, "an estimate; needs --se, or --ci-low and --ci-high"),
		number(flagDF, "degrees of freedom; beside --estimate, of its standard error"),
		number(flagDF2, "degrees of freedom of F's denominator"),
		number(flagSE, "standard error, of the logarithm for a ratio"),
		number(flagLow, "lower limit of the interval"),
		number(flagHigh, "upper limit of the interval"),
		&cli.BoolFlag{Name: flagRatio, Usage: "the estimate, its limits and thresholds are ratios: they are logged, and no effect is 1"},
		&cli.BoolFlag{Name: flagOneSided, Usage: "weigh an effect above none against none; turn the sign for one below"},
		&cli.BoolFlag{Name: flagNamed, Usage: "also the categories of Jeffreys (1961) and of Kass & Raftery (1995)"},
	}
	for _, name := range []string{review.SettingNull, review.SettingImportant, review.SettingPrior, review.SettingLevel, review.SettingEvidence,
		review.SettingEffectMean, review.SettingEffectSD, review.SettingEffectSide} {
		setting, err := review.FindSetting(name)
		if err != nil {
			panic(err) // a name that the table of settings does not have is a bug of this file
		}
		flags = append(flags, &cli.StringFlag{Name: name, Usage: settingHelp(setting)})
	}
	return &cli.Command{
		Name:  "weigh",
		Usage: "weigh the evidence in numbers alone, without a sheet",
		UsageText: "steelyard weigh --z Z | --t T --df N | --chi2 X --df N | --f F --df N --df2 M | --p P |\n" +
			"                  --estimate E (--se S | --ci-low L --ci-high U) [--ratio] [flags]",
		Description: "Example: steelyard weigh --ratio --estimate 0.71 --ci-low 0.58 --ci-high 0.86",
		Flags:       slices.Concat(flags, []cli.Flag{formatFlag()}, outputFlags()),
		Action:      weigh,
	}
}

func weigh(c *cli.Context) error {
	if c.NArg() > 0 {
		return &callError{fmt.Sprintf("weigh takes no file, but %q is given; to pool a sheet: steelyard pool %s", c.Args().First(), c.Args().First())}
	}
	format, err := outputWanted(c)
	if err != nil {
		return err
	}
	numbers, err := weighNumbers(c)
	if err != nil {
		return err
	}
	w, err := synthesis.Weigh(numbers)
	if err != nil {
		// Any ratio is weighed as a risk ratio; the message is about ratios.
		return &callError{strings.ReplaceAll(err.Error(), "risk ratio", "ratio")}
	}
	return reply(c, format, weighAnswer(w, numbers.Level, c.Bool(flagNamed)), w.Document())
}

// weighNumbers reads the flags: exactly one statistic with what goes with it.
func weighNumbers(c *cli.Context) (synthesis.Numbers, error) {
	var n synthesis.Numbers
	statistics := []string{flagZ, flagT, flagChi2, flagF, flagP, flagEstimate} // in the order of synthesis.Statistic
	given := slices.DeleteFunc(slices.Clone(statistics), func(name string) bool { return !c.IsSet(name) })
	if len(given) != 1 {
		return n, &callError{fmt.Sprintf("give one of --%s; %d are given; see: steelyard weigh --help", strings.Join(statistics, ", --"), len(given))}
	}
	n.Statistic = synthesis.Statistic(slices.Index(statistics, given[0]))
	n.Value = c.Float64(given[0])
	n.DF, n.DF2, n.SE = c.Float64(flagDF), c.Float64(flagDF2), c.Float64(flagSE)
	n.Ratio, n.OneSided = c.Bool(flagRatio), c.Bool(flagOneSided)
	if err := strayFlags(c, n.Statistic); err != nil {
		return n, err
	}
	if c.IsSet(flagSE) && !(n.SE > 0) {
		return n, &callError{"--se must be greater than 0"}
	}
	if c.IsSet(flagDF) && !(n.DF > 0) {
		return n, &callError{"--df must be greater than 0"}
	}
	if c.IsSet(flagLow) != c.IsSet(flagHigh) {
		return n, &callError{"both limits are needed: --ci-low and --ci-high"}
	}
	if c.IsSet(flagLow) {
		n.Limits = &meta.Limits{Low: c.Float64(flagLow), High: c.Float64(flagHigh)}
	}
	var plan review.Plan
	if err := applySettings(c, &plan); err != nil {
		return n, err
	}
	a, err := plan.Analysis("")
	n.Null, n.Important, n.Level, n.Weighing = a.Null, a.Important, a.Model.Level, a.Weighing
	return n, err
}

// strayFlags refuses flags that the given statistic cannot use.
func strayFlags(c *cli.Context, statistic synthesis.Statistic) error {
	uses := map[string][]synthesis.Statistic{
		flagDF:              {synthesis.StatisticT, synthesis.StatisticChiSquare, synthesis.StatisticF, synthesis.Estimated},
		flagDF2:             {synthesis.StatisticF},
		flagSE:              {synthesis.Estimated},
		flagLow:             {synthesis.Estimated},
		review.SettingLevel: {synthesis.Estimated},
	}
	needsPrior := []string{review.SettingEffectMean, review.SettingEffectSD, review.SettingEffectSide}
	form, err := evidence.ParseForm(cmp.Or(c.String(review.SettingEvidence), evidence.Empirical.String()))
	if err == nil && !form.UnderPrior() {
		for _, name := range needsPrior {
			uses[name] = nil
		}
		if !form.OverTau() {
			uses[review.SettingEvidence] = []synthesis.Statistic{synthesis.StatisticT, synthesis.StatisticF, synthesis.Estimated}
		}
	}
	for _, name := range slices.Sorted(maps.Keys(uses)) {
		if c.IsSet(name) && !slices.Contains(uses[name], statistic) {
			return &callError{fmt.Sprintf("--%s means nothing beside --%s; leave it away", name, statistic)}
		}
	}
	if _, restricted := uses[review.SettingEvidence]; restricted && c.IsSet(review.SettingEvidence) && statistic == synthesis.Estimated && !c.IsSet(flagDF) {
		return &callError{"--evidence means nothing beside an estimate without --df; leave it away"}
	}
	return nil
}

// weighAnswer is the answer of weigh; categories adds two published scales.
func weighAnswer(w *synthesis.Weighing, level float64, categories bool) *page {
	var p page
	measure := "estimate"
	if w.Measure.Log() {
		measure = "ratio"
	}
	if m := w.Mean; m != nil {
		notation := words.NotationOf(w.Measure, m.SE)
		reader := func(y float64) float64 { return effect.ToReader(w.Measure, y) }
		p.value("Effect", notation.Estimate(reader(m.Estimate), reader(m.Low), reader(m.High)),
			fmt.Sprintf("%s, %s interval; %s", measure, words.Level(level), words.Test(*m)))
		if w.Uneven {
			hint := "check them, and the level"
			if !w.Measure.Log() && m.Low > 0 {
				hint = "is this a ratio (--ratio)?"
			}
			p.value("", "", "the limits given lie unevenly around the estimate; the interval shown is rebuilt from their width: "+hint)
		}
	}
	if w.Sellke != nil && w.Evidence.Favours() == evidence.NoEffect {
		p.value("Evidence", "none for an effect", "a p-value this large is no evidence for an effect; alone it is never evidence of none")
	} else {
		p.value("Evidence", words.Evidence(w.Evidence), words.Strength(w.Evidence))
		p.value("", "", weighForm(w)+boundText(w))
		if categories {
			p.value("", "", fmt.Sprintf("Jeffreys (1961): %s; Kass & Raftery (1995): %s", evidence.Jeffreys(w.Evidence), evidence.KassRaftery(w.Evidence)))
		}
		p.beliefs(&synthesis.Result{Posterior: w.Posterior, DoubtersPrior: w.Doubter})
	}
	for _, region := range w.Regions {
		p.row(region.Name, words.RegionEvidence(region))
	}
	p.line("")
	p.item("·", synthesis.EvidenceCaution(weighedForm(w)...))
	return &p
}

// weighForm says in which form the evidence is, and under which prior.
func weighForm(w *synthesis.Weighing) string {
	if w.Prior == nil {
		return w.Form + " form"
	}
	if w.Mean == nil {
		return fmt.Sprintf("Bayes factor, prior for the effect: %s of scale %s standard errors", words.PriorKind(w.Prior.Kind), words.PriorScale(w.Prior.Scale)) + words.PriorSide(w.Prior.Side)
	}
	return "Bayes factor, prior for the effect: " + words.EffectPrior(w.Measure, w.Null, *w.Prior)
}

// weighedForm is the form that the caution is about; those that have no limit against
// no effect have none.
func weighedForm(w *synthesis.Weighing) []evidence.Form {
	form, err := evidence.ParseForm(w.Form)
	switch {
	case w.Form == "student-t" || (err == nil && form.UnderPrior()):
		return []evidence.Form{form}
	case w.Form == "normal" || w.Form == "matched":
		return []evidence.Form{evidence.Empirical}
	}
	return nil
}

// boundText says what stands beside the evidence: the most that any prior could
// give, or the other calibration of a p-value alone.
func boundText(w *synthesis.Weighing) string {
	switch {
	case w.Bound != nil:
		return "; the most that any prior could give: " + words.OddsInSentence(w.Bound.Ln())
	case w.Sellke != nil:
		return fmt.Sprintf(", from 10p; by −e·p·ln p (Sellke, Bayarri & Berger 2001): %s", words.OddsInSentence(w.Sellke.Ln()))
	}
	return ""
}
