package docs_test

import (
	"flag"
	"fmt"
	"go/ast"
	"go/parser"
	"go/token"
	"os"
	"strings"
	"testing"

	"github.com/stretchr/testify/assert"
	"github.com/stretchr/testify/require"

	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
)

var update = flag.Bool("update", false, "rewrite the nomenclature page from the tables")

// The page lists what the tables hold, so it cannot say anything else.
func TestNomenclatureIsTheTables(t *testing.T) {
	want := nomenclature(t)
	if *update {
		require.NoError(t, os.WriteFile("nomenclature.md", []byte(want), 0o644))
	}
	got, err := os.ReadFile("nomenclature.md")
	require.NoError(t, err)
	assert.Equal(t, want, string(got), "go test ./api/docs -update rewrites it")
}

// Every name on the page is one of the contract.
func TestNomenclatureNamesStandInTheContract(t *testing.T) {
	contract, err := os.ReadFile("../../openapi/openapi.yaml")
	require.NoError(t, err)
	for _, q := range quantity.All() {
		assert.Contains(t, string(contract), q.Key)
	}
	for _, f := range everyField() {
		name := f.ID[strings.LastIndexByte(f.ID, '/')+1:]
		assert.Contains(t, string(contract), name, f.ID)
	}
}

func nomenclature(t *testing.T) string {
	var b strings.Builder
	b.WriteString("# Nomenclature\n\n" +
		"Every number on the wire is in SI base units, and its name ends in the unit; a dimensionless number ends in `_ratio`.\n" +
		"Temperatures are in degrees Celsius (`_degc`), phases in degrees (`_deg`), gains in decibels (`_db`).\n" +
		"Inside the program a number without a unit in its name is SI as well.\n\n" +
		"## Signs\n\n" +
		"The inductor current is positive towards the output, the high-side current from the input, the rectifier current from ground to the switch node.\n" +
		"The valley is the most negative value of the inductor current.\n" +
		"Ripple is peak to peak; an amplitude says so.\n" +
		"Quantities of a branch are those of one phase; load and capacitors are the total.\n\n" +
		"## Quantities\n\n" +
		"`[]` marks a quantity that each capacitor bank has; a limit names one bank as `output_capacitor_rms_a/0`.\n\n" +
		"| name | symbol | unit | Go name | meaning | from |\n|---|---|---|---|---|---|\n")
	names := goNames(t)
	for _, q := range quantity.All() {
		key := q.Key
		if q.Family != quantity.Single {
			key += "[]"
		}
		fmt.Fprintf(&b, "| `%s` | %s | %s | `quantity.%s` | %s | %s |\n", key, escape(q.Symbol), q.Unit, names[q.ID], escape(q.Meaning), escape(q.Source))
	}
	b.WriteString("\n## Numbers of a stage\n\n" +
		"The name is the JSON Pointer from the stage on; `N` stands for an index.\n" +
		"A default that is used is listed in the answer's `assumptions`.\n\n" +
		"| name | spread | least | greatest | if absent |\n|---|---|---|---|---|\n")
	for _, f := range everyField() {
		absent := "unknown"
		switch {
		case f.Required:
			absent = "required"
		case f.Default != nil:
			absent = fmt.Sprintf("%g: %s", f.Default.Value, f.Default.Why)
		}
		spread := "no"
		if f.Spread {
			spread = "yes"
		}
		fmt.Fprintf(&b, "| `%s` | %s | %g | %g | %s |\n", f.ID, spread, f.Least, f.Greatest, absent)
	}
	return b.String()
}

func escape(s string) string { return strings.ReplaceAll(s, "|", "\\|") }

// everyField lists the numbers of every topology once, banks and phases as N.
func everyField() []stage.Field {
	var all []stage.Field
	seen := map[string]bool{}
	add := func(s *stage.Stage) {
		for _, f := range s.Fields() {
			f.ID = strings.NewReplacer("capacitors/0/", "capacitors/N/", "phases/0/", "phases/N/").Replace(f.ID)
			if !seen[f.ID] {
				seen[f.ID] = true
				all = append(all, f)
			}
		}
	}
	for _, r := range []stage.Rectifier{stage.Synchronous, stage.DiodeRectified} {
		for _, mode := range []parts.ModulatorMode{parts.VoltageMode, parts.PeakCurrentMode} {
			for _, c := range []parts.CompensatorType{parts.OpAmpType3, parts.TransconductanceType3} {
				s := stage.NewStage(r, 1, 1, 1, true, true, true, true)
				s.Modulator.Mode, s.Compensator.Type = mode, c
				add(s)
			}
		}
	}
	return all
}

// goNames reads the constants' names from the source of the quantity table.
func goNames(t *testing.T) map[quantity.ID]string {
	file, err := parser.ParseFile(token.NewFileSet(), "../../calc/quantity/table.go", nil, 0)
	require.NoError(t, err)
	names := map[quantity.ID]string{}
	ast.Inspect(file, func(n ast.Node) bool {
		literal, ok := n.(*ast.CompositeLit)
		if !ok || literal.Type != nil {
			return true
		}
		var id, key string
		for _, e := range literal.Elts {
			kv, ok := e.(*ast.KeyValueExpr)
			if !ok {
				continue
			}
			switch kv.Key.(*ast.Ident).Name {
			case "ID":
				id = kv.Value.(*ast.Ident).Name
			case "Key":
				key = strings.Trim(kv.Value.(*ast.BasicLit).Value, `"`)
			}
		}
		for _, q := range quantity.All() {
			if q.Key == key {
				names[q.ID] = id
			}
		}
		return true
	})
	require.Len(t, names, len(quantity.All()))
	return names
}
