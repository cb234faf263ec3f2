package words

import (
	"fmt"

	"steelyard/meta/evidence"
	"steelyard/meta/synthesis"
)

// AssumedRisk names the control risk of the next study and where it is from, to stand
// before what follows from it; blank where it plays no part.
func AssumedRisk(s *synthesis.Synthesis, n *synthesis.Next) string {
	switch risk := n.Wanted.ControlRisk; {
	case risk == 0:
		return ""
	case n.RiskFrom > 0:
		whose := "that of the only control arm"
		if n.RiskFrom > 1 {
			whose = fmt.Sprintf("the median of %s %s' control arms", Count(n.RiskFrom), Noun(s, n.RiskFrom))
		}
		return fmt.Sprintf("control risk %s%%, %s (--control-risk states another); ", PriorScale(100*risk), whose)
	default:
		return fmt.Sprintf("control risk %s%%; ", PriorScale(100*risk))
	}
}

// SmallestSize says how large the next study must be for what is wanted, or that no
// size suffices and why. The study has a size, not a standard error alone.
func SmallestSize(n *synthesis.Next) string {
	goal := fmt.Sprintf("%s with a chance of %s", Odds(n.Wanted.Toward*evidence.LnStep), Probability(n.Wanted.Chance))
	if n.Smallest.Found {
		return fmt.Sprintf("%s is reached from %s people in all.", goal, People(n.Smallest.Size))
	}
	reason := "what is not known of the mean remains"
	if n.Tau > 0 {
		reason = fmt.Sprintf("the variance between studies (τ %s) and what is not known of the mean remain", Tau(n.Tau))
	}
	return fmt.Sprintf("no size reaches %s: %s however large one study is. The best chance up to ten million people is %s.",
		goal, reason, Probability(n.Reaches(n.Smallest.At.Outlook)))
}
