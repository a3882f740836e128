package stage_test

import (
	"errors"
	"testing"

	"github.com/stretchr/testify/assert"
	"github.com/stretchr/testify/require"

	"railproof/calc/parts"
	"railproof/calc/stage"
)

func TestThermalCouplings(t *testing.T) {
	for name, c := range map[string]struct {
		couplings []stage.ThermalCoupling
		field     string // "" for a stage that passes
	}{
		"two switches":        {[]stage.ThermalCoupling{{A: "high_side", B: "low_side", Resistance: 6}}, ""},
		"a bank of pieces":    {[]stage.ThermalCoupling{{A: "output_capacitors/1", B: "inductor", Resistance: 10}}, ""},
		"as large as allowed": {[]stage.ThermalCoupling{{A: "high_side", B: "low_side", Resistance: 30}}, ""},
		"no such bank":        {[]stage.ThermalCoupling{{A: "output_capacitors/2", B: "inductor", Resistance: 1}}, "thermal_couplings/0/a"},
		"no diode here":       {[]stage.ThermalCoupling{{A: "inductor", B: "diode", Resistance: 1}}, "thermal_couplings/0/b"},
		"the board":           {[]stage.ThermalCoupling{{A: "inductor", B: "board", Resistance: 1}}, "thermal_couplings/0/b"},
		"a misspelt bank":     {[]stage.ThermalCoupling{{A: "inductor", B: "input_capacitors/x", Resistance: 1}}, "thermal_couplings/0/b"},
		"with itself":         {[]stage.ThermalCoupling{{A: "inductor", B: "inductor", Resistance: 1}}, "thermal_couplings/0/b"},
		"a pair twice": {[]stage.ThermalCoupling{
			{A: "high_side", B: "low_side", Resistance: 6}, {A: "low_side", B: "high_side", Resistance: 6},
		}, "thermal_couplings/1"},
		"hotter than the source":   {[]stage.ThermalCoupling{{A: "high_side", B: "low_side", Resistance: 31}}, "thermal_couplings/0/coupling_k_per_w"},
		"hotter than a whole bank": {[]stage.ThermalCoupling{{A: "output_capacitors/1", B: "inductor", Resistance: 11}}, "thermal_couplings/0/coupling_k_per_w"},
		"not a number":             {[]stage.ThermalCoupling{{A: "high_side", B: "low_side", Resistance: parts.Unknown}}, "thermal_couplings/0/coupling_k_per_w"},
	} {
		t.Run(name, func(t *testing.T) {
			s := complete(stage.Synchronous)
			s.HighSide.Thermal.JunctionToAmbient, s.LowSide.Thermal.JunctionToAmbient = 30, 40
			s.OutputCapacitors[1].Thermal.JunctionToAmbient, s.OutputCapacitors[1].Count = 40, 4
			s.ThermalCouplings = c.couplings
			err := s.Check()
			if c.field == "" {
				require.NoError(t, err)
				return
			}
			var invalid *stage.InvalidError
			require.True(t, errors.As(err, &invalid), "%v", err)
			require.Len(t, invalid.Faults, 1)
			assert.Equal(t, c.field, invalid.Faults[0].Field)
		})
	}
}
