package e2e

import (
	"encoding/json"
	"errors"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
)

// small is a stage that a check answers quickly: no loop, no load step.
const small = `{
  "stage": {
    "name": "small", "rectifier": "synchronous", "switching_frequency_hz": 500000,
    "high_side": {"on_resistance_ohm": 0.009, "rating": {"drain_source_v": 40, "drain_current_a": 45, "junction_degc": 150}, "thermal": {"junction_to_ambient_k_per_w": 32}},
    "low_side": {"on_resistance_ohm": 0.0045, "rating": {"drain_source_v": 40, "drain_current_a": 45, "junction_degc": 150}, "thermal": {"junction_to_ambient_k_per_w": 32}},
    "inductor": {"inductance_h": {"typ": 6.8e-6, "tol": 0.2}, "dc_resistance_ohm": 0.007, "rating": {"saturation_a": 12, "heating_a": 9, "winding_degc": 125}, "thermal": {"junction_to_ambient_k_per_w": 22}},
    "output_capacitors": [{"capacitance_f": 2.2e-5, "count": 4, "esr_ohm": 0.003, "kind": "ceramic-class-2",
      "capacitance_at_bias": [{"bias_v": 0, "multiplier_ratio": 1}, {"bias_v": 6, "multiplier_ratio": 0.8}], "rating": {"voltage_v": 16, "ripple_current_a": 4, "temperature_degc": 125}}],
    "input_capacitors": [{"capacitance_f": 1e-5, "count": 3, "esr_ohm": 0.003, "kind": "ceramic-class-2",
      "capacitance_at_bias": [{"bias_v": 0, "multiplier_ratio": 1}, {"bias_v": 36, "multiplier_ratio": 0.5}], "rating": {"voltage_v": 50, "ripple_current_a": 4, "temperature_degc": 125}}],
    "feedback": {"reference_v": {"typ": 0.8, "tol": 0.01}, "upper_ohm": 56200, "lower_ohm": 10700},
    "controller": {"drive_v": 5, "min_on_time_s": 8e-8, "min_off_time_s": 1.2e-7, "max_duty_ratio": 0.98}
  },
  "requirement": {
    "input": {"min_v": 18, "max_v": 32}, "output": {"voltage_v": 5, "tolerance_ratio": 0.03}, "load": {"min_a": 0.5, "max_a": 6},
    "ambient": {"min_degc": 0, "max_degc": 60}, "switching_frequency_hz": 500000
  },
  "packs": [{"id": "general-practice"}]
}`

// variants of the small stage and what a check says of them.
var variants = []struct {
	name, was, is string
	code          int
}{
	{"passes", "", "", 0},
	{"fails", `"saturation_a": 12`, `"saturation_a": 7`, 1},
	{"incomplete", `"saturation_a": 12, `, "", 4},
}

func TestCheckExitCodes(t *testing.T) {
	for _, v := range variants {
		t.Run(v.name, func(t *testing.T) {
			r := railproof(t, strings.Replace(small, v.was, v.is, 1), "check", "--table", "-")
			require.Equal(t, v.code, r.code, "%s%s", r.out, r.err)
			for line := range strings.Lines(r.out) {
				require.LessOrEqual(t, len([]rune(strings.TrimRight(line, "\n"))), 100, line)
			}
		})
	}
}

