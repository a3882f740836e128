package contract

import (
	"bytes"
	"encoding/csv"
	"encoding/json"
	"io/fs"
	"regexp"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/openapi"
)

func exampleRequest(t testing.TB, name string) []byte {
	t.Helper()
	body, err := fs.ReadFile(openapi.Examples(), name)
	require.NoError(t, err)
	return body
}

func TestOneIdentifierForOneMeaning(t *testing.T) {
	at := server(t) + "/v1/losses"
	id := func(body string) any {
		r := send(t, "POST", at, []byte(body))
		require.Equal(t, 200, r.status, "%s", r.body)
		return r.tree(t).(map[string]any)["result_id"]
	}
	base := id(minimal)
	require.Regexp(t, regexp.MustCompile("^res_[0-9a-f]{64}$"), base)
	require.Equal(t, base, id(strings.ReplaceAll(minimal, "\n", "\t\n  ")), "spacing")
	require.Equal(t, base, id(strings.NewReplacer("500e3", "500000.0", `"rectifier"`, `"\u0072ectifier"`).Replace(minimal)), "writing of numbers and names")
	require.NotEqual(t, base, id(strings.Replace(minimal, "6.8e-6", "6.9e-6", 1)))
}

// What sizing proposes is taken by the other operations as it is.
func TestDraftStageIsPostedOnUnchanged(t *testing.T) {
	at := server(t)
	request := exampleWith(t, "buoy-5v0/sizing.json", nil)
	sized := asked(t, at, "sizing", request)
	stage, point, conditions, requirement := sized["stage"], sized["point"], sized["conditions"], request["requirement"]
	step := exampleWith(t, "buoy-5v0/transients.json", object{"stage": stage, "point": point})
	for operation, body := range map[string]object{
		"losses": {"stage": stage, "point": point}, "steadyState": {"stage": stage, "point": point}, "loopGain": {"stage": stage, "point": point}, "transients": step,
		"corners": {"stage": stage, "conditions": conditions, "samples": 20}, "ruleChecks": {"stage": stage, "conditions": conditions, "requirement": requirement, "limits": sized["limits"]},
	} {
		a := asked(t, at, operation, body)
		require.Equal(t, "ok", a["status"], operation)
		require.Equal(t, stage, a["stage"], "stage in, stage out: %s", operation)
	}
}

// A life that only some banks have is told of these, at a point and over a grid.
func TestLivesOfSomeBanks(t *testing.T) {
	at := server(t)
	request := exampleWith(t, "mast-12v0/losses.json", nil)
	point := within(request, "points", 0).(object)
	one := asked(t, at, "losses", object{"stage": request["stage"], "point": point})
	temperatures := within(one, "items", 0, "part_temperatures")
	require.NotContains(t, of(temperatures, "part", "input_capacitors/0"), "life_s", "ceramic")
	life := of(temperatures, "part", "input_capacitors/1")["life_s"]
	require.Positive(t, life)

	grid := asked(t, at, "losses", object{
		"stage": request["stage"], "quantities": []string{"input_capacitor_life_s", "output_capacitor_life_s"},
		"grid": object{
			"input_v": []any{point["input_v"]}, "load_current_a": []any{within(point, "load", "current_a")}, "ambient_degc": []any{point["ambient_degc"]},
			"source_ohm": point["source_ohm"], "control": point["control"],
		},
	})
	require.Equal(t, object{"input_capacitor_life_s": []any{[]any{}, []any{life}}}, within(grid, "grid", "rows", "quantities"), "in the place of its bank")
}

// The losses of every point add up to input minus output, on the wire.
func TestLossesAddUpOnTheWire(t *testing.T) {
	at := server(t) + "/v1/losses"
	for _, rail := range []string{"buoy-5v0", "mast-12v0"} {
		var a struct {
			Items []struct {
				Quantities map[string]any `json:"quantities"`
				Losses     []struct {
					Power float64 `json:"power_w"`
					Count float64 `json:"count"`
				} `json:"losses"`
			} `json:"items"`
		}
		r := send(t, "POST", at, exampleRequest(t, rail+"/losses.json"))
		require.Equal(t, 200, r.status, "%s", r.body)
		require.NoError(t, json.Unmarshal(r.body, &a))
		for _, item := range a.Items {
			sum := 0.0
			for _, l := range item.Losses {
				sum += l.Power * l.Count
			}
			in, out := item.Quantities["input_power_w"].(float64), item.Quantities["output_power_w"].(float64)
			require.InDelta(t, in-out, sum, 1e-9*in, rail)
		}
	}
}

