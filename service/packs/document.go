package packs

import (
	"fmt"
	"strings"

	"github.com/go-json-experiment/json"
	"github.com/go-json-experiment/json/jsontext"
)

// Document is a rule pack as it is written.
type Document struct {
	ID         string               `json:"id"`
	Title      string               `json:"title"`
	Edition    string               `json:"edition"`
	Provenance string               `json:"provenance"`
	Extends    string               `json:"extends,omitempty"`
	Parameters map[string]Parameter `json:"parameters,omitempty"`
	Rules      []RuleDocument       `json:"rules,omitempty"`
	Overrides  []OverrideDocument   `json:"overrides,omitempty"`
}

// Parameter is a constant of a pack that derived packs may set.
type Parameter struct {
	Value   float64 `json:"value"`
	Least   float64 `json:"least"`
	Most    float64 `json:"greatest"`
	Meaning string  `json:"meaning"`
}

// RuleDocument is one rule as it is written. Exactly one of AtMost and AtLeast
// is given.
type RuleDocument struct {
	ID       string   `json:"id"`
	Title    string   `json:"title"`
	Severity string   `json:"severity"`
	Scope    []string `json:"scope"`
	When     string   `json:"when,omitempty"`
	Value    Text     `json:"value"`
	AtMost   Text     `json:"at_most,omitempty"`
	AtLeast  Text     `json:"at_least,omitempty"`
	Unit     string   `json:"unit"`
	Needs    []string `json:"needs,omitempty"`
	At       string   `json:"at,omitempty"`
	Message  string   `json:"message"`
	Basis    string   `json:"basis"`

	origin string // the rule of another pack that this one was taken from
}

// OverrideDocument changes one rule, or one parameter, of the pack that is
// extended.
type OverrideDocument struct {
	Rule      string   `json:"rule,omitempty"`
	Parameter string   `json:"parameter,omitempty"`
	Limit     Text     `json:"limit,omitempty"`
	Severity  string   `json:"severity,omitempty"`
	Enabled   *bool    `json:"enabled,omitempty"`
	Value     *float64 `json:"value,omitempty"`
	Reason    string   `json:"reason"`
}

// Text is an expression; a bare number is one too.
type Text string

// UnmarshalJSON accepts a string or a number.
func (t *Text) UnmarshalJSON(raw []byte) error {
	switch jsontext.Value(raw).Kind() {
	case '"':
		var s string
		if err := json.Unmarshal(raw, &s); err != nil {
			return err
		}
		*t = Text(s)
	case '0':
		*t = Text(raw)
	default:
		return fmt.Errorf("an expression or a number is expected")
	}
	return nil
}

// Fault is one thing that is wrong with a pack document.
type Fault struct {
	Pointer string // RFC 6901 pointer into the document
	Line    int    // of the text; 0 if not known
	Detail  string
}

// InvalidError lists what is wrong with a pack document.
type InvalidError struct {
	Pack   string
	Faults []Fault
}

// Error names every fault with its place.
func (e *InvalidError) Error() string {
	lines := make([]string, len(e.Faults))
	for i, f := range e.Faults {
		lines[i] = f.Pointer + ": " + f.Detail
		if f.Line > 0 {
			lines[i] = fmt.Sprintf("line %d: %s", f.Line, lines[i])
		}
	}
	return "rule pack " + e.Pack + ": " + strings.Join(lines, "; ")
}
