package ingest

import (
	"fmt"
	"math"
	"strings"

	"steelyard/meta/review"
)

// totalWords mark a row of totals, besideTotal may stand with them.
var (
	totalWords  = []string{"total", "totals", "subtotal", "subtotals", "overall", "pooled", "summary", "sum", "combined", "gesamt", "insgesamt", "summe", "totaux", "somme", "suma", "Σ"}
	besideTotal = []string{"all", "grand", "sub", "random", "fixed", "common", "weighted", "mean", "meta", "studies", "trials", "study", "trial", "effect", "effects",
		"estimate", "result", "results", "model", "ci", "events", "n", "k", "analysis", "and"}
	startOfTotal = besideTotal[:9] // those with which such a name may begin
)

// totalPhrases are whole names of rows of totals that hold none of these words.
var totalPhrases = map[string]bool{
	"all": true, "all studies": true, "all trials": true, "all patients": true, "all participants": true,
	"meta analysis": true, "metaanalysis": true, "meta analyse": true, "metaanalyse": true,
	"random effects": true, "random effect": true, "random effects model": true, "random effect model": true,
	"fixed effects": true, "fixed effect": true, "fixed effects model": true, "fixed effect model": true,
	"common effect": true, "common effect model": true, "model random effects": true, "model fixed effect": true, "model common effect": true,
	"alle": true, "alle studien": true, "toutes études": true, "todos estudios": true,
}

// startOfPhrase are first words of these that stand in no other list.
var startOfPhrase = []string{"metaanalysis", "metaanalyse", "model", "alle", "toutes", "todos"}

// namesTotal reports whether a study's name is that of a row of totals, such as
// "Total", "Subtotal (95% CI)", "All studies" or "Random effects model".
func namesTotal(name string) bool {
	const longest = 60
	if len(name) > longest {
		return false
	}
	first, _, _ := strings.Cut(name, " ")
	if !(oneOf(first, totalWords) || oneOf(first, startOfTotal) || oneOf(first, startOfPhrase) || strings.ContainsAny(first, ":-(,.")) {
		return false // as of nearly every study, without taking its name apart
	}
	phrase, _ := fold(name)
	if totalPhrases[withoutCounts(phrase)] {
		return true
	}
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

// withoutCounts takes what stands with the name of a total out of it: "ci", "n"
// and "k" with their numbers, and articles. A number of four digits stays, since a
// study may be called "All 2001".
func withoutCounts(phrase string) string {
	var kept []string
	for _, word := range strings.Fields(phrase) {
		number := strings.Trim(word, "0123456789.%") == ""
		if !oneOf(word, []string{"ci", "n", "k", "les", "los"}) && (!number || len(word) == 4) {
			kept = append(kept, word)
		}
	}
	return strings.Join(kept, " ")
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

// countFields are the fields whose numbers add up in a row of totals.
var countFields = [...]review.Field{review.EventsTreated, review.TotalTreated, review.EventsControl, review.TotalControl, review.Events, review.Total}

// countSums are the sums of an outcome's counts.
type countSums struct {
	of   [len(countFields)]float64
	rows int
}

// checkSums reports rows whose every count is the sum of the outcome's other
// rows, give or take one. Rows that are totals by their name do not count.
func (t *tableReader) checkSums() {
	const leastOthers = 2 // fewer equal sums are taken for chance
	named := map[int]bool{}
	for _, f := range t.x.Findings {
		if f.Rule == "F10" {
			named[f.Place.Row] = true
		}
	}
	sums := map[string]*countSums{}
	for i := range t.x.Studies {
		s := &t.x.Studies[i]
		if named[s.Row.Row] || len(s.Numbers) == 0 {
			continue
		}
		if sums[s.Outcome] == nil {
			sums[s.Outcome] = &countSums{}
		}
		sums[s.Outcome].add(s)
	}
	for i := range t.x.Studies {
		s := &t.x.Studies[i]
		all := sums[s.Outcome]
		if named[s.Row.Row] || all == nil || all.rows-1 < leastOthers || !all.twice(s) {
			continue
		}
		t.x.Findings = append(t.x.Findings, review.Finding{Severity: review.Error, Rule: "F10", Study: s.Name, Accepted: s.AcceptedReason("F10"),
			Place:   t.place(s.Row.Row, t.role.name, s.Name),
			Message: fmt.Sprintf("every count of the row is the sum of the other %d rows, so it looks like their total; pooling it would count their people twice, so take it out of the table"+howToAccept("F10"), all.rows-1)})
	}
}

func (c *countSums) add(s *review.Study) {
	c.rows++
	for i, field := range countFields {
		if n, ok := s.Number(field); ok {
			c.of[i] += n.Value
		}
	}
}

// twice reports whether the sums are twice the counts of a row, give or take one:
// two counts at least, and not all of them small.
func (c *countSums) twice(s *review.Study) bool {
	const leastCounts, leastPeople = 2, 20
	counts, people := 0, 0.0
	for i, field := range countFields {
		n, ok := s.Number(field)
		if !ok {
			continue
		}
		if math.Abs(c.of[i]-2*n.Value) > 1 {
			return false
		}
		counts++
		people = max(people, n.Value)
	}
	return counts >= leastCounts && people >= leastPeople
}