func TestAssumptionsCarryAComputedEffect(t *testing.T) {
	r := send(t, "POST", server(t)+"/v1/losses", []byte(minimal))
	require.Equal(t, 200, r.status)
	var a struct {
		Assumptions []struct {
			Pointer string   `json:"pointer"`
			Low     *float64 `json:"low"`
			High    *float64 `json:"high"`
			Effect  *struct {
				Quantity string   `json:"quantity"`
				AtLow    *float64 `json:"at_low"`
				AtHigh   *float64 `json:"at_high"`
				Change   float64  `json:"change"`
			} `json:"effect"`
		} `json:"assumptions"`
		Items []struct {
			Quantities map[string]any `json:"quantities"`
		} `json:"items"`
	}
	require.NoError(t, json.Unmarshal(r.body, &a))
	checked := false
	for _, x := range a.Assumptions {
		if x.Pointer != "/stage/high_side/gate_switch_charge_c" {
			continue
		}
		checked = true
		require.Equal(t, "loss_total_w", x.Effect.Quantity)
		// recompute: post the high value and look at the same quantity
		body := swapped(t, `{"on_resistance_ohm": 9e-3}`, `{"on_resistance_ohm": 9e-3, "gate_switch_charge_c": `+number(*x.High)+`}`)
		again := send(t, "POST", server(t)+"/v1/losses", body).tree(t).(map[string]any)
		loss := again["items"].([]any)[0].(map[string]any)["quantities"].(map[string]any)["loss_total_w"].(float64)
		require.Equal(t, loss, *x.Effect.AtHigh)
		require.InDelta(t, loss-a.Items[0].Quantities["loss_total_w"].(float64), x.Effect.Change, 1e-12)
	}
	require.True(t, checked)
}

func number(v float64) string {
	b, err := json.Marshal(v)
	if err != nil {
		return err.Error()
	}
	return string(b)
}

func TestAbsurdScaleIsPointedAt(t *testing.T) {
	body := strings.NewReplacer(`"on_resistance_ohm": 9e-3`, `"on_resistance_ohm": 5`, `"current_a": 6`, `"current_a": 2`, `"regulate_to_v": 5`, `"duty_ratio": 0.5`).Replace(minimal)
	r := send(t, "POST", server(t)+"/v1/losses", []byte(body))
	require.Equal(t, 200, r.status, "%s", r.body)
	require.Contains(t, string(r.body), `"code":"implausible-scale","pointer":"/stage/high_side/on_resistance_ohm"`)
}

func TestStatusesAreAnswers(t *testing.T) {
	at := server(t) + "/v1/losses"
	first := func(body []byte) map[string]any {
		r := send(t, "POST", at, body)
		require.Equal(t, 200, r.status, "%s", r.body)
		declared(t, "losses", r)
		return r.tree(t).(map[string]any)["items"].([]any)[0].(map[string]any)
	}
	drop := first(swapped(t, `"input_v": 24`, `"input_v": 5.05`))
	require.Equal(t, "drop-out", drop["status"])
	near := drop["nearest_operable"].(map[string]any)
	require.Greater(t, near["input_v"], 5.05)
	works := first(swapped(t, `"input_v": 24`, `"input_v": `+number(near["input_v"].(float64))))
	require.NotEqual(t, "drop-out", works["status"])
	require.NotEmpty(t, drop["detail"])
	hot := first(swapped(t, `{"on_resistance_ohm": 9e-3}`, `{"on_resistance_ohm": 9e-3, "rating": {"junction_degc": 50}, "gate_switch_charge_c": 1e-8}`))
	require.Equal(t, "over-temperature", hot["status"])
	wild := first(swapped(t, `{"on_resistance_ohm": 9e-3}`, `{"on_resistance_ohm": 0.3, "on_resistance_temp": [{"junction_degc": 25, "multiplier_ratio": 1}, {"junction_degc": 125, "multiplier_ratio": 3}], "thermal": {"junction_to_ambient_k_per_w": 200}}`))
	require.Equal(t, "runaway", wild["status"])
	require.Equal(t, "high_side", wild["runaway"].(map[string]any)["part"])
}

