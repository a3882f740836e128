package service

import (
	"railproof/calc/evaluate"
	"railproof/calc/spread"
	"railproof/calc/stage"
)

// Design is a stage as a request gave it: typical values, and what stands beside
// them.
type Design struct {
	At        string // pointer of the stage in the request: "/stage"
	Stage     *stage.Stage
	Variables []spread.Variable
	Assumed   []stage.Assumed
	Unused    []string // pointers of numbers that the topology does not use
}

// Place is an operating point and where the request gave it.
type Place struct {
	At    string // "/point", "/points/3", "/grid"
	Point stage.Point
}

// Outcome is what the stage does at one point.
type Outcome struct {
	evaluate.Result
	Nearest *Nearest // where it would work; nil where it does, or nothing was found
	Onset   *Onset   // where runaway begins; nil without one
	Detail  string   // in words, where the status is not OK
}

// severity orders statuses from works to unknown, so that an answer to many
// points can name its worst.
func severity(s evaluate.Status) int {
	switch s {
	case evaluate.OK:
		return 0
	case evaluate.OverTemperature:
		return 1
	case evaluate.TooShortOnTime:
		return 2
	case evaluate.DropOut:
		return 3
	case evaluate.NoOperatingPoint:
		return 4
	case evaluate.Runaway:
		return 5
	case evaluate.NotConverged:
		return 6
	}
	return 7
}

func worse(a, b evaluate.Status) evaluate.Status {
	if severity(b) > severity(a) {
		return b
	}
	return a
}
