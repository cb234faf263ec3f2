package layout

import (
	"fmt"
	"math"
)

// Limits of what a chart can show: a ratio estimate from a millionth to a
// million, limits that a float64 still holds as a ratio.
const (
	mostLogEstimate = 13.9
	mostLogLimit    = 700
	mostDifference  = 1e12
	mostLnEvidence  = 1e12
)

// checks refuses numbers that no axis of a chart can hold.
type checks struct {
	chart string // begins the errors, such as "forest chart"
	ratio bool
}

// frame checks what all charts share: the scale and the level of the intervals.
func (c checks) frame(scale EffectScale, level float64) error {
	if !(0 < level && level < 1) {
		return fmt.Errorf("%s: level %v must lie between 0 and 1, such as 0.95", c.chart, level)
	}
	if scale.Decimals < 0 || scale.Decimals > 12 {
		return fmt.Errorf("%s: %d decimals; give 0 to 12", c.chart, scale.Decimals)
	}
	return c.value("the value of no effect", scale.Null, true)
}

// result checks an estimate with its limits and its evidence.
func (c checks) result(where string, estimate, low, high, ln float64) error {
	if err := c.value(where+": estimate", estimate, true); err != nil {
		return err
	}
	if err := c.limits(where, low, high); err != nil {
		return err
	}
	if !(math.Abs(ln) <= mostLnEvidence) {
		return fmt.Errorf("%s: %s: ln of the evidence ratio is %v; it must be finite", c.chart, where, ln)
	}
	return nil
}

func (c checks) limits(where string, low, high float64) error {
	if err := c.value(where+": lower limit", low, false); err != nil {
		return err
	}
	if err := c.value(where+": upper limit", high, false); err != nil {
		return err
	}
	if low > high {
		return fmt.Errorf("%s: %s: lower limit %v is above the upper limit %v", c.chart, where, low, high)
	}
	return nil
}

func (c checks) value(what string, v float64, estimate bool) error {
	most, advice := mostDifference, "rescale the unit of the measure"
	if c.ratio {
		most, advice = mostLogLimit, "ratios enter as natural logs"
		if estimate {
			most = mostLogEstimate
		}
	}
	if !(math.Abs(v) <= most) {
		return fmt.Errorf("%s: %s is %v on the analysis scale, beyond what an axis can show (±%v); %s", c.chart, what, v, most, advice)
	}
	return nil
}
