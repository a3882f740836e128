package losses

// QuiescentLoss returns the loss [W] of the controller's own supply current:
// P = Vin Iq. Checked by power-stage cases ps-lo-02, 03, 05, 07, 09.
func QuiescentLoss(vin, current float64) float64 { return vin * current }
