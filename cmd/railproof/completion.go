package main

import (
	"context"
	"flag"
	"fmt"
	"io"
	"slices"
	"strings"
)

// completionCommand is a function because it reads the list that it stands in.
func completionCommand() *command {
	return &command{
		name: "completion", operand: "bash|zsh|fish", summary: "script that completes commands in a shell",
		about:   "Writes a script for the shell that completes subcommands, flags and files.",
		example: "railproof completion bash >/etc/bash_completion.d/railproof",
		prepare: func(*flag.FlagSet) action {
			return func(_ context.Context, t terminal, operands []string) int {
				if len(operands) != 1 || completionScripts[operands[0]] == nil {
					fmt.Fprintln(t.err, "railproof completion: give one of bash, zsh, fish")
					return exitBadInput
				}
				completionScripts[operands[0]](t.out, completed())
				return exitFine
			}
		},
	}
}

var completionScripts = map[string]func(io.Writer, []completedCommand){"bash": completeBash, "zsh": completeZsh, "fish": completeFish}

// completedCommand is what the scripts know of a subcommand.
type completedCommand struct {
	name, summary string
	words         []string // what its operand may be; empty: a file
	flags         []completedFlag
}

type completedFlag struct {
	name, text string
	value      string // placeholder of its value; "" for none
}

// dashed is the flag as it is typed.
func (f completedFlag) dashed() string {
	if len(f.name) == 1 {
		return "-" + f.name
	}
	return "--" + f.name
}

// completed reads the subcommands and their flags from the table.
func completed() []completedCommand {
	table := commands()
	all := make([]completedCommand, 0, len(table)+1)
	names := make([]string, 0, len(table))
	for _, c := range table {
		names = append(names, c.name)
		one := completedCommand{name: c.name, summary: c.summary}
		if c.operand != "FILE|-" && !strings.ContainsAny(c.operand, " []") && c.operand != "" {
			one.words = strings.Split(c.operand, "|")
		}
		flags := flag.NewFlagSet(c.name, flag.ContinueOnError)
		c.prepare(flags)
		flags.VisitAll(func(f *flag.Flag) {
			value, text := flag.UnquoteUsage(f)
			one.flags = append(one.flags, completedFlag{f.Name, text, value})
		})
		all = append(all, one)
	}
	return append(all, completedCommand{name: "help", summary: "tells about a subcommand", words: names})
}

func completeBash(w io.Writer, all []completedCommand) {
	fmt.Fprint(w, "_railproof() {\n  local word=${COMP_WORDS[COMP_CWORD]} words= files=yes\n  if [ \"$COMP_CWORD\" -eq 1 ]; then\n    words='")
	for i := range all {
		fmt.Fprint(w, all[i].name, " ")
	}
	fmt.Fprint(w, "'\n  else\n    case ${COMP_WORDS[1]} in\n")
	for i := range all {
		words := slices.Clone(all[i].words)
		for _, f := range all[i].flags {
			words = append(words, f.dashed())
		}
		files := ""
		if len(all[i].words) > 0 {
			files = " files=no"
		}
		fmt.Fprintf(w, "      %s) words='%s'%s ;;\n", all[i].name, strings.Join(words, " "), files)
	}
	fmt.Fprint(w, "    esac\n  fi\n  mapfile -t COMPREPLY < <(compgen -W \"$words\" -- \"$word\")\n  if [ \"$COMP_CWORD\" -gt 1 ] && [ $files = yes ] && [[ $word != -* ]]; then\n    mapfile -t -O ${#COMPREPLY[@]} COMPREPLY < <(compgen -f -- \"$word\")\n  fi\n}\ncomplete -o filenames -F _railproof railproof\n")
}

// zshText protects what has a meaning inside a single-quoted specification of zsh.
var zshText = strings.NewReplacer("'", `'\''`, "[", `\[`, "]", `\]`, ":", `\:`)

func completeZsh(w io.Writer, all []completedCommand) {
	fmt.Fprint(w, "#compdef railproof\n_railproof() {\n  local -a subcommands=(\n")
	for i := range all {
		fmt.Fprintf(w, "    '%s:%s'\n", all[i].name, zshText.Replace(all[i].summary))
	}
	fmt.Fprint(w, "  )\n  if (( CURRENT == 2 )); then\n    _describe subcommand subcommands\n    return\n  fi\n  local subcommand=$words[2]\n  shift words\n  (( CURRENT-- ))\n  case $subcommand in\n")
	for i := range all {
		fmt.Fprintf(w, "    %s) _arguments", all[i].name)
		for _, f := range all[i].flags {
			fmt.Fprintf(w, " \\\n      '%s[%s]", f.dashed(), zshText.Replace(f.text))
			if f.value != "" {
				fmt.Fprintf(w, ":%s:_files", zshText.Replace(f.value))
			}
			fmt.Fprint(w, "'")
		}
		operands := "_files"
		if len(all[i].words) > 0 {
			operands = "(" + strings.Join(all[i].words, " ") + ")"
		}
		fmt.Fprintf(w, " \\\n      '*:operand:%s' ;;\n", operands)
	}
	fmt.Fprint(w, "  esac\n}\nif [ \"$funcstack[1]\" = _railproof ]; then _railproof \"$@\"; else compdef _railproof railproof; fi\n")
}

// fishText protects what has a meaning inside single quotes of fish.
var fishText = strings.NewReplacer(`\`, `\\`, "'", `\'`)

func completeFish(w io.Writer, all []completedCommand) {
	for i := range all {
		c := &all[i]
		fmt.Fprintf(w, "complete -c railproof -n __fish_use_subcommand -f -a %s -d '%s'\n", c.name, fishText.Replace(c.summary))
		under := "-n '__fish_seen_subcommand_from " + c.name + "'"
		if len(c.words) > 0 {
			fmt.Fprintf(w, "complete -c railproof %s -f -a '%s'\n", under, strings.Join(c.words, " "))
		}
		for _, f := range c.flags {
			kind, more := "-l", ""
			if len(f.name) == 1 {
				kind = "-s"
			}
			if f.value != "" {
				more = " -r -F"
			}
			fmt.Fprintf(w, "complete -c railproof %s %s %s%s -d '%s'\n", under, kind, f.name, more, fishText.Replace(f.text))
		}
	}
}
