package packs

import (
	"fmt"
	"maps"
	"slices"
	"strconv"
	"strings"

	"railproof/calc/rules"
)

// maxExtensions bounds a chain of packs that extend one another.
const maxExtensions = 8 // [1]

// Library is a set of loaded packs. It is not changed after it is built, so it
// may be shared.
type Library struct{ loaded map[string]*loaded }

// loaded is a pack with what derived packs need of it.
type loaded struct {
	pack       *rules.Pack
	document   Document
	rules      []RuleDocument // all of them, inherited ones first
	parameters map[string]Parameter
	depth      int
}

// Entry is one pack of a library.
type Entry struct {
	Pack     *rules.Pack
	Document *Document
}

// Pack returns a pack by its identifier.
func (l *Library) Pack(id string) (Entry, bool) {
	p, ok := l.loaded[id]
	if !ok {
		return Entry{}, false
	}
	return Entry{p.pack, &p.document}, true
}

// All returns every pack, sorted by identifier.
func (l *Library) All() []Entry {
	all := make([]Entry, 0, len(l.loaded))
	for _, id := range slices.Sorted(maps.Keys(l.loaded)) {
		all = append(all, Entry{l.loaded[id].pack, &l.loaded[id].document})
	}
	return all
}

// With returns a library that has further packs, each of which may extend those
// before it. The receiver stays as it is. The error is an *InvalidError.
func (l *Library) With(parsed ...*Parsed) (*Library, error) {
	next := &Library{loaded: maps.Clone(l.loaded)}
	if next.loaded == nil {
		next.loaded = map[string]*loaded{}
	}
	for _, p := range parsed {
		one, err := next.load(p)
		if err != nil {
			return nil, err
		}
		next.loaded[p.Document.ID] = one
	}
	return next, nil
}

func (l *Library) load(p *Parsed) (*loaded, error) {
	d := &p.Document
	c := &compiler{parsed: p, parameters: map[string]float64{}}
	fail := func() (*loaded, error) { return nil, &InvalidError{Pack: d.ID, Faults: c.faults} }
	if _, taken := l.loaded[d.ID]; taken {
		c.fault("/id", "there is a pack %s already", d.ID)
		return fail()
	}
	one := &loaded{document: *d, parameters: c.ownParameters(d)}
	var overrides []rules.Override
	var inherited []RuleDocument
	if d.Extends != "" {
		base, ok := l.loaded[d.Extends]
		if !ok {
			c.fault("/extends", "there is no pack %.80s", d.Extends)
			return fail()
		}
		if one.depth = base.depth + 1; one.depth > maxExtensions {
			c.fault("/extends", "more than %d packs extend one another", maxExtensions)
			return fail()
		}
		for name, parameter := range base.parameters {
			if _, own := one.parameters[name]; own {
				c.fault("/parameters/"+escape(name), "the pack that is extended has it already; set it with an override")
			}
			one.parameters[name] = parameter
		}
		c.take(one.parameters)
		inherited, overrides = c.derive(d, base, one.parameters)
		if len(c.faults) > 0 {
			return fail()
		}
	} else if len(d.Overrides) > 0 {
		c.fault("/overrides", "only a pack that extends another has something to override")
	}
	c.take(one.parameters)
	one.pack = c.compile(d, inherited, overrides)
	if len(c.faults) > 0 {
		return fail()
	}
	one.rules = slices.Concat(inherited, d.Rules)
	return one, nil
}

// take makes parameters known to expressions.
func (c *compiler) take(parameters map[string]Parameter) {
	for name, p := range parameters {
		c.parameters[name] = p.Value
	}
}

// derive applies a document's overrides to the rules and parameters of the pack
// it extends, and tells what it changed.
func (c *compiler) derive(d *Document, base *loaded, parameters map[string]Parameter) ([]RuleDocument, []rules.Override) {
	list := slices.Clone(base.rules)
	for i := range list {
		if list[i].origin == "" {
			list[i].origin = base.document.ID + "/" + list[i].ID
		}
	}
	changes := slices.Clone(base.pack.Overrides)
	for i := range d.Overrides {
		o, at := &d.Overrides[i], "/overrides/"+strconv.Itoa(i)
		c.text(at+"/reason", o.Reason)
		change := func(target, what, from, to string) {
			changes = append(changes, rules.Override{Pack: d.ID, Target: target, What: what, From: from, To: to, Reason: o.Reason})
		}
		switch {
		case o.Parameter != "" && o.Rule == "":
			p, ok := parameters[o.Parameter]
			switch {
			case !ok:
				c.fault(at+"/parameter", "%.80s is not a parameter of %s", o.Parameter, d.Extends)
			case o.Value == nil || o.Limit != "" || o.Severity != "" || o.Enabled != nil:
				c.fault(at, "a parameter takes a value and nothing else")
			case !(*o.Value >= p.Least && *o.Value <= p.Most):
				c.fault(at+"/value", "%g is not between %g and %g", *o.Value, p.Least, p.Most)
			default:
				change(o.Parameter, "parameter", fmt.Sprint(p.Value), fmt.Sprint(*o.Value))
				p.Value = *o.Value
				parameters[o.Parameter] = p
			}
		case o.Rule != "" && o.Parameter == "":
			id := strings.TrimPrefix(o.Rule, d.Extends+"/")
			place := slices.IndexFunc(list, func(r RuleDocument) bool { return r.ID == id })
			if place < 0 {
				c.fault(at+"/rule", "%.80s is not a rule of %s", o.Rule, d.Extends)
				continue
			}
			list = c.overrideRule(list, place, o, at, change)
		default:
			c.fault(at, "names either a rule or a parameter")
		}
	}
	return list, changes
}

// overrideRule changes or removes one inherited rule.
func (c *compiler) overrideRule(list []RuleDocument, i int, o *OverrideDocument, at string, change func(target, what, from, to string)) []RuleDocument {
	r := &list[i]
	if o.Value != nil {
		c.fault(at+"/value", "a value belongs to a parameter; a rule has a limit")
	}
	if o.Limit == "" && o.Severity == "" && (o.Enabled == nil || *o.Enabled) {
		c.fault(at, "changes nothing")
	}
	if o.Limit != "" {
		limit := &r.AtMost
		if r.AtLeast != "" {
			limit = &r.AtLeast
		}
		change(r.origin, "limit", string(*limit), string(o.Limit))
		*limit = o.Limit
		r.Basis = "limit set by the derived pack: " + o.Reason
		c.limit(r, o, at)
	}
	if o.Severity != "" {
		if _, ok := severityOf(o.Severity); !ok {
			c.fault(at+"/severity", "%.40q is none of error, warning, note", o.Severity)
		} else {
			change(r.origin, "severity", r.Severity, o.Severity)
			r.Severity = o.Severity
		}
	}
	if o.Enabled != nil && !*o.Enabled {
		change(r.origin, "enabled", "true", "false")
		return slices.Delete(list, i, i+1)
	}
	return list
}

// limit checks an overriding limit at its own place, so that the fault does not
// point at a rule of another document.
func (c *compiler) limit(r *RuleDocument, o *OverrideDocument, at string) {
	for _, name := range r.Scope {
		if scope, ok := rules.ParseScope(name); ok {
			before := len(c.faults)
			c.expression(at+"/limit", string(o.Limit), scope, dimensions[r.Unit])
			if len(c.faults) > before {
				return
			}
		}
	}
}
