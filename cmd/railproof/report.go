package main

import (
	"bytes"
	"context"
	"flag"
	"fmt"
	"os"
)

var reportCommand = &command{
	name: "report", operand: "FILE|-", summary: "one document that proves a rail",
	about: `Writes one page for screen and paper: requirement, stage, sizing, figures, losses, worst case,
findings, cautions, assumptions, and how to reproduce it. The page needs no other file, no
network and no script.`,
	example: "railproof report -o report.html openapi/examples/buoy-5v0/reports.json",
	prepare: func(flags *flag.FlagSet) action {
		file := flags.String("o", "", "write to `FILE` instead of standard output")
		return func(ctx context.Context, t terminal, operands []string) int {
			if *file == "" {
				return compute(ctx, t, "report", "reports", "text/html", operands)
			}
			var page bytes.Buffer
			into := t
			into.out = &page
			code := compute(ctx, into, "report", "reports", "text/html", operands)
			if page.Len() == 0 {
				return code
			}
			if err := os.WriteFile(*file, page.Bytes(), 0o600); err != nil {
				fmt.Fprintf(t.err, "railproof report: %v\n", err)
				return exitBadInput
			}
			return code
		}
	},
}
