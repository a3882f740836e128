package evaluate

import "math"

// shareStart divides the input banks' current of the closed form, where the iteration
// begins.
func (e *Evaluator) shareStart() {
	sol := &e.solution
	rms := math.Sqrt(max(0, sol.InputRMS*sol.InputRMS-sol.InputMean*sol.InputMean))
	divide(rectangle, sol.Duty, rms, e.circuit.Period, e.InputBanks(), &e.operation.InputBank)
}

// share solves the input banks on the circuit solution; without banks the source
// carries everything.
func (e *Evaluator) share() bool {
	banks := len(e.stage.InputCapacitors)
	if banks == 0 {
		return true
	}
	if !e.solver.InputBanks(&e.circuit, &e.solution, banks, &e.inputBank, &e.input) {
		return false
	}
	e.operation.InputBank = e.input.BankRMS
	return true
}
