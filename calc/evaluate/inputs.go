package evaluate

import "math"

// shareStart splits the input banks' current of the closed form by capacitance,
// where the iteration begins.
func (e *Evaluator) shareStart() {
	banks := len(e.stage.InputCapacitors)
	sol, sum := &e.solution, 0.0
	for k := range banks {
		sum += e.aged.input[k]
	}
	rms := math.Sqrt(max(0, sol.InputRMS*sol.InputRMS-sol.InputMean*sol.InputMean))
	for k := range banks {
		e.operation.InputBank[k] = rms * e.aged.input[k] / sum
	}
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
