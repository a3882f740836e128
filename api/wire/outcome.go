package wire

import (
	"railproof/calc/losses"
	"railproof/calc/parts"
	"railproof/calc/stage"
	"railproof/calc/switched"
	"railproof/service"
)

// PartTemperature is a part's temperature beside its rating, and the life that a
// capacitor has at it.
type PartTemperature struct {
	Part        string   `json:"part"`
	Temperature float64  `json:"temperature_degc"`
	Rating      *float64 `json:"rating_degc,omitzero"`
	Margin      *float64 `json:"margin_k,omitzero"`
	Life        *float64 `json:"life_s,omitzero"`
}

// NearestOperable is a condition under which the stage would work.
type NearestOperable struct {
	Input   *float64 `json:"input_v,omitzero"`
	Load    *float64 `json:"load_current_a,omitzero"`
	Ambient *float64 `json:"ambient_degc,omitzero"`
	Output  *float64 `json:"output_v,omitzero"`
	Duty    *float64 `json:"duty_ratio,omitzero"`
	Detail  string   `json:"detail"`
}

// Runaway is where thermal runaway begins.
type Runaway struct {
	Part     string   `json:"part"`
	Ambient  *float64 `json:"ambient_degc,omitzero"`
	Load     *float64 `json:"load_current_a,omitzero"`
	Input    *float64 `json:"input_v,omitzero"`
	Feedback *float64 `json:"thermal_feedback_ratio,omitzero"`
	Detail   string   `json:"detail"`
}

func encodeTemperatures(s *stage.Stage, o *service.Outcome) []PartTemperature {
	list := []PartTemperature{}
	for i := range o.PartDegC {
		if degC := o.PartDegC[i]; parts.Known(degC) {
			t := PartTemperature{Part: losses.Part(i).String(), Temperature: degC}
			if rated := service.RatedDegC(s, losses.Part(i)); parts.Known(rated) {
				margin := rated - degC
				t.Rating, t.Margin = &rated, &margin
			}
			if life := o.Life(losses.Part(i)); parts.Known(life) {
				t.Life = &life
			}
			list = append(list, t)
		}
	}
	return list
}

func encodeNearest(n *service.Nearest) *NearestOperable {
	if n == nil {
		return nil
	}
	return &NearestOperable{Input: given(&n.Input), Load: given(&n.LoadCurrent), Ambient: given(&n.AmbientDegC), Output: given(&n.Output), Duty: given(&n.Duty), Detail: n.Detail}
}

func encodeOnset(o *service.Onset) *Runaway {
	if o == nil {
		return nil
	}
	return &Runaway{Part: o.Part.String(), Ambient: given(&o.AmbientDegC), Load: given(&o.LoadCurrent), Input: given(&o.Input), Feedback: given(&o.Feedback), Detail: o.Detail}
}

// modeNames are the conduction modes; one that is not known has none.
var modeNames = map[switched.Mode]string{switched.Continuous: "continuous", switched.Discontinuous: "discontinuous", switched.Boundary: "boundary"}

func banksOf(s *stage.Stage) bankCount {
	return bankCount{output: len(s.OutputCapacitors), input: len(s.InputCapacitors)}
}
