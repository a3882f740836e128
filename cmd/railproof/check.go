package main

import (
	"context"
	"flag"
	"net/url"
	"os"
	"path/filepath"

	"railproof/api/exchange"
	"railproof/api/render"
	"railproof/api/wire"
	"railproof/service/sarif"
)

var checkCommand = &command{
	name: "check", operand: "FILE|-", summary: "design rules on worst-case quantities",
	about: `Checks a stage against its requirement and against rule packs, each rule at the worst corner over
conditions and tolerances. What could not be evaluated is never a pass.
The request is read from FILE, or from standard input with -. The answer is JSON, the same
bytes that the server sends for the same request.`,
	example: "railproof check --table openapi/examples/buoy-5v0/rule-checks.json",
	prepare: func(flags *flag.FlagSet) action {
		table := flags.Bool("table", false, "a table for reading instead of JSON")
		csv := flags.Bool("csv", false, "comma-separated values instead of JSON")
		log := flags.String("sarif", "", "also write the findings to `FILE` as SARIF 2.1.0, with lines of the request")
		return func(ctx context.Context, t terminal, operands []string) int {
			form, code := formOf(t, "check", *table, *csv)
			if code != exitFine {
				return code
			}
			return compute(ctx, t, "check", "ruleChecks", form, operands, writeSARIF(*log))
		}
	},
}

// writeSARIF writes the findings of a check to a file; "" for none.
func writeSARIF(to string) around {
	if to == "" {
		return around{}
	}
	return around{after: func(from string, body []byte, a *exchange.Answer) error {
		uri := ""
		if from != "-" {
			uri = (&url.URL{Path: filepath.ToSlash(from)}).String()
		}
		places, err := sarif.Locate(body)
		if err != nil {
			return err
		}
		return os.WriteFile(to, render.RuleChecksSARIF(a.Value.(*wire.RuleChecksAnswer), uri, places), 0o644)
	}}
}
