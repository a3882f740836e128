// Package transient follows a stage in closed loop cycle by cycle: load, input and
// reference steps and start-up, on the exact solution of the switched circuit with
// its compensator.
//
// Between two edges everything is linear, so states move by matrix exponentials;
// comparators, current limit, current zeros and amplifier limits are solved on
// that solution. Elements keep the values of the operating point at which the run
// was set up: an inductor does not saturate and a capacitor does not lose
// capacitance along the way.
package transient
