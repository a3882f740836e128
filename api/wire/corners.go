package wire

import (
	"railproof/service"
)

// CornersRequest asks for the worst case of a stage over its spreads and
// conditions.
type CornersRequest struct {
	Stage       *Stage        `json:"stage"`
	Conditions  *Conditions   `json:"conditions"`
	Limits      []Limit       `json:"limits,omitzero"`
	Quantities  []string      `json:"quantities,omitzero"`
	Methods     []string      `json:"methods,omitzero"`
	Samples     *Integer      `json:"samples,omitzero"`
	Seed        *Integer      `json:"seed,omitzero"`
	Sampling    string        `json:"sampling,omitzero"`
	First       *Integer      `json:"first_sample,omitzero"`
	Corners     []CornerPoint `json:"condition_corners,omitzero"`
	Confidence  *float64      `json:"confidence_ratio,omitzero"`
	Coverage    *float64      `json:"coverage_ratio,omitzero"`
	Quantiles   []float64     `json:"quantiles,omitzero"`
	Bins        *Integer      `json:"histogram_bins,omitzero"`
	Worst       *Integer      `json:"worst_samples,omitzero"`
	Attribution *Integer      `json:"attribution_samples,omitzero"`
	ModelBands  *bool         `json:"model_bands,omitzero"`
	Biases      []Bias        `json:"biases,omitzero"`
	Stages      *bool         `json:"stages,omitzero"`
}

// CornerPoint is one combination of conditions.
type CornerPoint struct {
	Input      float64  `json:"input_v"`
	Load       *float64 `json:"load_current_a,omitzero"`
	Resistance *float64 `json:"load_resistance_ohm,omitzero"`
	Ambient    float64  `json:"ambient_degc"`
	Age        *float64 `json:"age_ratio,omitzero"`
}

// Bias is a drift of known sign.
type Bias struct {
	Pointer string  `json:"pointer"`
	Drift   float64 `json:"drift_ratio"`
	Why     string  `json:"why,omitzero"`
}

// CornersAnswer says what fails first, where, by how much, because of which parts,
// and how sure that is.
type CornersAnswer struct {
	Head
	Status           string            `json:"status"`
	Outcome          string            `json:"verdict"`
	Seed             Integer           `json:"seed"`
	Sampling         string            `json:"sampling,omitzero"`
	SamplesAsked     *Integer          `json:"samples_asked,omitzero"`
	SamplesRun       *Integer          `json:"samples_run,omitzero"`
	Evaluations      Integer           `json:"evaluations"`
	Search           *SearchEffort     `json:"search,omitzero"`
	NominalPoint     *Point            `json:"nominal_point"`
	NominalStatus    string            `json:"nominal_status"`
	Variables        []Variable        `json:"variables"`
	ConditionCorners []CornerPoint     `json:"condition_corners"`
	Quantities       []QuantityCorners `json:"quantities"`
	Yield            *Yield            `json:"yield,omitzero"`
	Failures         []FailureCount    `json:"failures"`
	WorstSamples     []WorstSample     `json:"worst_samples,omitzero"`
	Stage            *Stage            `json:"stage"`
	Conditions       *Conditions       `json:"conditions"`
	Limits           []Limit           `json:"limits,omitzero"`
	Basis
}

// Verdict is the status of the answer as a whole: ok where no limit fails.
func (a *CornersAnswer) Verdict() string {
	switch a.Outcome {
	case service.Fail.String():
		return a.Outcome
	case service.Incomplete.String():
		return "not-evaluated"
	}
	if a.Status != "ok" {
		return "not-evaluated"
	}
	return "ok"
}

// SearchEffort is what the search for worst points did.
type SearchEffort struct {
	Evaluations Integer `json:"evaluations"`
	Dimensions  Integer `json:"dimensions"`
	Covered     float64 `json:"covered_ratio"`
	Confidence  float64 `json:"confidence_ratio"`
}

// Variable is what is varied.
type Variable struct {
	Pointer      string   `json:"pointer"`
	Min          float64  `json:"min"`
	Typ          float64  `json:"typ"`
	Max          float64  `json:"max"`
	Unit         string   `json:"unit"`
	Distribution string   `json:"distribution"`
	Group        string   `json:"group,omitzero"`
	MatchTol     *float64 `json:"match_tol,omitzero"`
}

// VariableValue is one variable at a point.
type VariableValue struct {
	Pointer string  `json:"pointer"`
	Value   float64 `json:"value"`
	Unit    string  `json:"unit"`
}

// QuantityCorners is one line of the answer.
type QuantityCorners struct {
	Quantity     string          `json:"quantity"`
	Unit         string          `json:"unit"`
	Limit        *Limit          `json:"limit,omitzero"`
	Verdict      string          `json:"verdict"`
	Margin       *float64        `json:"margin_ratio,omitzero"`
	ModelBand    *float64        `json:"model_band,omitzero"`
	WithinBand   *bool           `json:"within_band,omitzero"`
	FailingUnits *Integer        `json:"failing_units,omitzero"`
	Nominal      *float64        `json:"nominal,omitzero"`
	Least        *WorstPoint     `json:"least,omitzero"`
	Greatest     *WorstPoint     `json:"greatest,omitzero"`
	Linear       []RootSumSquare `json:"root_sum_square,omitzero"`
	Statistics   []Statistics    `json:"statistics,omitzero"`
	Variance     []Variance      `json:"variance,omitzero"`
	OneAtATime   []TornadoBar    `json:"one_at_a_time,omitzero"`
}

