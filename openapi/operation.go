package openapi

import (
	"slices"
	"strconv"
	"strings"

	"github.com/getkin/kin-openapi/openapi3"
)

const (
	mediaJSON    = "application/json"
	mediaProblem = "application/problem+json"
)

func (k *compiler) operation(method, path string, o *openapi3.Operation) *operation {
	op := &operation{responses: map[int]*node{}}
	op.ID, op.Method, op.Path, op.Summary = o.OperationID, method, path, o.Summary
	for _, p := range o.Parameters {
		k.parameter(op, p.Value)
	}
	if o.RequestBody != nil {
		media := o.RequestBody.Value.Content[mediaJSON]
		op.request = k.schema(media.Schema)
		op.Example = example(media)
	}
	for code, r := range o.Responses.Map() {
		status, err := strconv.Atoi(code)
		if err != nil {
			panic("openapi: the contract declares the status " + code)
		}
		op.Statuses = append(op.Statuses, status)
		k.response(op, status, r.Value.Content)
	}
	slices.Sort(op.Statuses)
	return op
}

func (k *compiler) parameter(op *operation, p *openapi3.Parameter) {
	parameter := Parameter{Name: p.Name, Required: p.Required, schema: k.schema(p.Schema)}
	switch p.In {
	case openapi3.ParameterInQuery:
		op.Query = append(op.Query, parameter)
	case openapi3.ParameterInPath:
		op.InPath = append(op.InPath, parameter)
	}
}

func (k *compiler) response(op *operation, status int, content openapi3.Content) {
	op.responses[status] = nil
	for _, form := range [...]string{mediaJSON, mediaProblem} {
		if media := content[form]; media != nil && media.Schema != nil {
			op.responses[status] = k.schema(media.Schema)
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

// example returns the first named example of a body.
func example(media *openapi3.MediaType) map[string]any {
	for _, name := range sortedNames(media.Examples) {
		value, _ := media.Examples[name].Value.Value.(map[string]any)
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
