// Package sizing turns a requirement into windows of values for the parts of a
// stage, the ratings that every part must carry, and a draft stage.
//
// Three layers, from the bottom: closed forms of the step-down stage, each with
// its source (duty.go, waveform.go, ripple.go, loadstep.go); windows and ratings,
// which put the worst corner and the worse end of every tolerance into them
// (window*.go, rating.go); and the draft, whose placeholder parts are functions of
// the requirement (draft*.go) and which the exact engine then evaluates.
//
// Symbols follow the usual texts: Vin, Vo input and output voltage, Io load
// current, I the mean inductor current of one phase, dI its peak-to-peak ripple,
// D the duty ratio, N the number of phases, fs the switching frequency.
package sizing
