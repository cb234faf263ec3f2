package main

import (
	"fmt"
	"strings"
	"unicode/utf8"

	"github.com/urfave/cli/v2"
)

// helpWidth is the widest line of a help text.
const helpWidth = 96

// commandHelp returns the help text of the command that path calls.
func commandHelp(c *cli.Command, path string) string {
	var b strings.Builder
	fmt.Fprintf(&b, "steelyard %s - %s\n\nUSAGE\n  %s\n", path, c.Usage, c.UsageText)
	if c.Description != "" {
		fmt.Fprintf(&b, "\n%s\n", c.Description)
	}
	if len(c.Subcommands) > 0 {
		b.WriteString("\nKINDS\n")
		indent := 0
		for _, sub := range c.Subcommands {
			indent = max(indent, len(sub.Name)+2)
		}
		for _, sub := range c.Subcommands {
			b.WriteString(entry(sub.Name, sub.Usage, indent))
		}
	}
	if len(c.Flags) > 0 {
		b.WriteString("\nFLAGS (before or after the file)\n")
		for _, flag := range c.Flags {
			if documented, ok := flag.(cli.DocGenerationFlag); ok {
				b.WriteString(entry("--"+flag.Names()[0], documented.GetUsage(), 16))
			}
		}
	}
	return b.String()
}

// entry formats a term with its explanation, wrapped and indented; a term that leaves
// no gap before it has a line of its own.
func entry(term, text string, indent int) string {
	lines := wrap(text, helpWidth-indent-2)
	if utf8.RuneCountInString(term) > indent-2 {
		term = "  " + term + "\n" + strings.Repeat(" ", indent+2)
	} else {
		term = fmt.Sprintf("  %-*s", indent, term)
	}
	out := term + lines[0] + "\n"
	for _, line := range lines[1:] {
		out += strings.Repeat(" ", indent+2) + line + "\n"
	}
	return out
}

// wrap breaks text at blanks into lines of at most width runes; a longer word
// has a line of its own, and odds such as "29 : 1" stay together. It returns at
// least one line.
func wrap(text string, width int) []string {
	const hold = "\x00"
	var lines []string
	line, used := "", 0
	for _, word := range strings.Fields(strings.ReplaceAll(text, " : ", hold+":"+hold)) {
		word = strings.ReplaceAll(word, hold, " ")
		n := utf8.RuneCountInString(word)
		if used > 0 && used+1+n > width {
			lines = append(lines, line)
			line, used = "", 0
		}
		if used > 0 {
			line += " "
			used++
		}
		line += word
		used += n
	}
	return append(lines, line)
}
