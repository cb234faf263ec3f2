package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"regexp"
	"slices"
	"strings"

	"github.com/urfave/cli/v2"
)

// version is set by the Makefile from the source's tag.
var version = "0.1"

// streams are where a command reads and writes.
type streams struct {
	in       io.Reader
	out, err io.Writer
}

// run executes one call and returns its exit code.
func run(ctx context.Context, args []string, s streams) int {
	app := newApp(s)
	arranged, err := arrange(app, args)
	if err == nil {
		writeHelp(app, arranged)
		err = app.RunContext(ctx, arranged)
	}
	if ctx.Err() != nil {
		written := "nothing was written"
		var part *partWritten
		if errors.As(err, &part) {
			written = part.text
		}
		fmt.Fprintf(s.err, "steelyard: interrupted; %s\n", written)
		return codeInterrupted
	}
	var partial *rowsLeftOut
	var trigger *triggered
	if err != nil && !errors.As(err, &partial) && !errors.As(err, &trigger) {
		fmt.Fprintf(s.err, "steelyard: %s\n", err)
	}
	return exitCode(err)
}

func newApp(s streams) *cli.App {
	app := &cli.App{
		Name:                      "steelyard",
		Usage:                     "pool published studies and weigh the evidence",
		Version:                   version,
		Reader:                    s.in,
		Writer:                    s.out,
		ErrWriter:                 s.err,
		HideHelpCommand:           true,
		CustomAppHelpTemplate:     appHelp,
		DisableSliceFlagSeparator: true,
		Commands: slices.Concat(
			[]*cli.Command{checkCommand(), poolCommand()},
			accrualCommands(),
			[]*cli.Command{explainCommand(), smallStudyCommand(), panelCommand(), weighCommand(), bulkCommand(), livingCommand(), chartCommand(), reportCommand(), auditCommand(), templateCommand()},
		),
		Action: func(c *cli.Context) error {
			if c.NArg() > 0 {
				return unknownCommand(c.App, c.Args().First())
			}
			return cli.ShowAppHelp(c)
		},
		ExitErrHandler: func(*cli.Context, error) {},
		OnUsageError:   usageError,
	}
	prepare(app.Commands)
	return app
}

// prepare gives commands and their subcommands the same manners.
func prepare(commands []*cli.Command) {
	for _, command := range commands {
		command.OnUsageError = usageError
		command.HideHelpCommand = true
		prepare(command.Subcommands)
	}
}

// writeHelp writes the help text of the command that is asked for it; to write all of
// them in every call would take longer than to pool a sheet.
func writeHelp(app *cli.App, args []string) {
	if len(args) < 3 || args[len(args)-1] != "--help" {
		return
	}
	path := args[1 : len(args)-1]
	command := app.Command(path[0])
	for _, name := range path[1:] {
		if command != nil {
			command = subcommand(command, name)
		}
	}
	if command != nil {
		command.CustomHelpTemplate = strings.ReplaceAll(commandHelp(command, strings.Join(path, " ")), "{{", `{{"{{"}}`)
	}
}

// badNumber is the library's complaint about a flag's value.
var badNumber = regexp.MustCompile(`^invalid value "(.*)" for flag -([a-z0-9-]+): .*$`)

func usageError(c *cli.Context, err error, _ bool) error {
	if m := badNumber.FindStringSubmatch(err.Error()); m != nil {
		return &callError{fmt.Sprintf("--%s: %q is not a number; write it in digits with a decimal point and a plain minus, such as -2.5", m[2], m[1])}
	}
	return &callError{fmt.Sprintf("%s; see: steelyard %s --help", err, c.Command.FullName())}
}

const appHelp = `{{.Name}} - {{.Usage}}

USAGE
  {{.Name}} COMMAND [FLAGS] FILE

  A sheet of extracted results in; a pooled effect, its evidence and its chart out.
  Start with: steelyard pool FILE

COMMANDS{{range .VisibleCommands}}
  {{printf "%-15s" .Name}}{{.Usage}}{{end}}

  {{.Name}} COMMAND --help explains a command and its flags.

EXIT CODES
  0 done    1 the data or plan is wrong, or rows with an error were left out    2 the call is wrong
  3 a file could not be read or written    4 a trigger was met and --fail-on-trigger given
  130 interrupted
`
