package openapi

import (
	"slices"
	"strconv"
	"strings"
)

const (
	mediaJSON    = "application/json"
	mediaProblem = "application/problem+json"
)

func (k *compiler) operation(method, path string, o map[string]any) *operation {
	op := &operation{responses: map[int]*node{}}
	op.ID, op.Method, op.Path = o["operationId"].(string), method, path
	op.Summary, _ = o["summary"].(string)
	for _, p := range list(o["parameters"]) {
		k.parameter(op, k.deref(p))
	}
	if body, ok := o["requestBody"]; ok {
		media := k.deref(body)["content"].(map[string]any)[mediaJSON].(map[string]any)
		op.request = k.schema(media["schema"])
		op.Example = example(media)
	}
	for code, r := range o["responses"].(map[string]any) {
		status, err := strconv.Atoi(code)
		if err != nil {
			panic("openapi: the contract declares the status " + code)
		}
		op.Statuses = append(op.Statuses, status)
		k.response(op, status, k.deref(r))
	}
	slices.Sort(op.Statuses)
	return op
}

func (k *compiler) parameter(op *operation, p map[string]any) {
	required, _ := p["required"].(bool)
	parameter := Parameter{Name: p["name"].(string), Required: required, schema: k.schema(p["schema"])}
	switch p["in"] {
	case "query":
		op.Query = append(op.Query, parameter)
	case "path":
		op.InPath = append(op.InPath, parameter)
	}
}

func (k *compiler) response(op *operation, status int, r map[string]any) {
	op.responses[status] = nil
	content, _ := r["content"].(map[string]any)
	for _, form := range [...]string{mediaJSON, mediaProblem} {
		media, _ := content[form].(map[string]any)
		if s, ok := media["schema"]; ok {
			op.responses[status] = k.schema(s)
			break
		}
	}
	if status != 200 {
		return
	}
	op.MediaTypes = sortedNames(content)
	slices.SortStableFunc(op.MediaTypes, func(a, b string) int {
		return order(a != mediaJSON) - order(b != mediaJSON)
	})
}

func order(later bool) int {
	if later {
		return 1
	}
	return 0
}

// deref follows the reference of a parameter, body or response.
func (k *compiler) deref(v any) map[string]any {
	o := v.(map[string]any)
	if ref, ok := o["$ref"].(string); ok {
		return resolve(k.document, ref).(map[string]any)
	}
	return o
}

func list(v any) []any {
	l, _ := v.([]any)
	return l
}

// example returns the first named example of a body.
func example(media map[string]any) map[string]any {
	examples, _ := media["examples"].(map[string]any)
	for _, name := range sortedNames(examples) {
		value, _ := examples[name].(map[string]any)["value"].(map[string]any)
		return value
	}
	return nil
}

// ValidateQuery returns what is wrong with the query parameters of a request:
// unknown ones, repeated ones and values that the contract does not take. As a
// parameter is no place in a document, Pointer is empty and Detail names it.
func (c *Contract) ValidateQuery(operationID string, query map[string][]string) []Fault {
	op := c.operation(operationID)
	var faults []Fault
	for _, name := range sortedNames(query) {
		i := slices.IndexFunc(op.Query, func(p Parameter) bool { return p.Name == name })
		switch values := query[name]; {
		case i < 0:
			faults = append(faults, Fault{Keyword: "additionalProperties", Detail: "unknown query parameter " + cut(name, maxReceived), Limit: parameterNames(op.Query), Received: cut(name, maxReceived)})
		case len(values) != 1:
			faults = append(faults, Fault{Keyword: "maxItems", Detail: "query parameter " + name + " given more than once", Limit: "one value"})
		default:
			faults = append(faults, op.Query[i].validate("query parameter", values[0])...)
		}
	}
	return faults
}

// ValidatePathParameter returns what is wrong with the value of a parameter in
// the path.
func (c *Contract) ValidatePathParameter(operationID, name, value string) []Fault {
	for _, p := range c.operation(operationID).InPath {
		if p.Name == name {
			return p.validate("path parameter", value)
		}
	}
	panic("openapi: " + operationID + " has no path parameter " + name)
}

// validate checks the text of a parameter as the type that its schema asks for.
func (p *Parameter) validate(what, value string) []Fault {
	tree := any(value)
	switch p.schema.kind {
	case number:
		if v, err := strconv.ParseFloat(value, 64); err == nil {
			tree = v
		}
	case boolean:
		if value == "true" || value == "false" {
			tree = value == "true"
		}
	}
	faults := validate(p.schema, tree, nil)
	for i := range faults {
		faults[i].Detail = what + " " + p.Name + ": " + faults[i].Detail
	}
	return faults
}

func parameterNames(all []Parameter) string {
	if len(all) == 0 {
		return "no query parameter"
	}
	names := make([]string, len(all))
	for i := range all {
		names[i] = all[i].Name
	}
	return strings.Join(names, ", ")
}
