package caution

import (
	"encoding/json"
	"math"
	"os"
	"testing"
)

type figure struct {
	Value  json.RawMessage `json:"value"`
	TolAbs float64         `json:"tol_abs"`
	TolRel float64         `json:"tol_rel"`
}

func (f figure) number(t *testing.T) float64 { return f.list(t)[0] }

// list returns the figure's values, a single one as a list of one.
func (f figure) list(t *testing.T) []float64 {
	t.Helper()
	var many []float64
	if json.Unmarshal(f.Value, &many) == nil {
		return many
	}
	var one float64
	if err := json.Unmarshal(f.Value, &one); err != nil {
		t.Fatalf("not a number: %s", f.Value)
	}
	return []float64{one}
}

type referenceCase struct {
	ID       string            `json:"id"`
	Inputs   map[string]figure `json:"inputs"`
	Expected map[string]figure `json:"expected"`
}

func referenceCases(t *testing.T) map[string]referenceCase {
	t.Helper()
	raw, err := os.ReadFile("../../tests/reference/loop-corners-rules.json")
	if err != nil {
		t.Fatal(err)
	}
	var doc struct {
		Cases []referenceCase `json:"cases"`
	}
	if err := json.Unmarshal(raw, &doc); err != nil {
		t.Fatal(err)
	}
	byID := map[string]referenceCase{}
	for _, c := range doc.Cases {
		byID[c.ID] = c
	}
	return byID
}

func closeTo(t *testing.T, name string, got, want float64, f figure) {
	t.Helper()
	if tol := f.TolAbs + f.TolRel*math.Abs(want); !(math.Abs(got-want) <= tol) {
		t.Errorf("%s: got %.9g, want %.9g, tolerance %g", name, got, want, tol)
	}
}

func TestReference(t *testing.T) {
	cases := referenceCases(t)
	t.Run("safe-01", func(t *testing.T) {
		c := cases["safe-01"]
		for i, uac := range c.Inputs["U_ac_peak"].list(t) {
			got := ES1Ratio(c.Inputs["U_dc"].number(t), uac, c.Inputs["f"].list(t)[i])
			closeTo(t, "ratio", got, c.Expected["ratio"].list(t)[i], c.Expected["ratio"])
		}
		closeTo(t, "Udc_ES1", es1DC, c.Expected["Udc_ES1"].number(t), c.Expected["Udc_ES1"])
		closeTo(t, "Udc_ES2", es2DC, c.Expected["Udc_ES2"].number(t), c.Expected["Udc_ES2"])
	})
	t.Run("safe-02", func(t *testing.T) {
		c := cases["safe-02"]
		for i, cap := range c.Inputs["C"].list(t) {
			closeTo(t, "U_ES1", ES1ChargedCapacitor(cap), c.Expected["U_ES1"].list(t)[i], c.Expected["U_ES1"])
		}
		closeTo(t, "below the table", ES1ChargedCapacitor(1e-12), 500, figure{})
	})
	t.Run("safe-03", func(t *testing.T) {
		c := cases["safe-03"]
		cap, v0, v1, r := c.Inputs["C"].number(t), c.Inputs["V0"].number(t), c.Inputs["V1"].number(t), c.Inputs["R_bleed"].number(t)
		closeTo(t, "E", Energy(cap, v0), c.Expected["E"].number(t), c.Expected["E"])
		closeTo(t, "t_nominal", BleedTime(r, cap, v0, v1), c.Expected["t_nominal"].number(t), c.Expected["t_nominal"])
		worst := cap * (1 + c.Inputs["C_tolerance"].number(t))
		closeTo(t, "t_worst", BleedTime(r, worst, v0, v1), c.Expected["t_worst"].number(t), c.Expected["t_worst"])
		if BleedTime(r, cap, v1, v1) != 0 {
			t.Error("no time is needed at the threshold")
		}
	})
}
