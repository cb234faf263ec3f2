package ledger

import (
	"bytes"
	"cmp"
	"context"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"steelyard/meta/choice"
)

// Gravity says how much a problem of a ledger matters.
type Gravity int

// Damage is something that is not as it was written; a Note tells what happened.
const (
	Damage Gravity = iota
	Note
)

var gravityNames = choice.Of[Gravity]("gravity", "damage", "note")

// String returns "damage" or "note".
func (g Gravity) String() string { return gravityNames.String(g) }

// Problem is what a look through a ledger finds.
type Problem struct {
	Line    int // 1-based; 0 for the folder
	Gravity Gravity
	Text    string
}

// String returns the problem with its line.
func (p Problem) String() string {
	if p.Line == 0 {
		return p.Text
	}
	return fmt.Sprintf("%s line %d: %s", fileName, p.Line, p.Text)
}

func (l *Ledger) find(line int, gravity Gravity, text string) {
	l.Problems = append(l.Problems, Problem{Line: line, Gravity: gravity, Text: text})
}

// Damaged returns the first problem that is damage, nil if none is.
func (l *Ledger) Damaged() *Problem {
	for i := range l.Problems {
		if l.Problems[i].Gravity == Damage {
			return &l.Problems[i]
		}
	}
	return nil
}

// TornText says what an unfinished last line is; blank where there is none.
func (l *Ledger) TornText() string {
	if l.Torn == nil {
		return ""
	}
	return fmt.Sprintf("the last line was never finished (%d bytes): its update was cut short before it was acknowledged. It is not counted, and the next update sets it aside", len(l.Torn))
}

// Verify returns all that is not as it was written, lines first: checksums, the
// chain, forks, and every input sheet that a state names. The error is ctx's.
func (l *Ledger) Verify(ctx context.Context) ([]Problem, error) {
	all := slices.Clone(l.Problems)
	if l.Torn != nil {
		all = append(all, Problem{Line: l.count + 1, Gravity: Note, Text: l.TornText()})
	}
	seen := map[Stored]bool{}
	for i := range l.States {
		s := &l.States[i]
		for _, file := range s.Record.Input.files() {
			if err := ctx.Err(); err != nil {
				return nil, err
			}
			if seen[file] {
				continue
			}
			seen[file] = true
			if _, err := l.Sheet(file); err != nil {
				all = append(all, Problem{Line: s.Line(), Gravity: Damage, Text: fmt.Sprintf("state %d: %v", s.Number, err)})
			}
		}
	}
	all = append(all, l.strangers()...)
	slices.SortStableFunc(all, func(a, b Problem) int { return cmp.Compare(a.Line-1, b.Line-1) })
	return all, nil
}

// strangers reports what a shared drive has put beside the ledger, and what keeps
// version control from treating it well.
func (l *Ledger) strangers() []Problem {
	var all []Problem
	entries, err := os.ReadDir(l.Dir)
	if err != nil {
		return nil
	}
	for _, e := range entries {
		name := e.Name()
		if strings.HasPrefix(name, "steelyard") && strings.HasSuffix(name, ".ledger") && name != fileName {
			all = append(all, Problem{Gravity: Damage, Text: fmt.Sprintf("%s stands beside the ledger: a shared drive has kept two versions apart. Append the lines of it that %s lacks to the end of %s, without its first line, and move it away; what both sides did is then a fork", name, fileName, fileName)})
		}
	}
	if attributes, err := os.ReadFile(filepath.Join(l.Dir, attributesName)); err != nil || !bytes.Contains(attributes, []byte("merge=union")) {
		all = append(all, Problem{Gravity: Note, Text: fmt.Sprintf("%s lacks the lines that keep version control from changing line ends and let a merge keep both sides; add to it: %s", attributesName, strings.Join(attributeLines, " and "))})
	}
	return all
}
