package wire

import (
	"railproof/calc/caution"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/service"
)

// Engine names what computed an answer.
type Engine struct {
	Name            string `json:"name"`
	Version         string `json:"version"`
	ContractVersion string `json:"contract_version"`
	Platform        string `json:"platform"`
}

// EncodeEngine shows the engine.
func EncodeEngine(e service.Engine) Engine {
	return Engine{e.Name, e.Version, e.ContractVersion, e.Platform}
}

// Head stands at the start of every computed answer.
type Head struct {
	Engine   Engine `json:"engine"`
	ResultID string `json:"result_id"`
}

// Verdict is the status of the answer as a whole.
func (a *LossesAnswer) Verdict() string { return a.Status }

// Verdict is the status of the answer.
func (a *SteadyStateAnswer) Verdict() string { return a.Status }

// Basis stands at the end of every computed answer: what it rests on and what to
// mind about it.
type Basis struct {
	Assumptions []Assumption `json:"assumptions"`
	Cautions    []Caution    `json:"cautions"`
	Warnings    []Warning    `json:"warnings"`
	Notice      string       `json:"notice"`
}

// Assumption is a value that was not given and what stood in for it.
type Assumption struct {
	Pointer string   `json:"pointer"`
	Value   *float64 `json:"value,omitzero"`
	Unit    string   `json:"unit,omitzero"`
	Low     *float64 `json:"low,omitzero"`
	High    *float64 `json:"high,omitzero"`
	Why     string   `json:"why"`
	Effect  *Effect  `json:"effect,omitzero"`
}

// Effect is the computed change of a quantity over an assumption's range.
type Effect struct {
	Quantity string   `json:"quantity"`
	Unit     string   `json:"unit"`
	AtLow    *float64 `json:"at_low,omitzero"`
	AtHigh   *float64 `json:"at_high,omitzero"`
	Change   float64  `json:"change"`
}

// Caution is what in a design can hurt someone or something.
type Caution struct {
	Code    string   `json:"code"`
	Detail  string   `json:"detail"`
	Pointer string   `json:"pointer,omitzero"`
	Value   *float64 `json:"value,omitzero"`
	Limit   *float64 `json:"limit,omitzero"`
	Unit    string   `json:"unit,omitzero"`
}

// Warning is something about a request that its sender should look at.
type Warning struct {
	Code    string `json:"code"`
	Pointer string `json:"pointer"`
	Detail  string `json:"detail"`
}

// notice says once what every result is.
const notice = "Estimates for engineering judgement: they replace no bench measurement, no local code and no licensed practice."

func encodeBasis(b *service.Basis) Basis {
	w := Basis{Assumptions: make([]Assumption, len(b.Assumptions)), Cautions: make([]Caution, len(b.Cautions)), Warnings: make([]Warning, len(b.Warnings)), Notice: notice}
	for i := range b.Assumptions {
		w.Assumptions[i] = encodeAssumption(&b.Assumptions[i])
	}
	for i := range b.Cautions {
		w.Cautions[i] = encodeCaution(&b.Cautions[i])
	}
	for i, warning := range b.Warnings {
		w.Warnings[i] = Warning(warning)
	}
	return w
}

func encodeAssumption(a *service.Assumption) Assumption {
	w := Assumption{Pointer: a.Pointer, Value: given(&a.Value), Low: given(&a.Low), High: given(&a.High), Why: a.Why}
	if w.Value != nil || w.Low != nil || w.High != nil {
		w.Unit = UnitOf(a.Pointer)
	}
	if e := a.Effect; e != nil {
		info, _ := quantity.Of(e.Quantity)
		w.Effect = &Effect{Quantity: e.Quantity.Key(), Unit: info.Unit, AtLow: given(&e.AtLow), AtHigh: given(&e.AtHigh), Change: e.Change}
	}
	return w
}

func encodeCaution(c *caution.Caution) Caution {
	return Caution{Code: string(c.Code), Detail: c.Detail, Pointer: c.Pointer, Value: given(&c.Value), Limit: given(&c.Limit), Unit: c.Unit}
}

// given returns the number's place, or nil for an unknown one.
func given(v *float64) *float64 {
	if parts.Known(*v) {
		return v
	}
	return nil
}
