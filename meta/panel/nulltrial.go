package panel

import (
	"context"
	"math"
	"slices"

	"steelyard/meta"
)

// NullTrial asks how large one more trial that finds exactly no effect must be to
// bring a limit of the pooled interval across a threshold. The trial joins the others
// and the model is fitted anew, τ² included.
type NullTrial struct {
	Y, S  []float64 // of the present studies, on the analysis scale
	Model meta.Model
	// SE gives the trial's standard error by its number of people.
	SE func(people float64) (float64, error)
}

// Crossing is the answer: the smallest trial that does it.
type Crossing struct {
	Found  bool
	People float64 // whole people in both arms; MostPeople where none does it
	// Low and High are the interval with it, or with MostPeople people.
	Low, High float64
}

// FewestPeople and MostPeople bound the trials that are tried.
const (
	FewestPeople = 20
	MostPeople   = 10_000_000
)

// stepsPerDecade is how finely sizes are tried before the first that suffices is
// narrowed down.
const stepsPerDecade = 12

// Smallest returns the smallest trial after which crossed holds of the interval. The
// sizes tried ascend by steps of a fifth; the first that suffices is narrowed down to
// two people by bisection, so that a smaller one may exist only where the limits do
// not move steadily. It returns the errors of the fit and of SE, and the cause if ctx
// ends.
func (t NullTrial) Smallest(ctx context.Context, crossed func(low, high float64) bool) (Crossing, error) {
	y, s := append(slices.Clone(t.Y), t.Model.Null), append(slices.Clone(t.S), 0)
	var pool meta.Pooler
	try := func(people float64) (Crossing, error) {
		if err := context.Cause(ctx); err != nil {
			return Crossing{}, err
		}
		se, err := t.SE(people)
		if err != nil {
			return Crossing{}, err
		}
		s[len(s)-1] = se
		mean, err := pool.Pool(t.Model, y, s)
		if err != nil {
			return Crossing{}, err
		}
		return Crossing{Found: crossed(mean.Low, mean.High), People: people, Low: mean.Low, High: mean.High}, nil
	}
	last := 0.0
	var at Crossing
	var err error
	for i := 0; ; i++ {
		people := even(FewestPeople * math.Pow(10, float64(i)/stepsPerDecade))
		if people > MostPeople {
			people = MostPeople
		}
		if at, err = try(people); err != nil || at.Found {
			break
		}
		if last = people; people == MostPeople {
			return at, nil
		}
	}
	for err == nil && last > 0 && at.People-last > 2 {
		var middle Crossing
		if middle, err = try(even((last + at.People) / 2)); err != nil {
			break
		}
		if middle.Found {
			at = middle
			continue
		}
		last = middle.People
	}
	return at, err
}

// even rounds a number of people to whole ones in two equal arms.
func even(people float64) float64 { return 2 * math.Round(people/2) }
