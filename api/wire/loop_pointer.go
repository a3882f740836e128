package wire

import "strings"

// loopPlaces says where the request has what the analysis names otherwise; the
// first prefix that fits counts.
var loopPlaces = []struct{ prefix, place string }{
	{"/target/", "/synthesis/"},
	{"/source/capacitors", "/stage/input_capacitors"},
	{"/source/damping_h", "/input_filter/damping_inductance_h"},
	{"/source/", "/input_filter/"},
	{"/duration_s", "/duration_s"},
	{"/band_v", "/band_ratio"},
	{"/record/points", "/waveform_points"},
	{"/record/", "/lead_s"},
	{"/start/precharge_v", "/event/start_up/pre_bias_v"},
	{"/start/load_from_v", "/event/start_up/load_from_v"},
	{"/start/soft_start_s", "/event/start_up/soft_start_s"},
	{"/events/load_step/", "/event/load_step/"},
	{"/events", "/event"},
	{"/control_high_v", "/stage/modulator"},
}

// loopPointer turns a place as the analysis names it into a pointer of the request.
func loopPointer(at string) string {
	for _, p := range loopPlaces {
		if rest, found := strings.CutPrefix(at, p.prefix); found {
			if strings.HasSuffix(p.prefix, "/") && strings.HasSuffix(p.place, "/") {
				return p.place + rest
			}
			return p.place
		}
	}
	return "/stage" + at
}
