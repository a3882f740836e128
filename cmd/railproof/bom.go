package main

import (
	"context"
	"encoding/json"
	"flag"
	"fmt"
	"os"
	"strings"
)

var bomCommand = &command{
	name: "bom", operand: "FILE|-", summary: "does a bill of material agree with what was proven?",
	about: `Compares a bill of material with proven rails: value, tolerance, rating, number of pieces and part
number of every bound line; approved alternates are assessed as substitutions.
The request is read from FILE, or from standard input with -. With --lines its bill of material is
that of a CSV file instead; --columns tells which header names which column: designators, count,
value, tolerance, rating, part_number, not_fitted. The answer is JSON, the same bytes that the server
sends for the same request.`,
	example: "railproof bom --table openapi/examples/buoy-5v0/bom-checks.json",
	prepare: func(flags *flag.FlagSet) action {
		table := flags.Bool("table", false, "a table for reading instead of JSON")
		csv := flags.Bool("csv", false, "comma-separated values instead of JSON")
		lines := flags.String("lines", "", "the bill of material as a CSV `FILE`")
		columns := flags.String("columns", "", "`MEMBER=HEADER`,... of that file, where the request has none")
		return func(ctx context.Context, t terminal, operands []string) int {
			form, code := formOf(t, "bom", *table, *csv)
			if code != exitFine {
				return code
			}
			if *lines == "" && *columns != "" {
				fmt.Fprint(t.err, "railproof bom: --columns belongs to --lines\n") //nolint:errcheck // nowhere to tell it
				return exitBadInput
			}
			return compute(ctx, t, "bom", "bomChecks", form, operands, around{before: func(body []byte) ([]byte, error) { return withLines(body, *lines, *columns) }})
		}
	},
}

// withLines puts a CSV file into a request in place of its bill of material; its
// column names and delimiter stay unless others are given.
func withLines(body []byte, file, columns string) ([]byte, error) {
	if file == "" {
		return body, nil
	}
	text, err := os.ReadFile(file)
	if err != nil {
		return nil, err
	}
	var request map[string]json.RawMessage
	if err := json.Unmarshal(body, &request); err != nil {
		return body, nil //nolint:nilerr // the exchange says what is wrong with the document
	}
	var given struct {
		CSV map[string]any `json:"csv"`
	}
	if raw := request["bom"]; raw != nil {
		if err := json.Unmarshal(raw, &given); err != nil {
			return body, nil //nolint:nilerr // as above
		}
	}
	csv := given.CSV
	if csv == nil {
		csv = map[string]any{}
	}
	csv["text"] = string(text)
	if columns != "" {
		named, err := columnNames(columns)
		if err != nil {
			return nil, err
		}
		csv["columns"] = named
	}
	raw, err := json.Marshal(map[string]any{"csv": csv})
	if err != nil {
		return nil, err
	}
	request["bom"] = raw
	return json.Marshal(request)
}

// columnNames reads MEMBER=HEADER,...
func columnNames(text string) (map[string]string, error) {
	named := map[string]string{}
	for pair := range strings.SplitSeq(text, ",") {
		member, header, found := strings.Cut(pair, "=")
		if !found || member == "" || header == "" {
			return nil, fmt.Errorf("--columns: %q is not MEMBER=HEADER", pair)
		}
		named[member] = header
	}
	return named, nil
}
