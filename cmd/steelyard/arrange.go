package main

import (
	"fmt"
	"slices"
	"strings"

	"github.com/urfave/cli/v2"
)

// arrange moves flags in front of operands, as the library stops looking for
// flags at the first operand. It refuses unknown commands and flags with the
// nearest known name. "--" ends the flags; "-" is an operand.
func arrange(app *cli.App, args []string) ([]string, error) {
	if len(args) < 2 {
		return args, nil
	}
	at := slices.IndexFunc(args[1:], func(a string) bool { return !strings.HasPrefix(a, "-") })
	if at < 0 {
		return args, nil // only flags of the app, such as --help
	}
	switch word := args[1+at]; {
	case word == "help" || word == "version":
		return []string{args[0], "--" + word}, nil
	case app.Command(word) == nil && at > 0:
		return nil, &callError{fmt.Sprintf("name the command first, then its flags: steelyard COMMAND %s …", args[1])}
	case app.Command(word) == nil:
		return nil, unknownCommand(app, word)
	}
	command := app.Command(args[1+at])
	path := []string{args[0], command.Name}
	rest := slices.Concat(args[1:1+at], args[2+at:])
	for len(command.Subcommands) > 0 {
		at := slices.IndexFunc(rest, func(a string) bool { return !strings.HasPrefix(a, "-") })
		if at < 0 {
			break
		}
		sub := subcommand(command, rest[at])
		if sub == nil {
			return nil, unknownKind(command, rest[at])
		}
		command, path = sub, append(path, sub.Name)
		rest = slices.Delete(slices.Clone(rest), at, at+1)
	}
	if slices.ContainsFunc(rest, func(a string) bool { return a == "--help" || a == "-h" || a == "-help" }) {
		return append(path, "--help"), nil
	}
	flags, operands, err := partition(command, strings.Join(path[1:], " "), rest)
	if err != nil {
		return nil, err
	}
	return slices.Concat(path, flags, []string{"--"}, operands), nil
}

// partition sorts the arguments of a command, called by path, into flags with
// their values, and operands. A flag that takes one value may be given once.
func partition(command *cli.Command, path string, args []string) (flags, operands []string, err error) {
	given := map[string]bool{}
	for i := 0; i < len(args); i++ {
		arg := args[i]
		if arg == "--" {
			return flags, append(operands, args[i+1:]...), nil
		}
		if !strings.HasPrefix(arg, "-") || arg == "-" {
			operands = append(operands, arg)
			continue
		}
		name, _, joined := strings.Cut(strings.TrimLeft(arg, "-"), "=")
		flag := findFlag(command, name)
		if flag == nil {
			return nil, nil, unknownFlag(command, path, name)
		}
		if _, many := flag.(*cli.StringSliceFlag); given[flag.Names()[0]] && !many {
			return nil, nil, &callError{fmt.Sprintf("--%s is given twice; give it once", flag.Names()[0])}
		}
		given[flag.Names()[0]] = true
		flags = append(flags, arg)
		if joined || !takesValue(flag) {
			continue
		}
		if i+1 == len(args) {
			return nil, nil, &callError{fmt.Sprintf("--%s needs a value; see: steelyard %s --help", name, path)}
		}
		i++
		flags = append(flags, args[i])
	}
	return flags, operands, nil
}

func takesValue(flag cli.Flag) bool {
	documented, ok := flag.(cli.DocGenerationFlag)
	return ok && documented.TakesValue()
}

func findFlag(command *cli.Command, name string) cli.Flag {
	for _, flag := range append([]cli.Flag{cli.HelpFlag}, command.Flags...) {
		if slices.Contains(flag.Names(), name) {
			return flag
		}
	}
	return nil
}

func subcommand(command *cli.Command, name string) *cli.Command {
	for _, sub := range command.Subcommands {
		if sub.HasName(name) {
			return sub
		}
	}
	return nil
}

func unknownCommand(app *cli.App, name string) error {
	var names []string
	for _, c := range app.VisibleCommands() {
		names = append(names, c.Name)
	}
	hint := nearest(name, names)
	if hint == "" && strings.ContainsAny(name, "./\\") {
		return &callError{fmt.Sprintf("%q is no command; to pool a file: steelyard pool %s", name, name)}
	}
	return &callError{fmt.Sprintf("%q is no command%s; the commands are: %s", name, meant(hint), strings.Join(names, ", "))}
}

func unknownKind(command *cli.Command, name string) error {
	var names []string
	for _, c := range command.Subcommands {
		names = append(names, c.Name)
	}
	return &callError{fmt.Sprintf("%q is no kind of %s%s; the kinds are: %s", name, command.Name, meant(nearest(name, names)), strings.Join(names, ", "))}
}

func unknownFlag(command *cli.Command, path, name string) error {
	name = strings.TrimLeft(name, "-")
	var names []string
	for _, flag := range command.Flags {
		names = append(names, flag.Names()...)
	}
	hint := nearest(name, names)
	if hint != "" {
		hint = "--" + hint
	}
	return &callError{fmt.Sprintf("there is no flag --%s%s; see: steelyard %s --help", name, meant(hint), path)}
}

func meant(hint string) string {
	if hint == "" {
		return ""
	}
	return fmt.Sprintf("; did you mean %s?", hint)
}

// nearest returns the name that fewest edits turn into text, or "" if none is
// near enough to be a slip: at most a third of its length.
func nearest(text string, names []string) string {
	best, distance := "", len(text)/3+1
	for _, name := range names {
		if d := edits(text, name); d < distance {
			best, distance = name, d
		}
	}
	return best
}

// edits is the Levenshtein distance of two short words.
func edits(a, b string) int {
	row := make([]int, len(b)+1)
	for j := range row {
		row[j] = j
	}
	for i := 1; i <= len(a); i++ {
		diagonal := row[0]
		row[0] = i
		for j := 1; j <= len(b); j++ {
			cost := diagonal
			if a[i-1] != b[j-1] {
				cost = 1 + min(diagonal, row[j], row[j-1])
			}
			diagonal, row[j] = row[j], cost
		}
	}
	return row[len(b)]
}
