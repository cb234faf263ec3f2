package ingest

import (
	"regexp"
	"slices"
	"strings"

	"steelyard/meta/review"
)

// saying is what a header that is not recognised says by its words alone, so that
// no guess takes it for something else.
type saying int

// What a header may say.
const (
	saysEvents saying = iota
	saysTotal
	saysMean
	saysSD
	saysSE
	saysEstimate
	saysLow
	saysHigh
	saysP
	saysVariance // none of the fields of an effect
	saysWithout  // people without the event
	saysPercent
	saysOther // a median, a quartile, a time
)

// sayings are the words of a header that say what its column holds.
var sayings = map[string]saying{
	"events": saysEvents, "event": saysEvents, "deaths": saysEvents, "cases": saysEvents, "died": saysEvents, "dead": saysEvents, "ereignisse": saysEvents,
	"total": saysTotal, "totals": saysTotal, "n": saysTotal, "size": saysTotal, "participants": saysTotal, "patients": saysTotal, "people": saysTotal, "randomised": saysTotal, "randomized": saysTotal,
	"mean": saysMean, "average": saysMean,
	"sd": saysSD, "stdev": saysSD, "deviation": saysSD, "std": saysSD,
	"se": saysSE, "sem": saysSE, "stderr": saysSE, "error": saysSE,
	"estimate": saysEstimate, "effect": saysEstimate, "difference": saysEstimate, "beta": saysEstimate, "coefficient": saysEstimate, "ratio": saysEstimate,
	"lower": saysLow, "low": saysLow, "lcl": saysLow, "upper": saysHigh, "high": saysHigh, "ucl": saysHigh,
	"p": saysP, "pvalue": saysP,
	"variance": saysVariance, "var": saysVariance, "v": saysVariance, "vi": saysVariance, "sd2": saysVariance, "se2": saysVariance,
	"non": saysWithout, "nonevents": saysWithout, "without": saysWithout, "not": saysWithout, "survivors": saysWithout, "survived": saysWithout, "alive": saysWithout, "healthy": saysWithout,
	"bi": saysWithout, "di": saysWithout, // cells of a 2×2 table named a to d, of study i
	"%": saysPercent, "percent": saysPercent, "percentage": saysPercent, "pct": saysPercent, "proportion": saysPercent, "rate": saysPercent, "risk": saysPercent, "share": saysPercent,
	"median": saysOther, "iqr": saysOther, "quartile": saysOther, "range": saysOther, "q1": saysOther, "q3": saysOther, "min": saysOther, "max": saysOther,
	"weight": saysOther, "age": saysOther, "dose": saysOther, "years": saysOther, "months": saysOther, "weeks": saysOther, "days": saysOther, "time": saysOther, "baseline": saysOther,
}

// negated are counts of people without the event that could be misread as a number
// of events: "No events" is not "No. of events".
var negated = regexp.MustCompile(`(?i)\b(no|non|not|without)[\s_-]+(events?|deaths?|cases?)\b`)

// sayingsOf returns what a header says, each once; "n" says nothing beside events.
func sayingsOf(header string) map[saying]bool {
	phrase, _ := fold(header)
	said := map[saying]bool{}
	for _, word := range strings.Fields(phrase) {
		if s, ok := sayings[word]; ok {
			said[s] = true
		}
	}
	if strings.Contains(header, "%") && !said[saysLow] && !said[saysHigh] {
		said[saysPercent] = true
	}
	if negated.MatchString(header) {
		said[saysWithout] = true
	}
	if said[saysEvents] {
		delete(said, saysTotal)
	}
	for _, s := range []saying{saysSD, saysSE} { // "standard error of the mean"
		if said[s] {
			delete(said, saysMean)
		}
	}
	if said[saysSE] && strings.Contains(" "+phrase+" ", " std error ") {
		delete(said, saysSD)
	}
	return said
}

// fieldSays returns what a header must say to be taken for a field.
func fieldSays(f review.Field) saying {
	switch f {
	case review.EventsTreated, review.EventsControl, review.Events:
		return saysEvents
	case review.TotalTreated, review.TotalControl, review.Total:
		return saysTotal
	case review.MeanTreated, review.MeanControl:
		return saysMean
	case review.SDTreated, review.SDControl:
		return saysSD
	case review.SETreated, review.SEControl, review.StandardError:
		return saysSE
	case review.Estimate, review.AnalysisEstimate:
		return saysEstimate
	case review.LimitLow, review.AnalysisLow:
		return saysLow
	case review.LimitHigh, review.AnalysisHigh:
		return saysHigh
	case review.PValue:
		return saysP
	}
	return saysOther
}

// side is the arm that a header or a field speaks of.
type side int

const (
	noSide side = iota
	treatedSide
	controlSide
)

// sideWords are short forms of the arms, as in "mean_t".
var sideWords = map[string]side{"t": treatedSide, "trt": treatedSide, "tx": treatedSide, "int": treatedSide, "exp": treatedSide, "e": treatedSide, "drug": treatedSide,
	"c": controlSide, "ctl": controlSide, "ctrl": controlSide, "con": controlSide, "cont": controlSide, "pbo": controlSide, "plac": controlSide}

// sideOf returns the arm that a header names, if it names one.
func sideOf(header string) side {
	phrase, _ := fold(header)
	d := vocabulary()
	found := noSide
	for _, word := range strings.Fields(phrase) {
		s := sideWords[word]
		switch {
		case d.treated[word]:
			s = treatedSide
		case d.control[word]:
			s = controlSide
		}
		if s != noSide && found != noSide && s != found {
			return noSide
		}
		if s != noSide {
			found = s
		}
	}
	return found
}

// fieldSide returns the arm of a field.
func fieldSide(f review.Field) side {
	switch name := f.String(); {
	case strings.HasSuffix(name, " treated"):
		return treatedSide
	case strings.HasSuffix(name, " control"):
		return controlSide
	}
	return noSide
}

// adviceFor says what to do about a header that no guess may use; blank if there
// is nothing to say.
func adviceFor(header string) string {
	said := sayingsOf(header)
	switch {
	case said[saysVariance]:
		return quote(header) + " seems to be a variance, which is no standard error: write its square root into a column of its own"
	case said[saysSD] && said[saysSE]:
		return quote(header) + " may hold standard deviations or standard errors: part them into two columns"
	case said[saysWithout]:
		return quote(header) + " seems to count people without the event: write the number with it"
	case holdsInterval(header) && !said[saysLow] && !said[saysHigh]:
		return quote(header) + " seems to hold both limits in one cell: part them into two columns, ci low and ci high"
	case said[saysPercent]:
		return quote(header) + " seems to be a percentage: write the number of people"
	}
	return ""
}

// holdsInterval reports whether a header speaks of an interval as a whole.
func holdsInterval(header string) bool {
	phrase, _ := fold(header)
	words := strings.Fields(phrase)
	return slices.Contains(words, "ci") || slices.Contains(words, "interval")
}
