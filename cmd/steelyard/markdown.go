package main

import (
	"regexp"
	"strings"
)

// markdown writes an answer as Markdown (CommonMark with pipe tables): headings,
// lists and tables, nothing else. Whatever the sheet holds stays text.
func markdown(p *page) string {
	var out strings.Builder
	for i, b := range p.blocks {
		if i > 0 && !continues(p.blocks[i-1], b) {
			out.WriteString("\n")
		}
		switch b.kind {
		case headingBlock:
			out.WriteString("## " + plain(b.text) + "\n")
		case sectionBlock:
			out.WriteString("### " + plain(b.text) + "\n")
		case paragraphBlock:
			out.WriteString(plain(b.text) + "\n")
		case itemBlock:
			out.WriteString(listItem(b))
		case labelledBlock:
			if i == 0 || !continues(p.blocks[i-1], b) {
				out.WriteString("| Item | Result |\n| :-- | :-- |\n")
			}
			out.WriteString("| " + cellText(b.label) + " | " + cellText(b.text) + " |\n")
		case tableBlock:
			out.WriteString(pipeTable(b))
		}
	}
	return out.String()
}

// continues reports whether a block goes on with the list or the table of the one
// before it.
func continues(before, b block) bool {
	return before.kind == b.kind && (b.kind == itemBlock || b.kind == labelledBlock)
}

func listItem(b block) string {
	switch b.label {
	case " ":
		return "  - " + plain(b.text) + "\n"
	case "·", "-":
		return "- " + plain(b.text) + "\n"
	}
	return "- " + plain(b.label) + " " + plain(b.text) + "\n"
}

func pipeTable(b block) string {
	var out strings.Builder
	rule := "|"
	out.WriteString("|")
	for _, c := range b.columns {
		out.WriteString(" " + cellText(c.head) + " |")
		if c.right {
			rule += " --: |"
		} else {
			rule += " :-- |"
		}
	}
	out.WriteString("\n" + rule + "\n")
	for _, row := range b.rows {
		out.WriteString("|")
		for _, cell := range row {
			out.WriteString(" " + cellText(cell) + " |")
		}
		out.WriteString("\n")
	}
	return out.String()
}

// special are the characters that Markdown may read as more than themselves.
var special = strings.NewReplacer(
	`\`, `\\`, "`", "\\`", `*`, `\*`, `_`, `\_`, `[`, `\[`, `]`, `\]`, `#`, `\#`, `|`, `\|`, `~`, `\~`, `!`, `\!`, `$`, `\$`,
	`<`, `&lt;`, `>`, `&gt;`, `&`, `&amp;`,
	"://", `&#58;//`, "www.", `www&#46;`, "@", `&#64;`, // no link is made of an address
	"\r\n", " ", "\n", " ", "\r", " ",
)

// leading matches what would start a list, a rule or a heading line at the start of a
// text.
var leading = regexp.MustCompile(`^(\s*)([-+=]|\d+[.)])`)

// plain writes text that Markdown shows as it is.
func plain(text string) string {
	text = special.Replace(strings.TrimSpace(text))
	if m := leading.FindStringSubmatch(text); m != nil {
		last := len(m[0]) - 1
		return text[:last] + `\` + text[last:]
	}
	return text
}

// cellText is plain for a cell of a table, where no line starts.
func cellText(text string) string { return special.Replace(strings.TrimSpace(text)) }
