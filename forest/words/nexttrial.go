package words

import (
	"fmt"

	"steelyard/meta/evidence"
	"steelyard/meta/synthesis"
)

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
