package packs

import (
	"fmt"
	"maps"
	"math"
	"regexp"
	"slices"
	"strconv"

	"railproof/calc/rules"
)

var identifier = regexp.MustCompile(`^[a-z0-9][a-z0-9._-]*$`)

// parameterName is what stands after "parameter." in an expression.
var parameterName = regexp.MustCompile(`^[a-z][a-z0-9_]*$`)

const (
	maxIdentifier = 64   // [1] bytes
	maxText       = 1024 // [1] bytes of a title, message or reason
)

// compiler checks one document and collects its faults.
type compiler struct {
	parsed     *Parsed
	parameters map[string]float64
	scopes     [rules.ScopeCount]*environment // with the parameters, built on first use
	faults     []Fault
}

// environment returns what expressions of a scope may say in this document.
func (c *compiler) environment(s rules.Scope) *environment {
	if c.scopes[s] == nil {
		e, err := environmentOf(s).with(c.parameters)
		if err != nil {
			panic("packs: parameters: " + err.Error())
		}
		c.scopes[s] = e
	}
	return c.scopes[s]
}

func (c *compiler) fault(pointer, format string, args ...any) {
	c.faults = append(c.faults, Fault{Pointer: pointer, Line: c.parsed.lines[pointer], Detail: fmt.Sprintf(format, args...)})
}

func (c *compiler) text(pointer, value string) {
	if value == "" {
		c.fault(pointer, "must be given")
	} else if len(value) > maxText {
		c.fault(pointer, "longer than %d bytes", maxText)
	}
}

func (c *compiler) identifier(pointer, value string) {
	if len(value) > maxIdentifier || !identifier.MatchString(value) {
		c.fault(pointer, "%.80q is not an identifier: lower-case letters, digits, dots, underscores and hyphens, at most %d", value, maxIdentifier)
	}
}

// compile makes a pack of a document and the rules that it inherits.
func (c *compiler) compile(d *Document, inherited []RuleDocument, overrides []rules.Override) *rules.Pack {
	pack := &rules.Pack{ID: d.ID, Title: d.Title, Edition: d.Edition, Provenance: d.Provenance, Parameters: c.parameters, Overrides: overrides}
	c.identifier("/id", d.ID)
	c.text("/title", d.Title)
	c.text("/edition", d.Edition)
	c.text("/provenance", d.Provenance)
	if n := len(inherited) + len(d.Rules); n > maxRules {
		c.fault("/rules", "%d rules with the inherited ones; at most %d", n, maxRules)
		return pack
	}
	seen := map[string]bool{}
	for i := range inherited {
		r := &inherited[i]
		seen[r.ID] = true
		pack.Rules = append(pack.Rules, c.rule(d.ID, r, ""))
	}
	for i := range d.Rules {
		r := &d.Rules[i]
		at := "/rules/" + strconv.Itoa(i)
		if seen[r.ID] {
			c.fault(at+"/id", "rule %s is there already", r.ID)
		}
		seen[r.ID] = true
		pack.Rules = append(pack.Rules, c.rule(d.ID, r, at))
	}
	return pack
}

// rule compiles one rule; at is its pointer in the document, "" for an inherited
// one.
func (c *compiler) rule(pack string, d *RuleDocument, at string) rules.Rule {
	r := rules.Rule{ID: pack + "/" + d.ID, Title: d.Title, Unit: d.Unit, At: d.At, Needs: d.Needs, Basis: d.Basis, Origin: d.origin}
	c.identifier(at+"/id", d.ID)
	c.text(at+"/title", d.Title)
	c.text(at+"/message", d.Message)
	c.text(at+"/basis", d.Basis)
	severity, ok := severityOf(d.Severity)
	if !ok {
		c.fault(at+"/severity", "%.40q is none of error, warning, note", d.Severity)
	}
	r.Severity = severity
	message, err := rules.ParseMessage(d.Message)
	if err != nil {
		c.fault(at+"/message", "%v", err)
	}
	r.Message = message
	limit, limitAt := d.AtMost, at+"/at_most"
	if d.AtLeast != "" {
		limit, limitAt, r.Relation = d.AtLeast, at+"/at_least", rules.AtLeast
	}
	if (d.AtMost == "") == (d.AtLeast == "") {
		c.fault(at, "exactly one of at_most and at_least must be given")
		return r
	}
	unit, ok := dimensions[d.Unit]
	if !ok || d.Unit == anyUnit {
		c.fault(at+"/unit", "%.40q is not a unit of this service; units are UCUM codes such as V, A, Cel, 1", d.Unit)
		return r
	}
	if len(d.Scope) == 0 {
		c.fault(at+"/scope", "must name at least one scope")
	}
	for i, name := range d.Scope {
		scope, ok := rules.ParseScope(name)
		if !ok {
			c.fault(at+"/scope/"+strconv.Itoa(i), "%.40q is not a scope", name)
			continue
		}
		body := rules.Body{Scope: scope}
		if d.When != "" {
			if e := c.expression(at+"/when", d.When, scope, dimension{truth: true}); e != nil {
				body.When, body.ByKind = e.holds, slices.Contains(e.reads, "part.kind")
			}
		}
		value, bound := c.expression(at+"/value", string(d.Value), scope, unit), c.expression(limitAt, string(limit), scope, unit)
		if value != nil && bound != nil {
			body.Value, body.Limit = value.number, bound.number
			body.Reads = slices.Concat(value.reads, bound.reads)
		}
		known := environmentOf(scope).names
		for j, need := range d.Needs {
			if _, ok := known[need]; !ok {
				c.fault(at+"/needs/"+strconv.Itoa(j), "%.80s is not a name here%s", need, suggestion(need, known))
			}
		}
		r.Bodies = append(r.Bodies, body)
	}
	return r
}

// expression compiles a text and checks what it yields against what is wanted.
func (c *compiler) expression(at, text string, scope rules.Scope, want dimension) *expression {
	e, err := compile(text, c.environment(scope))
	if err != nil {
		c.fault(at, "in scope %s: %v", scope, err)
		return nil
	}
	if _, err := same(e.dim, want); err != nil {
		c.fault(at, "in scope %s: it yields %s where %s is wanted", scope, e.dim, want)
		return nil
	}
	return e
}

func severityOf(name string) (rules.Severity, bool) {
	for _, s := range []rules.Severity{rules.Error, rules.Warning, rules.Note} {
		if s.String() == name {
			return s, true
		}
	}
	return rules.Error, false
}

// ownParameters checks and returns a document's own parameters.
func (c *compiler) ownParameters(d *Document) map[string]Parameter {
	own := map[string]Parameter{}
	for _, name := range slices.Sorted(maps.Keys(d.Parameters)) {
		p, at := d.Parameters[name], "/parameters/"+escape(name)
		if len(name) > maxIdentifier || !parameterName.MatchString(name) {
			c.fault(at, "a parameter's name has lower-case letters, digits and underscores, at most %d", maxIdentifier)
			continue
		}
		c.text(at+"/meaning", p.Meaning)
		if !(p.Least <= p.Value && p.Value <= p.Most) || math.IsInf(p.Least, 0) || math.IsInf(p.Most, 0) {
			c.fault(at+"/value", "%g is not between %g and %g", p.Value, p.Least, p.Most)
		}
		own[name] = p
	}
	return own
}
