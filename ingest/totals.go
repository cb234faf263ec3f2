package ingest

import "strings"

// totalWords mark a row of totals, besideTotal may stand with them.
var (
	totalWords  = []string{"total", "totals", "subtotal", "subtotals", "overall", "pooled", "summary", "sum", "combined"}
	besideTotal = []string{"all", "grand", "sub", "random", "fixed", "common", "weighted", "mean", "meta", "studies", "trials", "study", "trial", "effect", "effects",
		"estimate", "result", "results", "model", "ci", "events", "n", "k", "analysis", "and"}
	startOfTotal = besideTotal[:9] // those with which such a name may begin
)

// namesTotal reports whether a study's name is that of a row of totals, such as
// "Total", "Subtotal (95% CI)" or "Pooled estimate".
func namesTotal(name string) bool {
	const longest = 60
	first, _, _ := strings.Cut(name, " ")
	if len(name) > longest || !(oneOf(first, totalWords) || oneOf(first, startOfTotal) || strings.ContainsAny(first, ":-(,.")) {
		return false
	}
	phrase, _ := fold(name)
	total := false
	for _, word := range strings.Fields(phrase) {
		switch {
		case oneOf(word, totalWords):
			total = true
		case oneOf(word, besideTotal) || strings.Trim(word, "0123456789.%") == "":
		default:
			return false
		}
	}
	return total
}

// oneOf reports whether a word is in a list, in any letter case.
func oneOf(word string, list []string) bool {
	for _, w := range list {
		if len(w) == len(word) && strings.EqualFold(w, word) {
			return true
		}
	}
	return false
}
