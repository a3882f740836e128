package evaluate

import "math"

// input is what flows in the input capacitors.
type input struct {
	RipplePP float64
	BankRMS  [6]float64
}

func (e *Evaluator) inputBanks() {
	e.input.RipplePP = math.NaN()
	sol := &e.solution
	e.input.BankRMS[0] = math.Sqrt(math.Max(0, sol.InputRMS*sol.InputRMS-sol.InputMean*sol.InputMean))
	e.operation.InputBank = e.input.BankRMS
}
