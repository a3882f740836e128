package losses

// LeakageLoss returns the loss [W] of a diode's reverse current while it blocks.
//
//	P = D Vin Ir(Tj)
//
// Leakage grows exponentially with temperature and can run away. In discontinuous
// conduction the rest phase blocks the output voltage only; it is left out.
//
// Derived; checked by integration of v i over the period in
// TestLeakageByIntegration.
func LeakageLoss(duty, vin, current float64) float64 { return duty * vin * current }
