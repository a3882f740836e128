// Package caution tells what in a design can hurt someone or something, as far
// as it follows from numbers: voltage, stored energy, fault current, heat, parts
// at or beyond their ratings, runaway. A caution does not depend on what was
// asked for, and an absent one is no statement of safety.
package caution

import (
	"railproof/calc/spread"
	"railproof/calc/stage"
)

// Code names a kind of caution; it stands on the wire as it is.
type Code string

const (
	EstimatesOnly         Code = "estimates-only"              // results are estimates for engineering judgement
	InputReachesLoad      Code = "input-reaches-load-on-fault" // a shorted high-side switch puts the input voltage on the load
	NotAnalysed           Code = "faults-not-analysed"         // fault cases that no computation here covers
	AboveES1Voltage       Code = "above-es1-voltage"           // a node exceeds 60 V DC, the limit of electrical energy class ES1 (IEC 62368-1)
	AboveES2Voltage       Code = "above-es2-voltage"           // a node exceeds 120 V DC, the limit of electrical energy class ES2 (IEC 62368-1)
	ChargedCapacitor      Code = "charged-capacitor"           // a capacitor stays charged above the ES1 limit after switch-off
	StoredEnergy          Code = "stored-energy"               // capacitors store 20 J or more, enough to burn through rings and tools
	HotPlugOvershoot      Code = "hot-plug-overshoot"          // hot plugging into low-loss ceramic capacitors can reach twice the input voltage
	FaultCurrent          Code = "fault-current"               // the source can drive a fault with more than 15 W: fuse or limit it
	PowerSourcePS2        Code = "power-source-ps2"            // power above 15 W: power source class PS2 (IEC 62368-1)
	PowerSourcePS3        Code = "power-source-ps3"            // power above 100 W: power source class PS3 (IEC 62368-1)
	HotSurface            Code = "hot-surface"                 // a part may burn whoever touches it
	BeyondAbsoluteMaximum Code = "beyond-absolute-maximum"     // a part is used beyond an absolute maximum rating
	CapacitorNearLimit    Code = "capacitor-near-limit"        // an electrolytic or tantalum capacitor is near a limit at which it can vent or ignite
	CapacitorLimitUnknown Code = "capacitor-limit-unknown"     // an electrolytic or tantalum capacitor has no voltage rating to check
	ThermalRunaway        Code = "thermal-runaway"             // no stable thermal equilibrium
)

// Caution is one thing to be careful about.
type Caution struct {
	Code    Code
	Detail  string
	Pointer string  // RFC 6901 pointer from the request's root; "" for the whole
	Value   float64 // [any] in Unit; NaN: no figure
	Limit   float64 // [any] in Unit; NaN: no figure
	Unit    string  // UCUM code; "" without figures
}

// Of returns the cautions that follow from a stage and the points it was seen
// at. stageAt is the pointer of the stage in the request ("/stage"); spreads,
// which may be empty, widen the capacitances to their upper ends.
func Of(s *stage.Stage, stageAt string, spreads []spread.Variable, seen *Seen) []Caution {
	c := collector{stage: s, at: stageAt, spreads: spreads, seen: seen}
	c.notices()
	c.voltages()
	c.charges()
	c.source()
	c.heat()
	c.ratings()
	c.electrolytics()
	c.runaway()
	return c.list
}

type collector struct {
	stage   *stage.Stage
	at      string
	spreads []spread.Variable
	seen    *Seen
	list    []Caution
}

func (c *collector) add(code Code, pointer string, value, limit float64, unit, detail string) {
	c.list = append(c.list, Caution{Code: code, Detail: detail, Pointer: pointer, Value: value, Limit: limit, Unit: unit})
}

// upper returns the greatest value of a stage field: its spread's, or the given
// typical one.
func (c *collector) upper(field string, typical float64) float64 {
	for i := range c.spreads {
		if c.spreads[i].Field == field {
			return c.spreads[i].Max
		}
	}
	return typical
}
