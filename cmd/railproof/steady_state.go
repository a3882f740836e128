package main

var steadyStateCommand = computation("steady-state", "steadyState", "steady-state.json",
	"exact periodic steady state at one point",
	"Solves the periodic steady state of the stage exactly: means, ripple, RMS and peaks of every branch,\nconduction mode, duty ratio.")
