package effect

import "steelyard/meta/choice"

// Direction is the side of no effect on which an effect lies, treated against
// control: what a p-value alone does not say.
type Direction int

// The directions. Higher is above the null on the analysis scale: a ratio above
// 1, a difference above 0.
const (
	DirectionUnknown Direction = iota
	Higher
	Lower
)

var directionNames = choice.Of[Direction]("direction", "", "higher", "lower").
	With(map[string]Direction{
		"more": Higher, "increase": Higher, "positive": Higher, "above": Higher, "up": Higher,
		"less": Lower, "fewer": Lower, "decrease": Lower, "negative": Lower, "below": Lower, "down": Lower,
	})

// String returns the direction's name, blank if it is unknown.
func (d Direction) String() string { return directionNames.String(d) }

// DirectionNames returns the names of the directions.
func DirectionNames() []string { return directionNames.All() }

// ParseDirection returns the direction that text names.
func ParseDirection(text string) (Direction, error) { return directionNames.Parse(text) }

// MarshalText writes the direction's name.
func (d Direction) MarshalText() ([]byte, error) { return []byte(d.String()), nil }

// UnmarshalText reads a direction's name; a blank is DirectionUnknown.
func (d *Direction) UnmarshalText(text []byte) (err error) {
	if len(text) == 0 {
		*d = DirectionUnknown
		return nil
	}
	*d, err = ParseDirection(string(text))
	return err
}

// Sign returns 1 for Higher, -1 for Lower and 0 for an unknown direction.
func (d Direction) Sign() float64 {
	switch d {
	case Higher:
		return 1
	case Lower:
		return -1
	}
	return 0
}

// check returns an *InputError unless the direction is known.
func (d Direction) check() error {
	if d.Sign() != 0 {
		return nil
	}
	return &InputError{What: "direction", Value: float64(d), Why: "is not known", Do: "enter higher or lower: on which side of no effect the treated arm lies"}
}
