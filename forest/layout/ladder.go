package layout

import (
	"math"
	"strings"

	"steelyard/forest/words"
	"steelyard/meta/evidence"
)

// stepLine is a labelled line of the ladder, with the word that stands above it.
type stepLine struct {
	steps       float64
	label, word string
}

// labelApart is the least distance of two labels on the ladder, in type sizes.
const labelApart = 2

// labelEvery is the number of steps from one label of the ladder to the next.
func (l ladder) labelEvery(size float64) float64 {
	every := 1.0
	for i := 0; every*l.step < labelApart*size; i++ {
		every *= []float64{2, 2.5, 2}[i%3]
	}
	return every
}

// stepLines returns the lines of the ladder that find room for their labels, from
// below; words only where every step is labelled.
func (l ladder) stepLines(size float64) []stepLine {
	every := l.labelEvery(size)
	names := evidence.WordNames()
	var all []stepLine
	for n := math.Ceil(l.steps.low / every); n*every <= l.steps.high; n++ {
		line := stepLine{steps: n * every, label: words.Odds(n * every * lnStep)}
		if strings.ContainsAny(line.label, "<>") {
			line.label = words.Linear(line.steps, 0) + " steps"
		}
		if i := int(line.steps); every == 1 && i >= 0 && i < len(names) && line.steps < l.steps.high && l.step >= 2.4*size {
			line.word = names[i]
		}
		all = append(all, line)
	}
	return all
}

// labelWidth is the room of the labels at the left.
func (l ladder) labelWidth(size float64) float64 {
	most := 0.0
	for _, line := range l.stepLines(size) {
		most = max(most, Width(line.label, size, false), Width(line.word, size, false))
	}
	return most
}

// items draws the axis of evidence with its lines through a panel, odds and words.
func (l ladder) items(panel span, size float64) []Item {
	left, right := panel.low, panel.high
	items := []Item{Line{X1: left, Y1: l.top, X2: left, Y2: l.bottom(), Width: 0.5}}
	word := func(steps float64, text string) {
		t := label(left-4, l.y(steps)+uprightText*size, size, End, Soft, text)
		t.Spans[0].Italic = true
		items = append(items, t)
	}
	lines := l.stepLines(size)
	for _, s := range lines {
		y := l.y(s.steps)
		line := Line{X1: left, Y1: y, X2: right, Y2: y, Width: 0.5, Ink: Grid}
		if s.steps == 0 {
			line.Width, line.Ink = 0.75, Ordinary
		}
		items = append(items, line,
			Line{X1: left - 2.2, Y1: y, X2: left, Y2: y, Width: 0.5},
			label(left-4, y+uprightText*size, size, End, Ordinary, s.label))
		if s.word != "" {
			word(s.steps+0.5, s.word)
		}
	}
	if len(lines) > 0 && lines[0].steps == 0 && lines[0].word != "" && l.holds(-0.8) {
		word(-0.5, "none")
	}
	return items
}