func TestGridIsColumnarAndTheSameAsPoints(t *testing.T) {
	at := server(t) + "/v1/losses"
	grid := swapped(t, `"point": {"input_v": 24, "load": {"current_a": 6}, "ambient_degc": 45, "control": {"regulate_to_v": 5}}`,
		`"quantities": ["efficiency_ratio", "output_capacitor_rms_a", "diode_junction_degc"], "grid": {"input_v": [5.01, 24, 32], "load_current_a": [0, 6], "ambient_degc": [25, 60], "control": {"regulate_to_v": 5}}`)
	r := send(t, "POST", at, grid)
	require.Equal(t, 200, r.status, "%s", r.body)
	declared(t, "losses", r)
	g := r.tree(t).(map[string]any)["grid"].(map[string]any)
	rows := g["rows"].(map[string]any)
	cells := rows["cell"].([]any)
	require.Len(t, cells, 12-len(g["failures"].([]any)))
	columns := rows["quantities"].(map[string]any)
	require.NotContains(t, columns, "diode_junction_degc", "a synchronous stage has none")
	require.Len(t, columns["output_capacitor_rms_a"].([]any)[0], len(cells))
	for i, cell := range cells {
		if cell.(float64) != 7 { // input 24, load 6, ambient 60
			continue
		}
		point := send(t, "POST", at, swapped(t, `"ambient_degc": 45`, `"ambient_degc": 60`)).tree(t).(map[string]any)
		q := point["items"].([]any)[0].(map[string]any)["quantities"].(map[string]any)
		require.Equal(t, q["efficiency_ratio"], columns["efficiency_ratio"].([]any)[i])
	}

	table := send(t, "POST", at, grid, "Accept", "text/csv")
	require.Equal(t, 200, table.status)
	require.Contains(t, table.header.Get("Content-Type"), "text/csv")
	lines, err := csv.NewReader(bytes.NewReader(table.body)).ReadAll()
	require.NoError(t, err)
	require.Len(t, lines, 13)
	require.Contains(t, lines[0], "output_capacitor_rms_a/0 [A]")
}

func TestDictionariesAndDocuments(t *testing.T) {
	at := server(t)
	for path, operation := range map[string]string{"/v1/quantities": "listQuantities", "/v1/preferred-values": "listPreferredValues", "/healthz": "getHealth", "/readyz": "getReadiness"} {
		r := send(t, "GET", at+path, nil)
		require.Equal(t, 200, r.status, path)
		declared(t, operation, r)
	}
	for _, path := range []string{"/openapi.json", "/openapi.yaml", "/docs", "/docs/requests", "/v1/quantities", "/examples/buoy-5v0/losses.json"} {
		r := send(t, "GET", at+path, nil)
		require.Equal(t, 200, r.status, path)
		tag := r.header.Get("ETag")
		require.NotEmpty(t, tag, path)
		again := send(t, "GET", at+path, nil, "If-None-Match", `"other", `+tag)
		require.Equal(t, 304, again.status, path)
		require.Empty(t, again.body)
		head := send(t, "HEAD", at+path, nil)
		require.Equal(t, 200, head.status)
		require.Empty(t, head.body)
	}
	require.Equal(t, string(openapi.YAML()), string(send(t, "GET", at+"/openapi.yaml", nil).body))
	require.Equal(t, 404, send(t, "GET", at+"/docs/none", nil).status)
	require.Equal(t, 404, send(t, "GET", at+"/examples/buoy-5v0/none.json", nil).status)
}

func TestCallersIdentifierIsKeptIfHarmless(t *testing.T) {
	at := server(t)
	require.Equal(t, "night-7.a_b", send(t, "GET", at+"/healthz", nil, "X-Request-Id", "night-7.a_b").header.Get("X-Request-Id"))
	require.NotEqual(t, "a b", send(t, "GET", at+"/healthz", nil, "X-Request-Id", "a b").header.Get("X-Request-Id"))
	first := send(t, "POST", at+"/v1/losses", []byte(minimal), "X-Request-Id", "one")
	second := send(t, "POST", at+"/v1/losses", []byte(minimal), "X-Request-Id", "two")
	require.Equal(t, string(first.body), string(second.body), "the identifier is no part of the answer")
	require.Regexp(t, "compute;dur=", send(t, "POST", at+"/v1/losses?timings=true", []byte(minimal)).header.Get("Server-Timing"))
}

func TestExplanationsOnRequest(t *testing.T) {
	at := server(t)
	for path, example := range map[string]string{"/v1/losses": "buoy-5v0/losses.json", "/v1/sizing": "buoy-5v0/sizing.json"} {
		body := exampleRequest(t, example)
		plain := send(t, "POST", at+path, body)
		require.NotContains(t, string(plain.body), `"explanation"`)
		r := send(t, "POST", at+path+"?explain=true", body)
		require.Equal(t, 200, r.status, "%s", r.body)
		op, _ := operationOf(path + ".json")
		declared(t, op.ID, r)
		var a struct {
			Explanation []struct {
				Quantity string  `json:"quantity"`
				Inserted string  `json:"inserted"`
				Value    float64 `json:"value"`
			} `json:"explanation"`
		}
		require.NoError(t, json.Unmarshal(r.body, &a))
		require.Greater(t, len(a.Explanation), 10, path)
		for _, e := range a.Explanation {
			require.NotEmpty(t, e.Inserted, e.Quantity)
		}
		require.Equal(t, string(plain.body), string(send(t, "POST", at+path, body).body), "an explanation is not kept")
	}
}
