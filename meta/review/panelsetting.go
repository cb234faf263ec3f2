package review

import (
	"fmt"
	"strconv"
	"strings"

	"steelyard/meta/choice"
)

// Baseline is a named risk without treatment.
type Baseline struct {
	Name string // blank where none is given
	Risk float64
}

// parseBaselines reads "low 0.05, high 0.2"; the name may hold blanks.
func parseBaselines(text string) ([]Baseline, error) {
	var all []Baseline
	seen := map[string]bool{}
	for _, part := range strings.FieldsFunc(text, func(r rune) bool { return r == ',' || r == ';' }) {
		part = strings.TrimSpace(part)
		cut := strings.LastIndexByte(part, ' ')
		risk, err := parseNumber(part[cut+1:])
		if err != nil {
			return nil, err
		}
		if !(0 < risk && risk < 1) {
			return nil, fmt.Errorf("%q is no risk between 0 and 1; 50 per 1000 is written 0.05", part)
		}
		name := strings.TrimSpace(part[:max(cut, 0)])
		if name != "" && seen[choice.Fold(name)] {
			return nil, fmt.Errorf("the name %q stands for two risks; name each differently", name)
		}
		seen[choice.Fold(name)] = true
		all = append(all, Baseline{Name: name, Risk: risk})
	}
	if len(all) == 0 {
		return nil, fmt.Errorf("a risk is missing; write it such as \"low 0.05, high 0.2\"")
	}
	if len(all) > mostBaselines {
		return nil, fmt.Errorf("%d risks are given; a card holds %d at most", len(all), mostBaselines)
	}
	return all, nil
}

// mostBaselines bounds the rows of a card.
const mostBaselines = 12

// parsePer1000 reads the important difference per 1000: one value is mirrored, two lie
// on both sides of none.
func parsePer1000(text string) ([]float64, error) {
	all, err := parseNumbers(text)
	if err != nil {
		return nil, err
	}
	for _, x := range all {
		if x == 0 || x <= -1000 || x >= 1000 {
			return nil, fmt.Errorf("%s is no difference per 1000 people; write it such as 40, or \"-40, 20\" for 40 fewer and 20 more", strconv.FormatFloat(x, 'g', -1, 64))
		}
	}
	switch {
	case len(all) > 2:
		return nil, fmt.Errorf("%d numbers given; give one, or one for each side", len(all))
	case len(all) == 2 && (all[0] > 0) == (all[1] > 0):
		return nil, fmt.Errorf("%q lies on one side of no difference; write fewer with a minus, such as \"-40, 20\" for 40 fewer and 20 more", text)
	}
	return all, nil
}

func parsePositive(text string) (float64, error) {
	x, err := parseNumber(text)
	if err == nil && !(x > 0) {
		err = fmt.Errorf("%q is not above 0", text)
	}
	return x, err
}

func parseFraction(text string) (float64, error) {
	x, err := parseNumber(text)
	if err == nil && !(0 < x && x < 1) {
		err = fmt.Errorf("%q is no fraction between 0 and 1; 80%% is written 0.8", text)
	}
	return x, err
}

func checkBaselines(text string) error { _, err := parseBaselines(text); return err }
func checkPer1000(text string) error   { _, err := parsePer1000(text); return err }
func checkFraction(text string) error  { _, err := parseFraction(text); return err }
