package render

import (
	"strconv"

	"railproof/api/wire"
)

// TransientsCSV writes a line per instant of the waveforms; only a header where
// there are none.
func TransientsCSV(a *wire.TransientsAnswer) []byte {
	header := []string{headed("time_s"), headed("output_v"), headed("load_a"), headed("input_v"), "duty_ratio", headed("control_v"), headed("reference_v")}
	w := a.Waveforms
	if w == nil {
		return newSheet(header...).bytes()
	}
	for i := range w.Inductor {
		header = append(header, withUnit("inductor_a/"+strconv.Itoa(i), "A"))
	}
	s := newSheet(header...)
	for k := range w.Time {
		row := []string{number(w.Time[k]), number(w.Output[k]), number(w.Load[k]), number(w.Input[k]), number(w.Duty[k]), number(w.Control[k]), number(w.Reference[k])}
		for i := range w.Inductor {
			row = append(row, number(w.Inductor[i][k]))
		}
		s.row(row...)
	}
	return s.bytes()
}
