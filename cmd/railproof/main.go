// Command railproof serves the worst-case proof of step-down supply rails over
// HTTP, and runs the same use cases on files.
package main

import (
	"context"
	"io"
	"os"
	"os/signal"
	"syscall"
)

func main() {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	code := run(ctx, os.Args[1:], terminal{os.Stdin, os.Stdout, os.Stderr, os.Getenv})
	stop()
	os.Exit(code)
}

// terminal is what a subcommand sees of the outside.
type terminal struct {
	in       io.Reader
	out, err io.Writer
	env      func(string) string
}
