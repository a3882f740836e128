package contract

import (
	"testing"

	"github.com/stretchr/testify/require"
)

// Margins can be limited over the corners like any other quantity, and the worst
// point, posted on, has the very margin that was told.
func TestMarginsOverTheCorners(t *testing.T) {
	at := server(t)
	a := proved(t, at, cornersOf(t, "buoy-5v0", object{
		"limits":  []object{{"quantity": "phase_margin_deg", "min": 38}, {"quantity": "gain_margin_db", "min": 6}, {"quantity": "modulus_margin_ratio", "min": 0.5}, {"quantity": "crossover_hz", "max": 1e5}},
		"methods": []string{"extreme-value"}, "stages": true,
	}))
	require.Equal(t, "pass", a["verdict"])
	line := lineOf(t, a, "phase_margin_deg")
	worst := within(line, "least")
	require.Less(t, within(worst, "value"), line["nominal"])
	posted := asked(t, at, "loopGain", object{"stage": within(worst, "stage"), "point": within(worst, "point"), "curves": false})
	require.Equal(t, within(worst, "value"), within(posted, "items", 0, "phase_margin_deg"))
}

// An output capacitor with a tenth of the capacitance moves the crossover to where no
// phase is left; the substitution is rejected for its margin.
func TestASubstitutionThatKillsThePhaseMarginIsCaught(t *testing.T) {
	at := server(t)
	request := exampleWith(t, "buoy-5v0/substitutions.json", object{"limits": []object{{"quantity": "phase_margin_deg", "min": 40}}})
	present := within(request, "stage", "output_capacitors", 0).(object)
	with := func(id string, changes object) object {
		part := object{}
		for name, v := range present {
			part[name] = v
		}
		for name, v := range changes {
			part[name] = v
		}
		delete(part, "part_number")
		return object{"id": id, "role": "output_capacitors/0", "capacitor": part}
	}
	request["replacements"] = []object{
		with("as-good", object{"capacitance_f": object{"typ": 2.2e-5, "tol": 0.1}}),
		with("a-tenth", object{"capacitance_f": object{"typ": 2.2e-6, "tol": 0.2}}),
	}
	r := send(t, "POST", at+"/v1/substitutions", encode(t, request))
	require.Equal(t, 200, r.status, "%s", r.body)
	declared(t, "substitutions", r)
	verdicts := map[any]object{}
	for _, item := range within(r.tree(t), "items").([]any) {
		verdicts[within(item, "id")] = item.(object)
	}
	require.NotEqual(t, "rejected", within(verdicts["as-good"], "verdict"), "%v", within(verdicts["as-good"], "reasons"))
	require.Equal(t, "rejected", within(verdicts["a-tenth"], "verdict"))
	require.Contains(t, string(encode(t, within(verdicts["a-tenth"], "reasons"))), "phase_margin_deg")
}
