package losses

import "math"

// DeadTimeLoss returns the loss [W] of a body diode that carries the inductor
// current during one dead time.
//
//	P = f td Vsd |i|
//
// i is the current at that edge: the valley before the high side turns on, the
// peak after it turns off. The low side's diode carries a positive current, the
// high side's a reversed one.
//
// Source: Texas Instruments, TPS40140 data sheet SLUS660H, eq. 34 to 36, where
// both edges carry the load current (power-stage cases ps-lo-08, 11).
func DeadTimeLoss(f, td, vsd, i float64) float64 { return f * td * vsd * math.Abs(i) }
