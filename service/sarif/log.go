package sarif

// The parts of the format that this package writes; names are the standard's.

type log struct {
	Schema  string `json:"$schema"`
	Version string `json:"version"`
	Runs    []run  `json:"runs"`
}

type run struct {
	Tool        tool         `json:"tool"`
	Invocations []invocation `json:"invocations"`
	Documents   []document   `json:"artifacts,omitempty"` //nolint:misspell // the standard spells it so
	Results     []result     `json:"results"`
	Properties  *runBag      `json:"properties,omitempty"`
}

type tool struct {
	Driver component `json:"driver"`
}

type component struct {
	Name           string       `json:"name"`
	Version        string       `json:"version,omitempty"`
	InformationURI string       `json:"informationUri,omitempty"`
	Rules          []descriptor `json:"rules"`
}

type descriptor struct {
	ID               string        `json:"id"`
	ShortDescription text          `json:"shortDescription"`
	FullDescription  text          `json:"fullDescription"`
	Configuration    configuration `json:"defaultConfiguration"`
	Properties       descriptorBag `json:"properties"`
}

type text struct {
	Text string `json:"text"`
}

type configuration struct {
	Level string `json:"level"`
}

type invocation struct {
	ExecutionSuccessful bool `json:"executionSuccessful"`
}

type document struct {
	Location documentLocation `json:"location"`
}

type documentLocation struct {
	URI   string `json:"uri"`
	Index *int   `json:"index,omitempty"`
}

type result struct {
	RuleID       string        `json:"ruleId"`
	RuleIndex    int           `json:"ruleIndex"`
	Kind         string        `json:"kind"`
	Level        string        `json:"level"`
	Message      text          `json:"message"`
	Locations    []location    `json:"locations"`
	Fingerprints fingerprints  `json:"partialFingerprints"`
	Suppressions []suppression `json:"suppressions,omitempty"`
	Properties   resultBag     `json:"properties"`
}

type location struct {
	Physical *physicalLocation `json:"physicalLocation,omitempty"`
	Logical  []logicalLocation `json:"logicalLocations"`
}

type physicalLocation struct {
	Document documentLocation `json:"artifactLocation"`
	Region   *region          `json:"region,omitempty"`
}

type region struct {
	StartLine   int `json:"startLine"`
	StartColumn int `json:"startColumn,omitempty"`
}

type logicalLocation struct {
	FullyQualifiedName string `json:"fullyQualifiedName"`
	Kind               string `json:"kind"`
}

type fingerprints struct {
	Place string `json:"ruleAndPointer/v1"`
}

type suppression struct {
	Kind          string `json:"kind"`
	Status        string `json:"status"`
	Justification string `json:"justification"`
}

// The property bags are this service's own.

type runBag struct {
	Verdict       string     `json:"verdict"`
	Overrides     []override `json:"overrides,omitempty"`
	NotApplicable []string   `json:"not_applicable,omitempty"`
}

type override struct {
	Pack   string `json:"pack"`
	Target string `json:"target"`
	What   string `json:"what"`
	From   string `json:"from"`
	To     string `json:"to"`
	Reason string `json:"reason"`
}

type descriptorBag struct {
	Pack       string `json:"pack,omitempty"`
	Edition    string `json:"edition,omitempty"`
	Provenance string `json:"provenance,omitempty"`
	Basis      string `json:"basis,omitempty"`
	Origin     string `json:"origin,omitempty"`
}

type resultBag struct {
	Verdict    string   `json:"verdict"`
	Relation   string   `json:"relation,omitempty"`
	Value      *float64 `json:"value,omitempty"`
	Limit      *float64 `json:"limit,omitempty"`
	Unit       string   `json:"unit,omitempty"`
	Margin     *float64 `json:"margin_ratio,omitempty"`
	ValueLow   *float64 `json:"value_low,omitempty"`
	ValueHigh  *float64 `json:"value_high,omitempty"`
	WithinBand bool     `json:"within_model_band,omitempty"`
	Corners    []string `json:"corners,omitempty"`
	WorstBy    string   `json:"worst_by,omitempty"`
	Missing    []string `json:"missing,omitempty"`
	Beyond     []string `json:"beyond_tables,omitempty"`
	WaivedBy   string   `json:"waived_by,omitempty"`
	WaivedTill string   `json:"waived_until,omitempty"`
}
