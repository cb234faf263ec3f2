package layout

import "strings"

// wrapPlain breaks a text into lines of at most a width. A single word that is
// wider stands on a line of its own, cut with "…".
func wrapPlain(text string, width, size float64, bold bool) []string {
	var lines []string
	line := ""
	for _, w := range strings.Fields(text) {
		w = fitWord(w, width, size, bold)
		if line != "" && Width(line+" "+w, size, bold) > width {
			lines = append(lines, line)
			line = w
			continue
		}
		line = joinName(line, w)
	}
	if line != "" {
		lines = append(lines, line)
	}
	return lines
}

// fitWord cuts a word to a width with "…".
func fitWord(word string, width, size float64, bold bool) string {
	if Width(word, size, bold) <= width {
		return word
	}
	runes := []rune(word)
	for n := len(runes) - 1; n > 0; n-- {
		if short := string(runes[:n]) + "…"; Width(short, size, bold) <= width {
			return short
		}
	}
	return "…"
}

// wrapNote breaks a note into lines; its head is bold and ends in a colon.
func wrapNote(n Note, x, y, width, size, lead float64) (lines []Item, bottom float64) {
	head := ""
	if n.Head != "" {
		head = n.Head + ":"
	}
	indent := Width(head+" ", size, true)
	if head == "" {
		indent = 0
	}
	// The first line is shorter by the head: a word of that width stands for it.
	rest := strings.Fields(n.Text)
	first := ""
	for len(rest) > 0 {
		w := fitWord(rest[0], width-indent, size, false)
		if first != "" && Width(first+" "+w, size, false) > width-indent {
			break
		}
		first, rest = joinName(first, w), rest[1:]
	}
	t := Text{Y: y, Size: size}
	switch {
	case head == "":
		t.Spans = []Span{{X: x, Text: first, Ink: Soft}}
	default:
		t.Spans = []Span{{X: x, Text: head, Bold: true}, {Text: " " + first, Ink: Soft, Follow: true}}
	}
	lines = append(lines, t)
	for _, line := range wrapPlain(strings.Join(rest, " "), width, size, false) {
		y += lead
		lines = append(lines, label(x, y, size, Start, Soft, line))
	}
	return lines, y
}
