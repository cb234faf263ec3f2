package webpage

import (
	"math"
	"slices"

	"steelyard/forest/words"
	"steelyard/meta/evidence"
	"steelyard/meta/synthesis"
)

// beliefsView is the beam, from evidence to probability, with the stops of its slider.
type beliefsView struct {
	Stops        []priorStop
	Start        int // the stop that stands without script
	Stated       bool
	Words        []placedText // between the step lines
	Lines        []placedText // odds at the step lines
	Probs        []probMark
	Pivot        string // class of its place
	Poise        string
	Arm          string // class of the start of the arm
	ArmWidth     string
	Slide        string // class of the slide's place at the start
	PoiseText    string
	Others       string // what other priors become
	EvidenceText string
}

// placedText is a text with the class of its place.
type placedText struct{ Class, Text string }

// probMark is a mark of the sliding scale; At is its place in steps.
type probMark struct {
	placedText
	At    float64
	Minor bool
	Off   bool // outside the scale at the start
}

// priorStop is a stop of the slider: a prior, what it becomes, and how far the scale of
// probability slides, in steps.
type priorStop struct {
	Prior     string  `json:"prior"`
	Posterior string  `json:"posterior"`
	Shift     float64 `json:"shift"`
}

// The scale of the beam: from one step for none to at least beamSteps.
const (
	beamFrom = -1.0
	beamLast = 5.1
	mostBeam = 9.1
)

var (
	priorStops = []float64{0.01, 0.02, 0.03, 0.05, 0.07, 0.1, 0.15, 0.2, 0.25, 0.3, 0.35, 0.4, 0.45, 0.5, 0.55, 0.6, 0.65, 0.7, 0.75, 0.8, 0.85, 0.9, 0.93, 0.95, 0.97, 0.98, 0.99}
	probMarks  = []float64{0.001, 0.002, 0.005, 0.01, 0.02, 0.05, 0.1, 0.2, 0.3, 0.5, 0.7, 0.8, 0.9, 0.95, 0.98, 0.99, 0.995, 0.998, 0.999}
	minorMarks = []float64{0.002, 0.005, 0.02, 0.3, 0.7, 0.98, 0.995, 0.998}
	otherPrior = []float64{0.1, 0.25, 0.5, 0.75}
)

// stepsOf is the log odds of a probability in steps.
func stepsOf(p float64) float64 { return (math.Log(p) - math.Log1p(-p)) / evidence.LnStep }

// beliefs lays out the beam of an outcome. Without a stated prior it starts from even
// odds, and says so.
func (v *view) beliefs(o *synthesis.Outcome, id string) *beliefsView {
	ratio := o.Result.Fit.Mean.Evidence
	steps := ratio.Steps()
	end := math.Min(mostBeam, math.Max(beamLast, math.Ceil(steps)+0.1))
	share := func(at float64) float64 { return (at - beamFrom) / (end - beamFrom) }
	b := &beliefsView{Stated: len(o.Analysis.Prior) > 0 && !slices.Equal(o.Analysis.Prior, otherPrior), EvidenceText: words.Odds(ratio.Ln())}
	start := 0.5
	if b.Stated {
		start = o.Analysis.Prior[0]
	}
	priors := slices.Clone(priorStops)
	for _, p := range append([]float64{start}, o.Analysis.Prior...) {
		if !slices.Contains(priors, p) {
			priors = append(priors, p)
		}
	}
	slices.Sort(priors)
	b.Start = slices.Index(priors, start)
	for _, p := range priors {
		b.Stops = append(b.Stops, priorStop{
			Prior: words.Probability(p), Posterior: words.Probability(evidence.Posterior(p, ratio)), Shift: math.Round(1e4*stepsOf(p)) / 1e4,
		})
	}
	for i, word := range []string{"faint", "fair", "firm", "heavy", "massive"} {
		b.Words = append(b.Words, placedText{v.positions.at("left", share(float64(i)+0.5)), word})
	}
	b.Words = append(b.Words, placedText{v.positions.at("left", share(-0.5)), "none"})
	for n := 0.0; n <= math.Min(4, end); n++ {
		b.Lines = append(b.Lines, placedText{v.positions.at("left", share(n)), words.NoBreak(words.Odds(n * evidence.LnStep))})
	}
	shift := b.Stops[b.Start].Shift
	for _, p := range probMarks {
		at := stepsOf(p)
		x := share(at - shift)
		b.Probs = append(b.Probs, probMark{placedText{v.positions.at("left", share(at)), words.Probability(p)}, math.Round(1e4*at) / 1e4, slices.Contains(minorMarks, p), x < 0.025 || x > 0.975})
	}
	at := share(math.Max(beamFrom+0.1, math.Min(steps, end-0.1)))
	b.Pivot, b.Poise = v.positions.at("left", share(0)), v.positions.at("left", at)
	b.Arm, b.ArmWidth = v.positions.at("left", math.Min(at, share(0))), v.positions.at("width", math.Abs(at-share(0)))
	b.Slide = v.positions.at("left", -shift/(end-beamFrom))
	for _, p := range otherPrior {
		if b.Others != "" {
			b.Others += " · "
		}
		b.Others += "from " + words.Probability(p) + " to " + words.Probability(evidence.Posterior(p, ratio))
	}
	v.spans[id] = end - beamFrom
	return b
}
