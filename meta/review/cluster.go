package review

import (
	"slices"
	"strings"
	"unicode"
)

// clusterAnswers begin texts that say whether clusters of people were randomised.
var clusterAnswers = []string{"yes", "no", "y", "n", "true", "false", "0", "1", "not", "adjusted"}

// NamesCluster reports whether a text in the column of clusters names the group that
// an estimate belongs to, and does not only say whether clusters were randomised, such
// as "yes, by ward". One such text makes the whole column one of names.
func NamesCluster(text string) bool {
	words := strings.FieldsFunc(strings.ToLower(text), func(r rune) bool { return !unicode.IsLetter(r) && !unicode.IsDigit(r) })
	return len(words) > 0 && !slices.Contains(clusterAnswers, words[0])
}
