package main

import (
	"context"
	"flag"
	"fmt"
	"os"

	"railproof/service/access"
)

var keyCommand = &command{
	name: "key", operand: "new", summary: "make a key for a caller of the server",
	about: `Makes a random key. The key is printed once, on standard output, for the caller; its line for the
server's key file goes to standard error, or with --file to the end of that file. The file holds a
digest, never the key. A running server reads the file again within a second of a change, or at once
on SIGHUP; to revoke a key, remove its line.`,
	example: "railproof key new --name plm --scope compute",
	prepare: func(flags *flag.FlagSet) action {
		name := flags.String("name", "", "`NAME` of the caller, for logs")
		scope := flags.String("scope", "compute", "`SCOPE`: read, compute or admin; each includes the one before")
		file := flags.String("file", "", "key `FILE` to add to")
		return func(_ context.Context, t terminal, operands []string) int {
			if len(operands) != 1 || operands[0] != "new" {
				fmt.Fprintln(t.err, "railproof key: the only thing to do is new")
				return exitBadInput
			}
			s, err := access.ParseScope(*scope)
			if err != nil {
				fmt.Fprintf(t.err, "railproof key: %v\n", err)
				return exitBadInput
			}
			key, line, err := access.NewKey(access.Caller{Name: *name, Scope: s})
			if err != nil {
				fmt.Fprintf(t.err, "railproof key: %v\n", err)
				return exitBadInput
			}
			if *file == "" {
				fmt.Fprintln(t.err, line)
			} else if err := appendLine(*file, line); err != nil {
				fmt.Fprintf(t.err, "railproof key: %v\n", err)
				return exitBadInput
			}
			fmt.Fprintln(t.out, key)
			return exitFine
		}
	},
}

func appendLine(path, line string) error {
	f, err := os.OpenFile(path, os.O_APPEND|os.O_CREATE|os.O_WRONLY, 0o600)
	if err != nil {
		return err
	}
	if _, err := f.WriteString(line + "\n"); err != nil {
		_ = f.Close() // the first error says what happened
		return err
	}
	return f.Close()
}
