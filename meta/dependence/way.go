package dependence

import (
	"errors"

	"steelyard/meta/choice"
)

// Way is how several estimates from one study are treated.
type Way int

// The ways: as if each estimate were a study of its own (the default); with true
// effects that vary between studies and within them; or as independent for the
// estimate, with a variance that is right for any dependence within studies.
const (
	Independent Way = iota
	ThreeLevel
	Robust
)

var wayNames = choice.Of[Way]("treatment of dependent estimates", "independent", "three-level", "robust")

// String returns the way's name, such as "three-level".
func (w Way) String() string { return wayNames.String(w) }

// WayNames returns the names of all ways.
func WayNames() []string { return wayNames.All() }

// ParseWay returns the way that text names.
func ParseWay(text string) (Way, error) { return wayNames.Parse(text) }

// MarshalText writes the name of the way.
func (w Way) MarshalText() ([]byte, error) { return []byte(w.String()), nil }

// UnmarshalText reads the name of a way.
func (w *Way) UnmarshalText(text []byte) (err error) {
	*w, err = ParseWay(string(text))
	return err
}

var (
	// ErrOneStudy reports estimates that are all from one study.
	ErrOneStudy = errors.New("all estimates are from one study: nothing tells how studies differ; keep one estimate, or state that they are independent")
	// ErrNoRepeats reports that no study gives more than one estimate.
	ErrNoRepeats = errors.New("no study gives more than one estimate: there is no dependence to allow for")
	// ErrNoScatter reports estimates whose robust variance is 0.
	ErrNoScatter = errors.New("the studies' estimates are all equal, so that their scatter gives no standard error: use the model of three levels, or check the sheet")
	// ErrCommon reports a model of three levels beside a common effect.
	ErrCommon = errors.New("three levels let effects vary between and within studies, which a common effect excludes: ask for random effects, or for the robust variance")
)
