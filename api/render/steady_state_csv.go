package render

import (
	"strconv"

	"railproof/api/wire"
)

// SteadyStateCSV writes a line per instant of the waveforms; only a header where none
// were asked for or the stage has none.
func SteadyStateCSV(a *wire.SteadyStateAnswer) []byte {
	w := a.Waveforms
	if w == nil {
		return newSheet(headed("time_s"), headed("output_v"), headed("input_a")).bytes()
	}
	header := []string{headed("time_s"), headed("output_v"), headed("input_a")}
	columns := [][]float64{w.Time, w.Output, w.Input}
	if w.InputVoltage != nil {
		header, columns = append(header, headed("input_v")), append(columns, w.InputVoltage)
	}
	for _, family := range []struct {
		name, unit string
		waves      [][]float64
	}{
		{"inductor_a", "A", w.Inductor},
		{"switch_node_v", "V", w.SwitchNode},
		{"output_capacitor_a", "A", w.OutputCapacitor},
		{"input_capacitor_a", "A", w.InputCapacitor},
	} {
		for i, wave := range family.waves {
			header, columns = append(header, withUnit(family.name+"/"+strconv.Itoa(i), family.unit)), append(columns, wave)
		}
	}
	s := newSheet(header...)
	row := make([]string, len(columns))
	for k := range w.Time {
		for i, c := range columns {
			row[i] = number(c[k])
		}
		s.row(row...)
	}
	return s.bytes()
}
