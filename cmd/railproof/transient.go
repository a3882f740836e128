package main

var transientCommand = computation("transient", "transients", "transients.json",
	"load step, input step, reference step or start, cycle by cycle",
	"Follows the closed loop through an event on the exact switched circuit: deviation, recovery, peak\ninductor current and whether it passes saturation, the state it settles to, and waveforms with their\nexact extremes.")
