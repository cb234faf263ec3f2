package words

import "strings"

// Lines returns how many lines a text takes, broken between words where a line would
// hold more than so many letters, and wherever the text itself breaks. It is 1 for a
// blank text; a word longer than a line keeps a line of its own.
func Lines(text string, letters float64) int {
	lines := 0
	for _, paragraph := range strings.Split(text, "\n") {
		lines++
		used := 0.
		for _, word := range strings.Fields(paragraph) {
			size := float64(len([]rune(word)))
			if used > 0 && used+1+size > letters {
				lines, used = lines+1, 0
			}
			if used > 0 {
				used++
			}
			used += size
		}
	}
	return lines
}
