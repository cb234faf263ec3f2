package missing

import (
	"math"
	"slices"

	"steelyard/meta"
)

// Filled is a pooled result with mirrored studies in place of those taken to be
// missing.
type Filled struct {
	Method  Method
	Side    Side // on which they are missing
	Missing int
	Centre  float64   // estimate without their counterparts, about which they are mirrored
	Mean    meta.Mean // of all studies and the mirrored ones
	Y, S    []float64 // the mirrored studies
}

// mostRounds bounds the rounds in which the number of missing studies is found.
const mostRounds = 100

// TrimAndFill counts the studies missing on a side by Duval and Tweedie's
// estimator L (method TrimAndFillL) or R (TrimAndFillR), rounded and not below 0,
// and pools with their mirror images. In each round the most extreme studies of
// the other side, as many as are missing, are left out, the rest is pooled by the
// model, and the count is made anew about that estimate; equal distances share
// their mean rank. It returns ErrUnsettled where the count comes back without
// settling, and the errors of meta.Model.Fit.
//
// Sources: Duval & Tweedie (2000), Biometrics 56:455-463; Journal of the American
// Statistical Association 95:89-98.
func TrimAndFill(m meta.Model, y, s []float64, method Method, missing Side) (*Filled, error) {
	if err := check(y, s); err != nil {
		return nil, err
	}
	if len(y) < 3 {
		return nil, ErrTooFew
	}
	order := make([]int, len(y)) // the side with too many studies last
	for i := range order {
		order[i] = i
	}
	direction := 1.0
	if missing == Higher {
		direction = -1
	}
	slices.SortStableFunc(order, func(i, j int) int {
		switch d := direction * (y[i] - y[j]); {
		case d < 0:
			return -1
		case d > 0:
			return 1
		}
		return 0
	})
	var pool meta.Pooler
	f := &Filled{Method: method, Side: missing}
	seen := map[int]bool{}
	for range mostRounds {
		kept := order[:len(order)-f.Missing]
		mean, err := pool.Pool(m, pick(y, kept), pick(s, kept))
		if err != nil {
			return nil, err
		}
		f.Centre = mean.Estimate
		count := missingStudies(y, direction, f.Centre, method)
		if count == f.Missing {
			return f.fill(m, y, s, order)
		}
		if seen[count] {
			return nil, ErrUnsettled
		}
		seen[count] = true
		f.Missing = count
	}
	return nil, ErrUnsettled
}

func pick(values []float64, rows []int) []float64 {
	out := make([]float64, len(rows))
	for i, row := range rows {
		out[i] = values[row]
	}
	return out
}

// missingStudies returns how many studies are missing opposite to a direction,
// about a centre.
func missingStudies(y []float64, direction, centre float64, method Method) int {
	n := float64(len(y))
	ranks := meanRanks(y, centre)
	var sum, beyond float64
	farthest := -1.0 // distance of the farthest study on the side of the missing ones
	for _, v := range y {
		if direction*(v-centre) <= 0 {
			farthest = math.Max(farthest, math.Abs(v-centre))
		}
	}
	for i, v := range y {
		if direction*(v-centre) > 0 {
			sum += ranks[i]
			if v := math.Abs(v - centre); v > farthest {
				beyond++
			}
		}
	}
	count := (4*sum - n*(n+1)) / (2*n - 1)
	if method == TrimAndFillR {
		count = beyond - 1
	}
	return int(math.Min(math.Max(0, math.Round(count)), n-1))
}

// meanRanks ranks the distances from a centre from 1 up; equal ones share theirs.
func meanRanks(y []float64, centre float64) []float64 {
	ranks := make([]float64, len(y))
	for i := range y {
		below, equal := 0.0, 0.0
		for j := range y {
			switch d := math.Abs(y[j]-centre) - math.Abs(y[i]-centre); {
			case d < 0:
				below++
			case d == 0:
				equal++
			}
		}
		ranks[i] = below + (equal+1)/2
	}
	return ranks
}

// fill pools all studies with the mirror images of the most extreme.
func (f *Filled) fill(m meta.Model, y, s []float64, order []int) (*Filled, error) {
	for _, row := range order[len(order)-f.Missing:] {
		f.Y, f.S = append(f.Y, 2*f.Centre-y[row]), append(f.S, s[row])
	}
	var pool meta.Pooler
	var err error
	f.Mean, err = pool.Pool(m, slices.Concat(y, f.Y), slices.Concat(s, f.S))
	return f, err
}
