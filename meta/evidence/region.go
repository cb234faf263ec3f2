package evidence

import (
	"errors"
	"fmt"
	"math"
)

// Interval is a range of effects on the analysis scale, from Low to High; either
// may be infinite.
type Interval struct{ Low, High float64 }

// Region is a set of effects: intervals that ascend and do not overlap. Whether
// an end belongs to it makes no difference.
type Region []Interval

// ErrRegion reports a region that holds no effects or whose intervals are not
// numbers in ascending order.
var ErrRegion = errors.New("invalid region")

// Check returns an error wrapping ErrRegion unless the region has at least one
// interval, every interval has Low < High, and each starts where the one before
// ends or later.
func (r Region) Check() error {
	if len(r) == 0 {
		return fmt.Errorf("%w: it is empty; give at least one interval", ErrRegion)
	}
	last := math.Inf(-1)
	for i, x := range r {
		if !(x.Low < x.High) {
			return fmt.Errorf("%w: interval %d runs from %g to %g; its low end must be below its high end", ErrRegion, i+1, x.Low, x.High)
		}
		if x.Low < last {
			return fmt.Errorf("%w: interval %d starts at %g, below the end %g of the one before; sort and join them", ErrRegion, i+1, x.Low, last)
		}
		last = x.High
	}
	return nil
}

// Complement returns all effects outside the region, which must be valid. It is
// empty for the whole line.
func (r Region) Complement() Region {
	rest := make(Region, 0, len(r)+1)
	from := math.Inf(-1)
	for _, x := range r {
		if from < x.Low {
			rest = append(rest, Interval{Low: from, High: x.Low})
		}
		from = x.High
	}
	if from < math.Inf(1) {
		rest = append(rest, Interval{Low: from, High: math.Inf(1)})
	}
	return rest
}
