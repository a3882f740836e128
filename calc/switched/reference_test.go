package switched

import (
	"math"
	"testing"

	"railproof/calc/internal/calctest"
)

type publishedCase struct {
	ID      string `json:"id"`
	Circuit struct {
		Vin  float64   `json:"vin"`
		Rect string    `json:"rect"`
		RHS  float64   `json:"r_hs"`
		RLS  float64   `json:"r_ls"`
		Vf   float64   `json:"vf"`
		Rd   float64   `json:"rd"`
		L    float64   `json:"l"`
		DCR  float64   `json:"dcr"`
		C    []float64 `json:"c"`
		ESR  []float64 `json:"esr"`
		F    float64   `json:"f"`
		G    float64   `json:"g"`
		I0   float64   `json:"i0"`
		Duty *float64  `json:"duty"`
		Vout *float64  `json:"vout_target"`
	} `json:"circuit"`
	Expected struct {
		VoutMean   float64            `json:"vout_mean_v"`
		VoutPP     float64            `json:"vout_pp_v"`
		ILMean     float64            `json:"il_mean_a"`
		ILPP       float64            `json:"il_pp_a"`
		ILPeak     float64            `json:"il_peak_a"`
		ILValley   float64            `json:"il_valley_a"`
		ILRMS      float64            `json:"il_rms_a"`
		HSRMS      float64            `json:"hs_rms_a"`
		HSMean     float64            `json:"hs_mean_a"`
		RectRMS    float64            `json:"rect_rms_a"`
		RectMean   float64            `json:"rect_mean_a"`
		CapRMS     []float64          `json:"cap_rms_a"`
		CinRMS     float64            `json:"cin_rms_a"`
		Pin        float64            `json:"pin_w"`
		Pout       float64            `json:"pout_w"`
		Losses     map[string]float64 `json:"losses"`
		Mode       string             `json:"mode"`
		Duty       float64            `json:"duty"`
		IntervalsS []float64          `json:"intervals_s"`
	} `json:"expected"`
}

func (p *publishedCase) circuit() *Circuit {
	k := &p.Circuit
	c := &Circuit{Vin: k.Vin, Period: 1 / k.F, Phases: 1, Banks: len(k.C), Conductance: k.G, Current: k.I0}
	c.Leg = Leg{L: k.L, Winding: k.DCR, HighSide: k.RHS}
	if k.Rect == "diode" {
		c.Leg.Rectifier = Rectifier{Threshold: k.Vf, Slope: k.Rd, Blocks: true}
	} else {
		c.Leg.Rectifier = Rectifier{Slope: k.RLS}
	}
	for i := range k.C {
		c.Bank[i] = Bank{C: k.C[i], ESR: k.ESR[i]}
	}
	return c
}

func published(t testing.TB) []publishedCase {
	var file struct {
		Cases []publishedCase `json:"cases"`
	}
	calctest.Load(t, "steady-state.json", &file)
	if len(file.Cases) < 24 {
		t.Fatalf("only %d cases", len(file.Cases))
	}
	return file.Cases
}

// Two independent numerical solutions agreed on every figure of the file;
// tolerances are those of the definitions: 1e-6, for ripple 1e-4, currents below
// a thousandth of the peak relative to that.
func TestPublishedSteadyStates(t *testing.T) {
	for _, pc := range published(t) {
		t.Run(pc.ID, func(t *testing.T) {
			c, e := pc.circuit(), &pc.Expected
			var s Solver
			var sol Solution
			calctest.Poison(&sol)
			if pc.Circuit.Duty != nil {
				s.FixedDuty(c, *pc.Circuit.Duty, &sol)
			} else {
				s.Regulated(c, *pc.Circuit.Vout, 0, 1, &sol)
				calctest.Close(t, "regulated output", sol.OutputMean, *pc.Circuit.Vout, 1e-12)
			}
			if sol.Status != Solved {
				t.Fatalf("status %d", sol.Status)
			}
			if want := map[string]Mode{"ccm": Continuous, "dcm": Discontinuous}[e.Mode]; sol.Leg.Mode != want {
				t.Errorf("mode %d, want %d", sol.Leg.Mode, want)
			}
			current := func(what string, got, want float64) {
				t.Helper()
				calctest.Within(t, what, got, want, 1e-6*math.Max(math.Abs(want), 1e-3*e.ILPeak))
			}
			calctest.Close(t, "duty", sol.Duty, e.Duty, 1e-6)
			calctest.Close(t, "output mean", sol.OutputMean, e.VoutMean, 1e-6)
			calctest.Close(t, "output ripple", sol.OutputMax-sol.OutputMin, e.VoutPP, 1e-4)
			calctest.Close(t, "inductor ripple", sol.Leg.Peak-sol.Leg.Valley, e.ILPP, 1e-4)
			current("inductor mean", sol.Leg.Inductor.Mean, e.ILMean)
			current("inductor rms", sol.Leg.Inductor.RMS, e.ILRMS)
			current("peak", sol.Leg.Peak, e.ILPeak)
			current("valley", sol.Leg.Valley, e.ILValley)
			current("high side mean", sol.Leg.HighSide.Mean, e.HSMean)
			current("high side rms", sol.Leg.HighSide.RMS, e.HSRMS)
			current("rectifier mean", sol.Leg.Rectifier.Mean, e.RectMean)
			current("rectifier rms", sol.Leg.Rectifier.RMS, e.RectRMS)
			for k, want := range e.CapRMS {
				current("bank rms", sol.BankRMS[k], want)
			}
			current("input capacitor rms", math.Sqrt(sol.InputRMS*sol.InputRMS-sol.InputMean*sol.InputMean), e.CinRMS)
			calctest.Close(t, "input power", sol.InputPower, e.Pin, 1e-6)
			calctest.Close(t, "output power", sol.OutputPower, e.Pout, 1e-6)
			calctest.Within(t, "energy balance", sol.EnergyBalance, 0, 1e-12)
			calctest.Close(t, "conduction time", sol.Leg.Conduct*c.Period, e.IntervalsS[1], 1e-6)
			t.Logf("balance %.2g closure %.2g rounds %d", sol.EnergyBalance, sol.Residual, sol.Iterations)
		})
	}
}
