package layout

import (
	"math"
	"strings"

	"steelyard/forest/words"
	"steelyard/meta/evidence"
)

// probabilityMarks are the labels that the scale of probability may have, those
// that are wanted most first.
var probabilityMarks = []float64{0.5, 0.1, 0.9, 0.8, 0.2, 0.95, 0.05, 0.7, 0.3, 0.99, 0.01, 0.98, 0.02, 0.6, 0.4, 0.999, 0.001, 0.75, 0.25}

// probabilityApart is the least distance between those labels, in type sizes.
const probabilityApart = 1.8

func logit(p float64) float64 { return math.Log(p / (1 - p)) }

func (c *cumulative) priorLabel() string { return words.Probability(c.in.Prior) + " prior" }

// markLabel is a label of the scale, as short as it goes.
func markLabel(p float64) string { return strings.Replace(words.Probability(p), ".0%", "%", 1) }

// posterior is the probability of an effect after the last point.
func (c *cumulative) posterior() float64 {
	return evidence.Posterior(c.in.Prior, evidence.FromLn(c.last().LnEvidence))
}

// probabilityItems draws the scale at the right: the line of evidence read as
// probability from the prior, which stands at even odds; a pointer marks the
// last point.
func (c *cumulative) probabilityItems() []Item {
	if c.in.Prior == 0 {
		return nil
	}
	m, l, x := c.metrics, c.ladder, c.plot.high
	pointer := l.place(c.last().LnEvidence / lnStep)
	taken := []float64{pointer}
	var items []Item
	mark := func(y float64, text string) {
		items = append(items,
			Line{X1: x, Y1: y, X2: x + 2.2, Y2: y, Width: 0.5},
			label(c.beside, y+uprightText*m.second, m.second, Start, Ordinary, text))
		taken = append(taken, y)
	}
	apart := probabilityApart * m.second
	free := func(y float64) bool {
		for _, other := range taken {
			if math.Abs(y-other) < apart {
				return false
			}
		}
		return true
	}
	if even := l.y(0); free(even) {
		mark(even, c.priorLabel())
	}
	const slack = 0.5 // a label just past the end still belongs to it
	for _, p := range probabilityMarks {
		y := l.y((logit(p) - logit(c.in.Prior)) / lnStep)
		if y >= l.top-slack && y <= l.bottom()+slack && free(y) {
			mark(y, markLabel(p))
		}
	}
	size := m.row
	return append(items,
		Polygon{Points: []Point{{x, pointer}, {x + 4, pointer - 2.6}, {x + 4, pointer + 2.6}}, Paint: Solid(Probability)},
		boldLabel(c.beside+1, pointer+uprightText*size, size, Start, words.Probability(c.posterior())))
}
