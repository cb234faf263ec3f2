package ingest

import (
	"slices"
	"strings"

	"steelyard/meta/review"
)

// lacking says in words which columns the header lacks: those of the set of
// numbers that it comes nearest to.
func lacking(h *header) string {
	have := h.fields()
	if !have[review.StudyName] {
		return "no column with the names of the studies is among them"
	}
	var nearest []review.Field // that are missing
	most := 0
	for i, set := range slices.Concat(fieldSets, armSets(), rareSets) {
		var missing []review.Field
		for _, field := range set {
			if !have[field] {
				missing = append(missing, field)
			}
		}
		score := 2*(len(set)-len(missing)) - len(missing)
		if i < len(fieldSets) {
			score += 2 // the usual goes before the rare
		}
		if len(missing) < len(set) && (score > most || nearest == nil) {
			nearest, most = missing, score
		}
	}
	if nearest == nil {
		return "no complete set of number columns, such as events and totals of both arms, is among them"
	}
	return "what is there lacks " + fieldList(nearest)
}

// fieldList joins names of fields: "sd treated, sd control and total control".
func fieldList(fields []review.Field) string {
	names := make([]string, len(fields))
	for i, f := range fields {
		names[i] = f.String()
	}
	if len(names) == 1 {
		return names[0]
	}
	return strings.Join(names[:len(names)-1], ", ") + " and " + names[len(names)-1]
}
