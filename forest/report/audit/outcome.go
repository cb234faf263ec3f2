package audit

import (
	"fmt"

	"steelyard/meta"
	"steelyard/meta/effect"
	"steelyard/meta/evidence"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// outcome is one outcome on its way into the book.
type outcome struct {
	book     *book
	s        *synthesis.Synthesis
	o        *synthesis.Outcome
	at, many int // its number from 0, and how many there are
	numbers  map[*review.Study]map[review.Field]cell
	y, se    []cell // of the pooled studies
	cells    map[string]cell
	entered  []string // what does not move with the studies' numbers, in words
}

func (o *outcome) fit() *meta.Fit { return o.o.Result.Fit }

// sheet adds the sheet of one part.
func (o *outcome) sheet(part string) *sheet {
	return o.book.sheet(sheetName(part, o.at, o.many, o.o.Name))
}

// title is the outcome's name, or what stands in its place.
func (o *outcome) title() string {
	if o.o.Name == "" {
		return "all rows"
	}
	return o.o.Name
}

// open adds the sheet of a part with its two title rows.
func (o *outcome) open(part, title, explained string) *sheet {
	s := o.sheet(part)
	s.text(1, 1, look{role: heading}, title)
	s.text(1, 2, look{role: subtitle}, o.title()+" · "+explained)
	return s
}

// named is a name of this outcome, such as tau2_1.
func (o *outcome) named(name string) string { return fmt.Sprintf("%s_%d", name, o.at+1) }

// keep remembers a cell under a name of its own, which the whole workbook knows.
func (o *outcome) keep(name string, c cell) cell {
	o.cells[name] = c
	o.book.name(o.named(name), block{c, c})
	return c
}

// still says in words that something is entered and does not move.
func (o *outcome) still(what string) { o.entered = append(o.entered, what) }

// moves reports whether the pooled result has a live form: by inverse variances, which
// Peto's method is with its own estimates, and with an interval that is a closed formula.
func (o *outcome) moves() bool {
	m := o.fit().Model
	return (o.fit().Method == "" || o.o.Analysis.Method == review.Peto) && m.Interval != meta.ProfileLikelihood && m.Interval != meta.HenmiCopas
}

// student reports whether a mean of k studies has an interval of Student's t.
func (o *outcome) student(k int) bool {
	m := o.fit().Model
	return k > 1 && (m.Interval == meta.HartungKnapp || m.Interval == meta.HartungKnappFloor)
}

// studentForm reports whether the evidence beside Student's t has a form of its own.
func (o *outcome) studentForm() bool { return o.fit().Model.Evidence == evidence.StudentForm }

// toAnalysis is the formula that puts a reader's number on the analysis scale.
func toAnalysis(m effect.Measure, x string) string {
	switch {
	case m.Log():
		return "LN(" + x + ")"
	case m == effect.Correlation:
		return "ATANH(" + x + ")"
	case m == effect.Proportion:
		return "LN(" + x + "/(1-" + x + "))"
	case m == effect.ArcsineProportion || m == effect.DoubleArcsineProportion:
		return "ASIN(SQRT(" + x + "))"
	}
	return x
}

// toReader is the formula of the way back.
func toReader(m effect.Measure, y string) string {
	switch {
	case m.Log():
		return "EXP(" + y + ")"
	case m == effect.Correlation:
		return "TANH(" + y + ")"
	case m == effect.Proportion:
		return "1/(1+EXP(-" + y + "))"
	case m == effect.ArcsineProportion || m == effect.DoubleArcsineProportion:
		return "SIN(" + y + ")^2"
	}
	return y
}

// scaleName names the analysis scale of a measure.
func scaleName(m effect.Measure) string {
	switch {
	case m == effect.Unspecified:
		return "estimate as it stands"
	case m.Log():
		return "natural logarithm of the " + m.String()
	case m == effect.Correlation:
		return "Fisher's z of the correlation"
	case m == effect.Proportion:
		return "logit of the proportion"
	}
	return m.String()
}
