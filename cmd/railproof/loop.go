package main

var loopCommand = computation("loop", "loopGain", "loop-gain.json",
	"loop gain, margins and compensator",
	"Analyses the control loop at one or several points with the exact sampled-data model and the averaged\none, or designs a compensator for a crossover and a phase margin: margins, output impedance, source or\ninput filter, and what to look at where the loop is not good.")
