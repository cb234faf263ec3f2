package layout

import (
	"math"
	"strings"

	"steelyard/forest/words"
	"steelyard/meta/evidence"
)

// lnStep is one step of evidence as a natural log.
const lnStep = evidence.LnStep

// mostForNone is the largest evidence for no effect in the normal and the
// matched form, ln 2.33 = (1 + ln 2)/2, reached by an estimate of exactly none.
const mostForNone = (1 + math.Ln2) / 2

func (s EffectScale) notation() words.Notation {
	return words.Notation{Ratio: s.Ratio, Decimals: s.Decimals}
}

// shown turns a value of the analysis scale into the reader's unit.
func (s EffectScale) shown(v float64) float64 {
	if s.Ratio {
		return math.Exp(v)
	}
	return v
}

func effectText(scale EffectScale, v float64) string {
	return scale.notation().Value(scale.shown(v))
}

func intervalText(scale EffectScale, low, high float64) string {
	return words.Interval(effectText(scale, low), effectText(scale, high))
}

func wordText(ln float64) string { return evidence.FromLn(ln).Word().String() }

// strengthText is the word and the steps of a ratio: "firm, 2.6 steps", "faint
// for none, 0.4 steps".
func strengthText(ln float64) string {
	text := words.Strength(evidence.FromLn(ln))
	word, steps, more := strings.Cut(text, ", ")
	if ln < 0 && more {
		return word + " for none, " + steps
	}
	return text
}

// oddsParts are the odds left and right of the colon.
func oddsParts(ln float64) [2]string {
	left, right, _ := strings.Cut(words.Odds(ln), " : ")
	return [2]string{left, right}
}
