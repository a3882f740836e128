// Package loop analyses and designs the control loop of a step-down stage.
//
// Two models of the same plant stand side by side. The averaged model is the
// usual small-signal circuit of one period's mean values, in continuous and in
// discontinuous conduction, for voltage mode and for peak current mode. The
// sampled-data model is the exact linearisation of the switched circuit about its
// periodic solution, comparator instants, zero crossings, compensator ripple and
// delays included; whether the loop is stable is decided by its eigenvalues and
// never by a margin.
//
// Signs: the loop gain is positive for negative feedback, so the closed loop has
// 1 + T; the load current is counted out of the output node.
package loop