// The log of a check points at the lines of the request.
func TestCheckWritesFindingsForTools(t *testing.T) {
	dir := t.TempDir()
	request, log := filepath.Join(dir, "rule-checks.json"), filepath.Join(dir, "findings.sarif")
	require.NoError(t, os.WriteFile(request, []byte(strings.Replace(small, `"saturation_a": 12`, `"saturation_a": 7`, 1)), 0o600))
	r := railproof(t, "", "check", "--sarif", log, request)
	require.Equal(t, 1, r.code, r.err)
	text, err := os.ReadFile(log)
	require.NoError(t, err)
	var findings struct {
		Version string
		Runs    []struct {
			Results []struct {
				RuleID, Kind, Level string
				Locations           []struct {
					PhysicalLocation struct {
						ArtifactLocation struct{ URI string } //nolint:misspell // the standard spells it so
						Region           struct{ StartLine, StartColumn int }
					}
					LogicalLocations []struct{ FullyQualifiedName string }
				}
			}
		}
	}
	require.NoError(t, json.Unmarshal(text, &findings))
	require.Equal(t, "2.1.0", findings.Version)
	found := false
	for _, one := range findings.Runs[0].Results {
		if one.RuleID == "general-practice/inductor-saturation" {
			found = true
			require.Equal(t, "fail", one.Kind)
			require.Equal(t, "error", one.Level)
			at := one.Locations[0]
			require.Equal(t, "/stage/inductor/rating/saturation_a", at.LogicalLocations[0].FullyQualifiedName)
			require.Equal(t, 6, at.PhysicalLocation.Region.StartLine)
			require.Equal(t, filepath.ToSlash(request), at.PhysicalLocation.ArtifactLocation.URI) //nolint:misspell // as above
		}
	}
	require.True(t, found)
}

// The pipeline of the examples stops where a rail fails or is incomplete.
func TestGateOfTheExamples(t *testing.T) {
	shell, err := exec.LookPath("sh")
	if err != nil {
		t.Skip("no shell")
	}
	gate, err := filepath.Abs(filepath.Join(root, "openapi/examples/ci/check-rails.sh"))
	require.NoError(t, err)
	for _, c := range []struct {
		name  string
		rails []int // of variants
		code  int
	}{{"all pass", []int{0}, 0}, {"one incomplete", []int{0, 2}, 4}, {"one fails", []int{1, 0, 2}, 1}} {
		t.Run(c.name, func(t *testing.T) {
			rails, findings := t.TempDir(), filepath.Join(t.TempDir(), "findings")
			for _, k := range c.rails {
				v := variants[k]
				require.NoError(t, os.Mkdir(filepath.Join(rails, v.name), 0o700))
				require.NoError(t, os.WriteFile(filepath.Join(rails, v.name, "rule-checks.json"), []byte(strings.Replace(small, v.was, v.is, 1)), 0o600))
			}
			run := exec.CommandContext(t.Context(), shell, gate, rails, findings)
			run.Env = append(os.Environ(), "PATH="+filepath.Dir(program)+string(os.PathListSeparator)+os.Getenv("PATH"))
			out, err := run.CombinedOutput()
			code := 0
			if exit, ok := errors.AsType[*exec.ExitError](err); ok {
				code = exit.ExitCode()
			} else {
				require.NoError(t, err)
			}
			require.Equal(t, c.code, code, "%s", out)
			logs, err := filepath.Glob(filepath.Join(findings, "*.sarif"))
			require.NoError(t, err)
			require.Len(t, logs, len(c.rails))
		})
	}
}

func TestBomFromACSVFile(t *testing.T) {
	dir := t.TempDir()
	file := filepath.Join(dir, "parts.csv")
	require.NoError(t, os.WriteFile(file, []byte("Reference;Value\nL1;6u8 20% 12A\n"), 0o600))
	rail := `{"rails": [{"name": "small", "stage": ` + small[strings.Index(small, `"stage": `)+9:strings.Index(small, `,
  "requirement"`)] + `, "requirement": ` + small[strings.Index(small, `"requirement": `)+15:strings.Index(small, `,
  "packs"`)] + `, "bindings": [{"role": "inductor", "designators": ["L1"]}],
  "roles_without_line": ["high_side", "low_side", "output_capacitors/0", "input_capacitors/0", "feedback/upper_ohm", "feedback/lower_ohm"]}]}`
	r := railproof(t, rail, "bom", "--lines", file, "--columns", "designators=Reference,value=Value", "-")
	require.Equal(t, 0, r.code, "%s%s", r.out, r.err)
	r = railproof(t, rail, "bom", "--table", "--lines", file, "--columns", "designators=Ref,value=Value", "-")
	require.Equal(t, 2, r.code, r.out)
	require.Contains(t, r.err, "/bom/csv/columns/designators")
	require.Contains(t, r.err, `"Reference"`)
	r = railproof(t, rail, "bom", "--lines", file, "--columns", "designators", "-")
	require.Equal(t, 2, r.code)
}