// WorstPoint is a point complete with the value of every variable.
type WorstPoint struct {
	Value         *float64        `json:"value,omitzero"`
	Unit          string          `json:"unit"`
	Status        string          `json:"status"`
	FoundBy       string          `json:"found_by"`
	BestVertex    *float64        `json:"best_vertex,omitzero"`
	Beyond        bool            `json:"beyond_vertices"`
	Proven        bool            `json:"proven"`
	Sample        *Integer        `json:"sample,omitzero"`
	Mode          string          `json:"conduction_mode,omitzero"`
	Point         *Point          `json:"point"`
	Variables     []VariableValue `json:"variables"`
	Contributions []Contribution  `json:"contributions,omitzero"`
	Stage         *Stage          `json:"stage,omitzero"`
}

// Named tells which variables a figure belongs to.
type Named struct {
	Pointer  string   `json:"pointer"`
	With     []string `json:"with,omitzero"`
	Residual *bool    `json:"residual,omitzero"`
}

// Contribution is what one variable contributes to a worst point.
type Contribution struct {
	Named
	Change *float64 `json:"change,omitzero"`
	Width  *float64 `json:"width_ratio,omitzero"`
}

// TornadoBar is a quantity with one variable at its ends.
type TornadoBar struct {
	Named
	AtMin *float64 `json:"at_min,omitzero"`
	AtMax *float64 `json:"at_max,omitzero"`
}

// Variance splits the variance at one condition corner.
type Variance struct {
	Corner     int             `json:"corner"`
	Rows       int             `json:"rows"`
	Defined    bool            `json:"defined"`
	Confidence float64         `json:"confidence_ratio"`
	Shares     []VarianceShare `json:"shares"`
}

// VarianceShare is one variable's part of it.
type VarianceShare struct {
	Named
	First     float64 `json:"first_order_ratio"`
	FirstLow  float64 `json:"first_order_low_ratio"`
	FirstHigh float64 `json:"first_order_high_ratio"`
	Total     float64 `json:"total_ratio"`
	TotalLow  float64 `json:"total_low_ratio"`
	TotalHigh float64 `json:"total_high_ratio"`
}

// RootSumSquare is the linear estimate at the conditions of a worst point.
type RootSumSquare struct {
	Side        string      `json:"side"`
	Corner      CornerPoint `json:"corner"`
	Unit        string      `json:"unit"`
	Typical     float64     `json:"typical"`
	RandomAbove float64     `json:"random_above"`
	RandomBelow float64     `json:"random_below"`
	BiasAbove   float64     `json:"bias_above"`
	BiasBelow   float64     `json:"bias_below"`
	Least       float64     `json:"least"`
	Greatest    float64     `json:"greatest"`
	Deviation   *float64    `json:"standard_deviation,omitzero"`
	Curvature   float64     `json:"curvature_ratio"`
	Trusted     bool        `json:"trusted"`
}

// Statistics describe a quantity over the units at one condition corner.
type Statistics struct {
	Corner        int             `json:"corner"`
	Samples       int             `json:"samples"`
	Unit          string          `json:"unit"`
	Mean          *float64        `json:"mean,omitzero"`
	Deviation     *float64        `json:"standard_deviation,omitzero"`
	MeanError     *float64        `json:"mean_error,omitzero"`
	Least         *float64        `json:"least,omitzero"`
	Greatest      *float64        `json:"greatest,omitzero"`
	Quantiles     []QuantileValue `json:"quantiles"`
	Histogram     *Histogram      `json:"histogram,omitzero"`
	Cp            *float64        `json:"cp,omitzero"`
	Cpk           *float64        `json:"cpk,omitzero"`
	PercentileCpk *float64        `json:"percentile_cpk,omitzero"`
	Far           *Integer        `json:"far,omitzero"`
	Fails         *Integer        `json:"fails,omitzero"`
	WilksBound    *float64        `json:"wilks_bound,omitzero"`
	WilksOrder    *Integer        `json:"wilks_order,omitzero"`
}

// QuantileValue is one estimated quantile.
type QuantileValue struct {
	Probability float64  `json:"probability_ratio"`
	Value       float64  `json:"value"`
	Error       float64  `json:"error"`
	Low         *float64 `json:"low,omitzero"`
	High        *float64 `json:"high,omitzero"`
}

// Histogram counts units in equal bins.
type Histogram struct {
	Edges  []float64 `json:"edges"`
	Counts []int     `json:"counts"`
	Below  int       `json:"below"`
	Above  int       `json:"above"`
}

// Yield is the share of units that pass everything.
type Yield struct {
	Samples      int      `json:"samples"`
	Passes       int      `json:"passes"`
	Share        float64  `json:"yield_ratio"`
	Low          float64  `json:"low_ratio"`
	High         float64  `json:"high_ratio"`
	Confidence   float64  `json:"confidence_ratio"`
	Interval     string   `json:"interval"`
	WilksSamples *Integer `json:"wilks_samples,omitzero"`
}

// FailureCount is how often evaluations ended in one way.
type FailureCount struct {
	Status    string          `json:"status"`
	Method    string          `json:"method"`
	Count     int             `json:"count"`
	First     *Integer        `json:"first_sample,omitzero"`
	Corner    *Integer        `json:"corner,omitzero"`
	Point     *Point          `json:"point,omitzero"`
	Variables []VariableValue `json:"variables,omitzero"`
	Stage     *Stage          `json:"stage,omitzero"`
}

// WorstSample is one of the worst units.
type WorstSample struct {
	Quantity string      `json:"quantity"`
	Side     string      `json:"side"`
	Sample   int         `json:"sample"`
	Corner   int         `json:"corner"`
	Worst    *WorstPoint `json:"worst"`
}
