package main

import (
	"context"
	"errors"
	"flag"
	"fmt"
	"io"
	"strings"
	"unicode/utf8"
)

// command is one subcommand. Its flags are declared when it is asked for.
type command struct {
	name    string
	operand string // what follows the flags, for the help
	summary string
	about   string // for the help, in whole sentences
	example string // a real command line
	prepare func(flags *flag.FlagSet) action
}

// action runs a subcommand after its flags were read and returns the exit code.
type action func(ctx context.Context, t terminal, operands []string) int

// Exit codes, the same for every subcommand.
const (
	exitFine       = 0
	exitFails      = 1 // a limit fails, or the stage does not work
	exitBadInput   = 2
	exitOurFault   = 3
	exitIncomplete = 4 // something was not evaluated or did not converge
)

// commands lists the subcommands in the order of the help. A new one is a line
// here and a file of its own.
func commands() []*command {
	return []*command{serveCommand, keyCommand, healthyCommand, sizeCommand, steadyStateCommand, lossesCommand, cornersCommand, loopCommand, transientCommand, checkCommand, substituteCommand, bomCommand, reportCommand, completionCommand(), versionCommand}
}

// run finds the subcommand and runs it.
func run(ctx context.Context, args []string, t terminal) int {
	if len(args) == 0 {
		usage(t.err)
		return exitBadInput
	}
	name, rest := args[0], args[1:]
	if name == "help" || name == "-h" || name == "--help" || name == "-help" {
		if len(rest) == 0 {
			usage(t.out)
			return exitFine
		}
		name, rest = rest[0], []string{"--help"}
	}
	for _, c := range commands() {
		if c.name == name {
			return c.run(ctx, rest, t)
		}
	}
	fmt.Fprintf(t.err, "railproof: no subcommand %q\n\n", name)
	usage(t.err)
	return exitBadInput
}

func (c *command) run(ctx context.Context, args []string, t terminal) int {
	flags := flag.NewFlagSet(c.name, flag.ContinueOnError)
	flags.SetOutput(io.Discard)
	act := c.prepare(flags)
	operands, err := parse(flags, args)
	switch {
	case errors.Is(err, flag.ErrHelp):
		c.help(t.out, flags)
		return exitFine
	case err != nil:
		fmt.Fprintf(t.err, "railproof %s: %v\nrailproof help %s tells more\n", c.name, err, c.name)
		return exitBadInput
	}
	return act(ctx, t, operands)
}

// parse reads flags wherever they stand, before or after the file.
func parse(flags *flag.FlagSet, args []string) (operands []string, err error) {
	for {
		if err := flags.Parse(args); err != nil {
			return nil, err
		}
		if flags.NArg() == 0 {
			return operands, nil
		}
		operands, args = append(operands, flags.Arg(0)), flags.Args()[1:]
	}
}

func usage(w io.Writer) {
	fmt.Fprint(w, "railproof proves step-down supply rails over their worst combination of conditions and tolerances.\n\nusage: railproof SUBCOMMAND [flags] [FILE|-]\n\n")
	for _, c := range commands() {
		fmt.Fprintf(w, "  %-14s %s\n", c.name, c.summary)
	}
	fmt.Fprint(w, "\nrailproof help SUBCOMMAND tells more and gives an example.\n\n"+exitHelp)
}

const exitHelp = `exit codes: 0 fine; 1 a limit fails, or the stage does not work as asked; 2 bad input;
            3 a fault of ours; 4 incomplete: something was not evaluated or did not converge
`

func (c *command) help(w io.Writer, flags *flag.FlagSet) {
	fmt.Fprintf(w, "usage: railproof %s [flags] %s\n\n%s\n", c.name, c.operand, wrapped(c.about, 0))
	any := false
	flags.VisitAll(func(*flag.Flag) { any = true })
	if any {
		fmt.Fprint(w, "\nflags:\n")
	}
	flags.VisitAll(func(f *flag.Flag) {
		value, text := flag.UnquoteUsage(f)
		if f.DefValue != "" && f.DefValue != "false" && !strings.Contains(text, "(default") {
			text += " (default " + f.DefValue + ")"
		}
		fmt.Fprintf(w, "  %-*s %s\n", flagColumn-3, strings.TrimSpace("--"+f.Name+" "+value), wrapped(text, flagColumn))
	})
	fmt.Fprintf(w, "\nexample:\n  %s\n\n%s", c.example, exitHelp)
}

const (
	helpWidth  = 100 // [characters] of a line
	flagColumn = 29  // at which a flag's text begins
)

// wrapped breaks a text into lines, the first of which begins at a column and the
// others are indented by as much. Empty lines stay.
func wrapped(text string, column int) string {
	var out strings.Builder
	for i, paragraph := range strings.Split(text, "\n\n") {
		if i > 0 {
			out.WriteString("\n\n" + strings.Repeat(" ", column))
		}
		at := column
		for k, word := range strings.Fields(paragraph) {
			n := utf8.RuneCountInString(word)
			switch {
			case k == 0:
			case at+1+n > helpWidth:
				out.WriteString("\n" + strings.Repeat(" ", column))
				at = column
			default:
				out.WriteByte(' ')
				at++
			}
			out.WriteString(word)
			at += n
		}
	}
	return out.String()
}
