package words

import (
	"fmt"
	"math"
	"strings"

	"steelyard/meta/evidence"
	"steelyard/meta/synthesis"
)

// RepeatedLooks says how often a living review has looked, and what so many looks show
// by chance; blank for nil.
func RepeatedLooks(r *synthesis.RepeatedLooks) string {
	if r == nil {
		return ""
	}
	text := fmt.Sprintf("The review has looked %s, at new studies each time.", times(r.Times))
	switch {
	case r.Times == 1:
		text = "The review has looked once."
	case r.Looks < r.Times:
		text = fmt.Sprintf("The review has looked %s, and %s of the looks brought new studies.", times(r.Times), Count(r.Looks))
	}
	if r.Why != "" {
		return text + " What repeated looks show by chance is not simulated: " + r.Why + "."
	}
	var parts []string
	worst := 0.0
	for _, c := range r.Chances {
		parts = append(parts, fmt.Sprintf("%s with τ %s (%s at the last look alone)", simulated(c.AnyLook.Value, r.Sequences), Tau(math.Sqrt(c.Tau2)), simulated(c.LastLook.Value, r.Sequences)))
		worst = max(worst, c.AnyLook.Error, c.LastLook.Error)
	}
	return text + fmt.Sprintf(" Were there no effect, the chance that so many looks alone reach %s (%s), as the review has, at one of them: %s; %s simulated sequences, standard error at most %s percentage points.",
		Odds(float64(r.Reached)*evidence.LnStep), Number(r.Reached, "step", "steps"), strings.Join(parts, ", "), Count(r.Sequences), Linear(100*worst, 1))
}

// simulated words a simulated chance. Of one that never happened in n sequences the
// upper limit is given by the rule of three: Hanley & Lippman-Hand (1983), JAMA
// 249:1743-1745.
func simulated(p float64, n int) string {
	if p == 0 {
		return "under " + Probability(3/float64(n))
	}
	return Probability(p)
}

func times(n int) string {
	switch n {
	case 1:
		return "once"
	case 2:
		return "twice"
	}
	return Count(n) + " times"
}
