package layout

import (
	"math"
	"slices"
)

// Spans that an effect axis may have, in natural logs for ratios.
var (
	logSpan        = math.Log(50)  // for estimates and intervals of studies
	widestLogSpan  = math.Log(400) // for the pooled and the prediction interval
	whiskersLeftTo = 0.05          // share of the weight whose whiskers may be clipped on a side
	besideNull     = 0.1           // room on both sides of no effect, as a share of the axis
)

// span is a range of values that grows.
type span struct{ low, high float64 }

func (s *span) hold(v float64) {
	s.low, s.high = math.Min(s.low, v), math.Max(s.high, v)
}

// stretch moves both ends towards low and high, as far as a total width allows;
// what one side does not need the other may use.
func (s *span) stretch(low, high, most float64) {
	left, right := math.Max(0, s.low-low), math.Max(0, high-s.high)
	room := math.Max(0, most-(s.high-s.low))
	if left+right > room {
		half := room / 2
		switch {
		case left < half:
			right = room - left
		case right < half:
			left = room - right
		default:
			left, right = half, half
		}
	}
	s.low, s.high = s.low-left, s.high+right
}

// axisLimits returns the ends of the effect axis. It always holds the value of
// no effect and the pooled estimate; then, as far as the spans above allow, the
// pooled and the prediction interval, the estimates (nearest first), and the
// whiskers of all but a twentieth of the weight.
func axisLimits(in *ForestInput) (low, high float64) {
	most, widest, beyond := logSpan, widestLogSpan, math.Ln10
	if !in.Scale.Ratio {
		typical := typicalWidth(in.Rows)
		most, widest, beyond = 8*typical, 12*typical, typical
	}
	centre := in.Scale.Null
	s := span{low: centre, high: centre}
	if in.Pooled != nil {
		centre = in.Pooled.Estimate
		s.hold(centre)
		widest = math.Max(widest, s.high-s.low+2*beyond)
		s.stretch(in.Pooled.Low, in.Pooled.High, widest)
	}
	if p := in.Prediction; p != nil && p.Reason == "" {
		s.stretch(p.Low, p.High, widest)
	}
	most = math.Max(most, s.high-s.low)
	for _, v := range nearestFirst(append(in.Rows[:len(in.Rows):len(in.Rows)], in.subtotalRows()...), centre) {
		wider := s
		if wider.hold(v); wider.high-wider.low <= most {
			s = wider
		}
	}
	left, right := whiskerEnds(in.Rows)
	s.stretch(left, right, most)
	if room := besideNull * (s.high - s.low); room > 0 {
		s.hold(in.Scale.Null - room)
		s.hold(in.Scale.Null + room)
	}
	if least := leastSpan(in.Scale, math.Max(math.Abs(s.low), math.Abs(s.high))); s.high-s.low < least {
		middle := (s.low + s.high) / 2
		s.low, s.high = middle-least/2, middle+least/2
	}
	return outward(s.low, s.high, in.Scale.Ratio)
}

// leastSpan keeps an axis of values up to a size apart from a single point.
func leastSpan(scale EffectScale, size float64) float64 {
	if scale.Ratio {
		return 1e-3
	}
	return math.Max(math.Pow10(-scale.Decimals), 1e-9*size)
}

// typicalWidth is the median width of the rows' intervals.
func typicalWidth(rows []ForestRow) float64 {
	widths := make([]float64, len(rows))
	for i, r := range rows {
		widths[i] = r.High - r.Low
	}
	slices.Sort(widths)
	return widths[len(widths)/2]
}

func nearestFirst(rows []ForestRow, centre float64) []float64 {
	values := make([]float64, len(rows))
	for i, r := range rows {
		values[i] = r.Estimate
	}
	slices.SortFunc(values, func(a, b float64) int {
		switch da, db := math.Abs(a-centre), math.Abs(b-centre); {
		case da < db:
			return -1
		case da > db:
			return 1
		}
		return 0
	})
	return values
}

// whiskerEnds returns the lowest and the highest interval end among the rows
// after leaving out, on each side, the farthest ends with together at most a
// twentieth of the weight.
func whiskerEnds(rows []ForestRow) (low, high float64) {
	order := slices.Clone(rows)
	total := 0.0
	for _, r := range rows {
		total += r.Weight
	}
	end := func(value func(ForestRow) float64, sign float64) float64 {
		slices.SortStableFunc(order, func(a, b ForestRow) int {
			switch d := sign * (value(a) - value(b)); {
			case d < 0:
				return -1
			case d > 0:
				return 1
			}
			return 0
		})
		left := whiskersLeftTo * total
		for i, r := range order {
			if left -= r.Weight; left < 0 || i == len(order)-1 {
				return value(r)
			}
		}
		return value(order[0])
	}
	low = end(func(r ForestRow) float64 { return r.Low }, 1)
	high = end(func(r ForestRow) float64 { return r.High }, -1)
	return low, high
}
