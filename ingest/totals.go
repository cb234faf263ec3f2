package ingest

import "strings"

// totalWords mark a row of totals; it may have the others beside them.
var (
	totalWords = map[string]bool{"total": true, "totals": true, "subtotal": true, "subtotals": true, "overall": true, "pooled": true, "summary": true, "sum": true,
		"combined": true, "sub": false}
	besideTotal = map[string]bool{"all": true, "studies": true, "trials": true, "study": true, "trial": true, "effect": true, "effects": true, "estimate": true,
		"result": true, "results": true, "mean": true, "weighted": true, "random": true, "fixed": true, "common": true, "model": true, "grand": true, "sub": true,
		"ci": true, "events": true, "n": true, "k": true, "meta": true, "analysis": true, "and": true}
)

// namesTotal reports whether a study's name is that of a row of totals, such as
// "Total", "Subtotal (95% CI)" or "Pooled estimate".
func namesTotal(name string) bool {
	const longest = 60
	if len(name) > longest || !startsLikeTotal(name) {
		return false
	}
	phrase, _ := fold(name)
	total := false
	for _, word := range strings.Fields(phrase) {
		switch {
		case totalWords[word]:
			total = true
		case besideTotal[word] || strings.Trim(word, "0123456789.%") == "":
		default:
			return false
		}
	}
	return total
}

// startsLikeTotal is a quick look at the first letter.
func startsLikeTotal(name string) bool {
	return name != "" && strings.IndexByte("tsopgacrfwmTSOPGACRFWM", name[0]) >= 0
}
