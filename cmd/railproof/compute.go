package main

import (
	"context"
	"encoding/json"
	"flag"
	"fmt"
	"io"
	"os"

	"railproof/api/exchange"
	"railproof/openapi"
	"railproof/service"
)

// computation is a subcommand that answers one operation of the contract from a
// file; file is one of its examples.
func computation(name, operation, file, summary, about string) *command {
	return &command{
		name: name, operand: "FILE|-", summary: summary,
		about:   about + "\nThe request is read from FILE, or from standard input with -. The answer is JSON, the same\nbytes that the server sends for the same request.",
		example: "railproof " + name + " --table openapi/examples/buoy-5v0/" + file,
		prepare: func(flags *flag.FlagSet) action {
			table := flags.Bool("table", false, "a table for reading instead of JSON")
			csv := flags.Bool("csv", false, "comma-separated values instead of JSON, where the answer has them")
			var drawn pictureFlags
			drawn.declare(flags, operation)
			explain := explainFlag(flags, operation)
			return func(ctx context.Context, t terminal, operands []string) int {
				form, code := formOf(t, name, *table, *csv)
				if code != exitFine {
					return code
				}
				return compute(ctx, t, name, operation, form, operands, explain, drawn.around(ctx, operation))
			}
		},
	}
}

// formOf returns the media type that the flags ask for.
func formOf(t terminal, name string, table, csv bool) (form string, code int) {
	switch {
	case table && csv:
		fmt.Fprintf(t.err, "railproof %s: --table and --csv exclude each other\n", name)
		return "", exitBadInput
	case table:
		return exchange.TextForm, exitFine
	case csv:
		return "text/csv", exitFine
	}
	return "application/json", exitFine
}

// explainFlag adds the flag where answers tell on request how their figures follow.
func explainFlag(flags *flag.FlagSet, operation string) around {
	if !exchange.Explains(operation) {
		return around{}
	}
	explain := flags.Bool("explain", false, "tell how each figure follows: formula, numbers put in, source")
	return around{asking: func(r *exchange.Request) { r.Explain = *explain }}
}

// longestFile bounds what is read of a request, as the server does by default.
const longestFile = 1 << 20 // [bytes]

// around is what a subcommand does beside answering: before with the request's text,
// asking with the request as it was read, after with its answer; nil is nothing.
type around struct {
	before func(body []byte) ([]byte, error)
	asking func(r *exchange.Request)
	after  func(from string, body []byte, a *exchange.Answer) error
}

func compute(ctx context.Context, t terminal, name, operation, form string, operands []string, also ...around) int {
	if len(operands) != 1 {
		fmt.Fprintf(t.err, "railproof %s: give one FILE, or - for standard input\n", name)
		return exitBadInput
	}
	body, err := read(t, operands[0])
	if err != nil {
		fmt.Fprintf(t.err, "railproof %s: %v\n", name, err)
		return exitBadInput
	}
	for _, a := range also {
		if a.before == nil {
			continue
		}
		if body, err = a.before(body); err != nil {
			fmt.Fprintf(t.err, "railproof %s: %v\n", name, err)
			return exitBadInput
		}
	}
	contract := openapi.Load()
	x := exchange.New(contract, service.New(service.Options{ContractVersion: contract.Version()}))
	if !x.Gives(operation, form) {
		fmt.Fprintf(t.err, "railproof %s: this answer has no such form\n", name)
		return exitBadInput
	}
	request, problem := x.Read(operation, body)
	if problem != nil {
		return refuse(t, name, form, problem)
	}
	for _, a := range also {
		if a.asking != nil {
			a.asking(request)
		}
	}
	run, end := watched(ctx, t, name)
	answer, problem := x.Answer(run, request)
	end()
	if problem != nil {
		return refuse(t, name, form, problem)
	}
	text, problem := answer.Render(form)
	if problem != nil {
		return refuse(t, name, form, problem)
	}
	for _, a := range also {
		if a.after == nil {
			continue
		}
		if err := a.after(operands[0], body, answer); err != nil {
			fmt.Fprintf(t.err, "railproof %s: %v\n", name, err)
			return exitBadInput // a picture that the answer does not have, a file that cannot be written
		}
	}
	if form == exchange.TextForm && takesColour(t) {
		text = coloured(text)
	}
	if _, err := t.out.Write(text); err != nil {
		return exitOurFault
	}
	return verdictCode(answer.Value)
}

func read(t terminal, from string) ([]byte, error) {
	in := t.in
	if from != "-" {
		f, err := os.Open(from)
		if err != nil {
			return nil, err
		}
		defer f.Close()
		in = f
	}
	body, err := io.ReadAll(io.LimitReader(in, longestFile+1))
	if err != nil {
		return nil, err
	}
	if len(body) > longestFile {
		return nil, fmt.Errorf("%s is larger than %d bytes", from, longestFile)
	}
	return body, nil
}

// refuse tells why there is no answer: the problem body as the server sends it,
// or its faults in lines for reading.
func refuse(t terminal, name, form string, p *exchange.Problem) int {
	if form == exchange.TextForm {
		fmt.Fprintf(t.err, "railproof %s: %s\n", name, p.Title)
		for _, f := range p.Errors {
			fmt.Fprintf(t.err, "  %s: %s", pointerOrRoot(f.Pointer), f.Detail)
			if f.Received != "" {
				fmt.Fprintf(t.err, "; given %s %s", f.Received, f.Unit)
			}
			if f.Limit != "" {
				fmt.Fprintf(t.err, "; accepted: %s", f.Limit)
			}
			fmt.Fprintln(t.err)
		}
	} else {
		encoder := json.NewEncoder(t.err)
		encoder.SetIndent("", "  ")
		if err := encoder.Encode(p); err != nil {
			return exitOurFault
		}
	}
	if p.Cause != nil {
		fmt.Fprintf(t.err, "railproof %s: %v\n", name, p.Cause)
	}
	switch p.Kind {
	case exchange.Internal:
		return exitOurFault
	case exchange.Busy, exchange.Deadline:
		return exitIncomplete
	}
	return exitBadInput
}

func pointerOrRoot(p string) string {
	if p == "" {
		return "the document"
	}
	return p
}

// verdictCode turns the status of an answer into an exit code.
func verdictCode(value any) int {
	v, ok := value.(interface{ Verdict() string })
	if !ok {
		return exitFine
	}
	switch v.Verdict() {
	case "ok", "pass", "accepted", "agrees":
		return exitFine
	case "not-converged", "not-run", "not-evaluated", "incomplete", "needs-review":
		return exitIncomplete
	}
	return exitFails
}
