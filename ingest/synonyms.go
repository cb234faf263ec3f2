package ingest

import (
	"strings"
	"sync"
	"unicode"

	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// meaning is what a header says its column holds.
type meaning struct {
	field   review.Field
	measure effect.Measure // of an estimate's column that is named by its measure
	level   float64        // of limits, 0 when the header does not say
}

// synonyms lists for each field the plain trade words that name it, folded; the
// field's own name always does.
var synonyms = map[review.Field][]string{
	review.StudyName: {"étude", "etude", "etudes", "études", "studie", "studien", "estudio", "estudios", "auteur", "auteurs", "autor", "autores", "autoren", "nom étude", "essai", "ensayo", "trial", "author", "authors", "first author", "author year", "author and year", "study name", "trial name",
		"study author", "name", "name study", "study year", "studies", "study reference", "citation"},
	review.StudyID:      {"study id", "trial id", "study number", "trial number", "record id"},
	review.Registration: {"registration number", "registration id", "registry number", "trial registration", "registry id"},
	review.DateField: {"année", "annee", "ano", "année publication", "jahr", "publikationsjahr", "erscheinungsjahr", "año", "año publicación", "year", "publication year", "year publication", "pub year", "year published", "publication date", "date publication",
		"date published", "published", "study date"},
	review.OutcomeField:     {"endpunkt", "zielgröße", "critère jugement", "desenlace", "outcome name", "outcomes", "endpoint", "end point", "outcome measure"},
	review.Comparison:       {"contrast", "comparison name"},
	review.TimePoint:        {"timepoint", "time", "follow up", "followup", "follow up time", "length follow up"},
	review.Subgroup:         {"sub group", "stratum"},
	review.MeasureField:     {"effect measure", "measure effect", "type effect", "effect type"},
	review.Design:           {"study design", "trial design", "study type"},
	review.BetterField:      {"better direction", "wanted direction", "desired direction", "better values"},
	review.Cluster:          {"cluster trial", "clustered", "cluster randomised", "cluster randomized"},
	review.Adjusted:         {"adjusted estimate", "adjustment"},
	review.ResultType:       {"change or final", "type result"},
	review.Unit:             {"units", "unit measurement"},
	review.RiskOfBias:       {"risque biais", "verzerrungsrisiko", "riesgo sesgo", "risk bias", "rob", "overall risk bias", "risk bias overall", "bias", "risk bias judgement"},
	review.SourceField:      {"page", "source data", "data source", "where found"},
	review.HowObtained:      {"obtained", "how data were obtained", "origin"},
	review.NoteField:        {"bemerkung", "bemerkungen", "anmerkung", "anmerkungen", "kommentar", "remarque", "remarques", "commentaire", "commentaires", "nota", "notas", "comentario", "comentarios", "notes", "comment", "comments", "remark", "remarks"},
	review.Accept:           {"accepted", "accept finding", "accept findings"},
	review.Estimate:         {"effekt", "effektschätzer", "schätzer", "effet", "estimation", "efecto", "estimación", "effect", "effect size", "effect estimate", "point estimate", "estimated effect", "treatment effect"},
	review.AnalysisEstimate: {"y", "log estimate", "log effect", "log effect size", "ln estimate", "ln effect", "log point estimate"},
	review.StandardError:    {"standardfehler", "erreur standard", "erreur type", "error estándar", "error típico", "standard error", "std error", "std err", "stderr", "s e"},
	review.LimitLevel:       {"level", "confidence level", "level ci", "ci percent"},
	review.PValue:           {"p wert", "valeur p", "valor p", "p value", "pvalue", "p val"},
	review.AnalysisLow:      {"log ci low", "log ci lower", "ln ci low", "ln ci lower", "log lower limit", "log lower"},
	review.AnalysisHigh:     {"log ci high", "log ci upper", "ln ci high", "ln ci upper", "log upper limit", "log upper"},
	// What is given for each arm is made of a quantity and an arm, below; limits are
	// made of a side and a limit.
	review.Direction:         {"direction effect", "effect direction", "direction result", "sign"},
	review.TestStatistic:     {"z", "t statistic", "z statistic", "t value", "z value", "test statistic", "t test", "z score", "log rank z", "logrank z"},
	review.PSides:            {"sides", "sided", "p value sides", "tails", "tailed", "sides p", "sides test"},
	review.WithinCorrelation: {"corr", "correlation baseline", "correlation baseline end", "within person correlation", "correlation within people", "pre post correlation", "rho"},
	review.SDDifference: {"sd difference", "sd differences", "sd within person difference", "sd paired difference", "sd paired differences", "standard deviation difference",
		"standard deviation differences", "sd diff"},
	review.Coefficient: {"correlation coefficient", "pearson r", "pearson correlation", "spearman r", "r value"},
	review.Events:      {"ereignisse", "événements", "évènements", "eventos", "todesfälle", "décès", "event", "number events", "n events", "deaths", "cases", "number cases", "number with event", "total events", "events total"},
	review.Total: {"gesamtzahl", "effectif", "effectif total", "tamaño muestra", "stichprobengröße", "n", "sample size", "n total", "total n", "number participants", "number patients", "participants", "patients", "n patients", "n participants",
		"total participants", "n analysed", "n analyzed", "total number"},
	review.PersonTime:            {"person years", "patient years", "person months", "person days", "patient months", "patient days", "time at risk", "total person time"},
	review.ObservedMinusExpected: {"o e", "o minus e", "observed expected", "o less e", "logrank o e", "log rank o e"},
	review.Variance:              {"v", "variance o e", "variance o minus e", "v o e", "hypergeometric variance", "logrank variance", "log rank variance"},
	review.ClusterSize:           {"mean cluster size", "average cluster size", "people per cluster"},
	review.ICC:                   {"intracluster correlation", "intra cluster correlation", "intraclass correlation", "intracluster correlation coefficient", "intraclass correlation coefficient"},
	review.DesignEffect:          {"deff", "variance inflation"},
	review.ReportedEstimate:      {"published estimate", "reported effect", "published effect", "estimate reported", "estimate as reported"},
	review.ReportedLow:           {"reported ci lower", "reported lower", "reported low", "published ci low", "published ci lower", "ci low reported", "reported lower limit"},
	review.ReportedHigh:          {"reported ci upper", "reported upper", "reported high", "published ci high", "published ci upper", "ci high reported", "reported upper limit"},
	review.ReportedP:             {"reported p value", "published p", "published p value", "p reported", "p value reported"},
	review.ScaleLow:              {"scale minimum", "scale min", "lowest score", "lowest possible score", "minimum possible", "scale lower end"},
	review.ScaleHigh:             {"scale maximum", "scale max", "highest score", "highest possible score", "maximum possible", "scale upper end"},
	review.Items:                 {"number items", "n items", "scale items", "items scale"},
	review.NoField:               nil,
}

// quantity is what is given once for each arm.
type quantity struct {
	treated, control review.Field
	words            []string
}

var quantities = []quantity{
	{review.EventsTreated, review.EventsControl, []string{"events", "event", "n events", "no events", "number events", "events n", "number with event",
		"n with event", "deaths", "cases", "ereignisse", "événements", "évènements", "eventos", "todesfälle", "décès"}},
	{review.TotalTreated, review.TotalControl, []string{"total", "n", "totals", "total n", "n total", "sample size", "size", "number", "participants", "patients", "people",
		"subjects", "n patients", "n participants", "number patients", "number participants", "total number", "n analysed", "n analyzed", "analysed", "analyzed", "gesamt", "effectif", "patienten", "pacientes"}},
	{review.MeanTreated, review.MeanControl, []string{"mean", "average", "mean value", "mittelwert", "moyenne", "media"}},
	{review.SDTreated, review.SDControl, []string{"sd", "standard deviation", "std dev", "std deviation", "st dev", "s d", "stdev", "standardabweichung", "écart type", "desviación estándar", "desviación típica"}},
	{review.SETreated, review.SEControl, []string{"se", "standard error", "std error", "sem", "se mean", "standard error mean", "s e"}},
	{review.BaselineMeanTreated, review.BaselineMeanControl, []string{"baseline mean", "mean baseline", "mean at baseline", "pre mean", "initial mean"}},
	{review.BaselineSDTreated, review.BaselineSDControl, []string{"baseline sd", "sd baseline", "sd at baseline", "pre sd", "initial sd", "baseline standard deviation"}},
	{review.MedianTreated, review.MedianControl, []string{"median", "med"}},
	{review.Q1Treated, review.Q1Control, []string{"q1", "lower quartile", "first quartile", "25th percentile", "25th centile", "p25", "quartile 1"}},
	{review.Q3Treated, review.Q3Control, []string{"q3", "upper quartile", "third quartile", "75th percentile", "75th centile", "p75", "quartile 3"}},
	{review.MinTreated, review.MinControl, []string{"min", "minimum", "smallest", "lowest"}},
	{review.MaxTreated, review.MaxControl, []string{"max", "maximum", "largest", "highest"}},
	{review.PersonTimeTreated, review.PersonTimeControl, []string{"person time", "person years", "patient years", "person months", "person days", "patient months", "patient days", "time at risk"}},
	{review.ShareTreated, review.ShareControl, []string{"share", "share people", "allocation share"}},
	{review.RandomisedTreated, review.RandomisedControl, []string{"randomised", "randomized", "n randomised", "n randomized", "number randomised", "number randomized",
		"randomly assigned", "allocated"}},
}

// namedQuantities are given for each arm, too, but without an arm their words mean
// something else.
var namedQuantities = []quantity{
	{review.MeanLowTreated, review.MeanLowControl, []string{"ci low", "ci lower", "mean ci low", "mean ci lower", "lower ci", "lower limit", "ci low mean", "ci lower mean"}},
	{review.MeanHighTreated, review.MeanHighControl, []string{"ci high", "ci upper", "mean ci high", "mean ci upper", "upper ci", "upper limit", "ci high mean", "ci upper mean"}},
}

// Words for the arms.
var (
	treatedWords = []string{"treated", "treatment", "treatments", "intervention", "experimental", "experiment", "active", "active treatment", "exposed", "verum",
		"behandlung", "behandelt", "behandlungsgruppe", "interventionsgruppe", "traitement", "traité", "traités", "groupe traité", "tratamiento", "tratado", "tratados", "intervención", "grupo tratado"}
	controlWords = []string{"control", "controls", "comparator", "comparison", "placebo", "usual care", "standard care", "no treatment", "no intervention",
		"unexposed", "untreated", "usual treatment", "standard treatment", "sham",
		"kontrolle", "kontrollgruppe", "contrôle", "témoin", "témoins", "groupe contrôle", "groupe témoin", "controle", "grupo control"}
)

// controlHints are words that mark a group's name as the control arm when the
// reviewer has named the arms.
var controlHints = map[string]bool{"control": true, "controls": true, "comparator": true, "placebo": true, "usual": true, "standard": true,
	"without": true, "no": true, "not": true, "non": true, "none": true, "sham": true, "untreated": true, "unexposed": true, "nothing": true, "dummy": true}

// measureWords name an estimate's column by its measure.
var measureWords = []struct {
	measure effect.Measure
	words   []string
}{
	{effect.OddsRatio, []string{"odds ratio", "or"}},
	{effect.RiskRatio, []string{"risk ratio", "relative risk", "rr"}},
	{effect.RiskDifference, []string{"risk difference", "absolute risk difference", "rd"}},
	{effect.HazardRatio, []string{"hazard ratio", "hazards ratio", "hr"}},
	{effect.RateRatio, []string{"incidence rate ratio", "rate ratio", "irr"}},
	{effect.StandardisedMeanDifference, []string{"standardised mean difference", "standardized mean difference", "smd"}},
	{effect.MeanDifference, []string{"mean difference", "difference means", "difference between means", "weighted mean difference", "mean diff", "md", "wmd"}},
	{effect.RatioOfMeans, []string{"ratio means"}},
}

// limitForms are the phrases of a limit; the word of the side replaces "*".
var limitForms = []string{"ci *", "* ci", "* limit", "* bound", "ci * limit", "* ci limit", "* limit ci", "ci * bound", "* ci bound",
	"* confidence limit", "* confidence bound", "confidence limit *", "confidence *", "limit *"}

// foreignLimits are the limits of an interval in German, French and Spanish.
var foreignLimits = []struct{ low, high []string }{
	{[]string{"untere grenze", "untergrenze", "untere ki grenze", "ki untere grenze", "ki unten", "ki untergrenze", "unteres konfidenzlimit"},
		[]string{"obere grenze", "obergrenze", "obere ki grenze", "ki obere grenze", "ki oben", "ki obergrenze", "oberes konfidenzlimit"}},
	{[]string{"ic inf", "ic inférieur", "ic inférieure", "borne inférieure", "borne inf", "limite inférieure", "ic borne inférieure", "borne inférieure ic", "ic bas"},
		[]string{"ic sup", "ic supérieur", "ic supérieure", "borne supérieure", "borne sup", "limite supérieure", "ic borne supérieure", "borne supérieure ic", "ic haut"}},
	{[]string{"límite inferior", "limite inferior", "ic inferior", "ic límite inferior", "límite inferior ic"},
		[]string{"límite superior", "limite superior", "ic superior", "ic límite superior", "límite superior ic"}},
}

// dictionary is the whole vocabulary, folded.
type dictionary struct {
	phrases  map[string]meaning
	measures map[string]effect.Measure // phrases that name a measure
	bare     map[string]quantity       // quantities without an arm
	treated  map[string]bool
	control  map[string]bool
}

var vocabulary = sync.OnceValue(func() *dictionary {
	d := &dictionary{phrases: map[string]meaning{}, measures: map[string]effect.Measure{}, bare: map[string]quantity{},
		treated: map[string]bool{}, control: map[string]bool{}}
	d.addArms()
	d.addMeasures()
	d.addLimits()
	for field, words := range synonyms {
		for _, word := range words {
			d.add(word, meaning{field: field})
		}
	}
	for _, name := range review.FieldNames() {
		if field, err := review.ParseField(name); err == nil {
			d.add(name, meaning{field: field})
		}
	}
	return d
})

func (d *dictionary) add(phrase string, m meaning) {
	folded, _ := fold(phrase)
	d.phrases[folded] = m
}

func (d *dictionary) addArms() {
	// No word of an arm changes how one of a quantity is folded, nor the reverse, so
	// that each is folded once and not once for each pair.
	combine := func(arms []string, q quantity, field review.Field) {
		words := foldedAll(q.words)
		for _, arm := range foldedAll(arms) {
			for _, word := range words {
				d.phrases[joined(word, arm)] = meaning{field: field}
				d.phrases[joined(arm, word)] = meaning{field: field}
			}
		}
	}
	for _, q := range quantities {
		combine(treatedWords, q, q.treated)
		combine(controlWords, q, q.control)
		for _, word := range q.words {
			d.bare[word] = q
		}
	}
	for _, q := range namedQuantities {
		combine(treatedWords, q, q.treated)
		combine(controlWords, q, q.control)
	}
	for _, word := range treatedWords {
		d.treated[word] = true
	}
	for _, word := range controlWords {
		d.control[word] = true
	}
}

// foldedAll folds each of some phrases.
func foldedAll(phrases []string) []string {
	folded := make([]string, len(phrases))
	for i, phrase := range phrases {
		folded[i], _ = fold(phrase)
	}
	return folded
}

// joined joins folded phrases, of which one may have been all fillers.
func joined(a, b string) string {
	if a == "" || b == "" {
		return a + b
	}
	return a + " " + b
}

func (d *dictionary) addMeasures() {
	for _, m := range measureWords {
		for _, word := range m.words {
			d.measures[word] = m.measure
			d.add(word, meaning{field: review.Estimate, measure: m.measure})
			d.add("adjusted "+word, meaning{field: review.Estimate, measure: m.measure})
			if !m.measure.Log() {
				continue
			}
			for _, log := range []string{"log ", "ln ", "natural log ", "natural logarithm ", "logarithm ", "log", "ln"} {
				d.measures[log+word] = m.measure
				d.add(log+word, meaning{field: review.AnalysisEstimate, measure: m.measure})
			}
		}
	}
}

func (d *dictionary) addLimits() {
	sides := []struct {
		field review.Field
		words []string
	}{
		{review.LimitLow, []string{"low", "lower"}},
		{review.LimitHigh, []string{"high", "upper"}},
	}
	for _, side := range sides {
		for _, word := range side.words {
			for _, form := range limitForms {
				d.add(strings.Replace(form, "*", word, 1), meaning{field: side.field})
			}
		}
	}
	for _, words := range foreignLimits {
		for _, word := range words.low {
			d.add(word, meaning{field: review.LimitLow})
		}
		for _, word := range words.high {
			d.add(word, meaning{field: review.LimitHigh})
		}
	}
	for word, field := range map[string]review.Field{"lower": review.LimitLow, "upper": review.LimitHigh, "low": review.LimitLow, "high": review.LimitHigh, "lcl": review.LimitLow, "ucl": review.LimitHigh} {
		d.add(word, meaning{field: field})
	}
}

// recognise returns what a header says; ok is false if it says nothing known.
func recognise(header string) (m meaning, ok bool) {
	if len(header) > maxHeaderBytes || strings.IndexFunc(header, unicode.IsLetter) < 0 {
		return meaning{}, false
	}
	phrase, level := fold(header)
	if phrase == "" {
		return meaning{}, false
	}
	d := vocabulary()
	m, ok = d.phrases[phrase]
	if !ok {
		m, ok = d.aboutEstimate(phrase)
	}
	if ok && negated.MatchString(header) {
		return meaning{}, false
	}
	if ok && (m.field == review.LimitLow || m.field == review.LimitHigh || m.field == review.AnalysisLow || m.field == review.AnalysisHigh) {
		m.level = level
	}
	return m, ok
}

// maxHeaderBytes is the length beyond which a text is no header but a sentence.
const maxHeaderBytes = 200

// maxHeaderWords is more than the words of any phrase that aboutEstimate knows.
const maxHeaderWords = 12

// aboutEstimate recognises limits and standard errors that name their measure,
// such as "hr ci low", "upper limit odds ratio" or "se log or". A standard error
// of a ratio that is not logged is not taken for one of its logarithm.
func (d *dictionary) aboutEstimate(phrase string) (meaning, bool) {
	words := strings.Split(phrase, " ")
	if len(words) > maxHeaderWords {
		return meaning{}, false
	}
	for cut := 1; cut < len(words); cut++ {
		head, tail := strings.Join(words[:cut], " "), strings.Join(words[cut:], " ")
		for _, split := range [2][2]string{{head, tail}, {tail, head}} {
			measure, known := d.estimateWord(split[0])
			m, limit := d.phrases[split[1]]
			if !known || !limit {
				continue
			}
			logged := strings.HasPrefix(split[0], "log") || strings.HasPrefix(split[0], "ln") || strings.HasPrefix(split[0], "natural") || split[0] == "y"
			switch {
			case m.field == review.Estimate && m.measure == effect.Unspecified && split[0] != "y":
				return d.phrases[split[0]], true
			case m.field == review.LimitLow && logged:
				return meaning{field: review.AnalysisLow, measure: measure}, true
			case m.field == review.LimitHigh && logged:
				return meaning{field: review.AnalysisHigh, measure: measure}, true
			case m.field == review.LimitLow || m.field == review.LimitHigh,
				m.field == review.StandardError && (logged || !measure.Log()):
				return meaning{field: m.field, measure: measure}, true
			}
		}
	}
	return meaning{}, false
}

// estimateWord returns the measure of a phrase that names an estimate.
func (d *dictionary) estimateWord(phrase string) (effect.Measure, bool) {
	if measure, ok := d.measures[phrase]; ok {
		return measure, true
	}
	m, ok := d.phrases[phrase]
	return effect.Unspecified, ok && (m.field == review.Estimate || m.field == review.AnalysisEstimate)
}

// bareQuantity recognises a quantity named without an arm, as below a group.
func bareQuantity(header string) (quantity, bool) {
	phrase, _ := fold(header)
	q, ok := vocabulary().bare[phrase]
	return q, ok
}
