// Package choice names the values of an enumeration once, so that flags, plan
// sheets, help texts and JSON all spell a choice the same way.
package choice

import (
	"fmt"
	"slices"
	"strings"
)

// Names holds the names of the values 0, 1, 2 … of an enumeration T. An empty
// name marks a value that cannot be written, such as "not set".
type Names[T ~int] struct {
	what     string
	names    []string
	folded   []string     // the names as they are compared
	synonyms map[string]T // by how they are compared
}

// Of returns the names of an enumeration; what says in a message what is being
// chosen, such as "interval method". names[i] is the name of T(i).
func Of[T ~int](what string, names ...string) Names[T] {
	n := Names[T]{what: what, names: names}
	for _, name := range names {
		n.folded = append(n.folded, Fold(name))
	}
	return n
}

// With returns a copy that also takes other words for a value.
func (n Names[T]) With(synonyms map[string]T) Names[T] {
	n.synonyms = make(map[string]T, len(synonyms))
	for name, v := range synonyms {
		n.synonyms[Fold(name)] = v
	}
	return n
}

// String returns the name of v, or a numbered stand-in for a value outside the
// enumeration.
func (n Names[T]) String(v T) string {
	if v < 0 || int(v) >= len(n.names) {
		return fmt.Sprintf("%s %d", n.what, int(v))
	}
	return n.names[v]
}

// All returns the names that can be written, in order.
func (n Names[T]) All() []string {
	return slices.DeleteFunc(slices.Clone(n.names), func(s string) bool { return s == "" })
}

// Parse returns the value that text names; case, surrounding blanks, and
// whether words are joined by blanks, underscores or hyphens do not matter. The
// error of an unknown name lists the valid ones.
func (n Names[T]) Parse(text string) (T, error) {
	if want := Fold(text); want != "" {
		if i := slices.Index(n.folded, want); i >= 0 {
			return T(i), nil
		}
		if v, ok := n.synonyms[want]; ok {
			return v, nil
		}
	}
	return 0, &UnknownError{What: n.what, Text: text, Valid: n.All()}
}

// Fold brings a name to the form in which names are compared: lower case, words
// joined by single hyphens.
func Fold(text string) string {
	return strings.Join(strings.FieldsFunc(strings.ToLower(text), func(r rune) bool {
		return r == ' ' || r == '_' || r == '-' || r == '\t' || r == '\u00a0'
	}), "-")
}

// UnknownError reports a name that is not one of an enumeration's.
type UnknownError struct {
	What, Text string
	Valid      []string
}

func (e *UnknownError) Error() string {
	if len(e.Valid) == 0 {
		return fmt.Sprintf("%q is not a known %s", e.Text, e.What)
	}
	return fmt.Sprintf("%q is not a known %s; use one of: %s", e.Text, e.What, strings.Join(e.Valid, ", "))
}
