package openapi

import (
	"cmp"
	_ "embed"
	"encoding/json"
	"fmt"
	"slices"
	"strconv"
	"strings"
	"sync"

	"github.com/getkin/kin-openapi/openapi3"
)

//go:embed openapi.yaml
var yamlBytes []byte

//go:embed openapi.json
var jsonBytes []byte

// YAML returns the contract as it is written.
func YAML() []byte { return yamlBytes }

// JSON returns the contract in JSON.
func JSON() []byte { return jsonBytes }

// Operation is one operation of the contract.
type Operation struct {
	ID         string
	Method     string         // "POST"
	Path       string         // "/v1/jobs/{id}"
	Summary    string         // one line for people
	Query      []Parameter    // query parameters
	InPath     []Parameter    // parameters in the path
	Statuses   []int          // every status it can send, ascending
	MediaTypes []string       // forms of the 200 answer, JSON first where it is one
	Example    map[string]any // an example request, nil without a body
}

// Parameter is a query or path parameter.
type Parameter struct {
	Name     string
	Required bool
	schema   *node
}

// operation is what the checks need of one operation.
type operation struct {
	Operation
	request   *node         // nil: no body
	responses map[int]*node // JSON body by status; a nil node: a body without schema
}

// Contract is the compiled contract. It is immutable.
type Contract struct {
	version    string
	operations []Operation
	byID       map[string]*operation
	components map[string]*node
	plans      plans
}

// Load returns the contract, compiled at the first call.
func Load() *Contract { return load() }

var load = sync.OnceValue(func() *Contract {
	document := new(openapi3.T)
	err := json.Unmarshal(jsonBytes, document) // the loader's own reader takes it for YAML: twice the time
	if err == nil {
		err = openapi3.NewLoader().ResolveRefsIn(document, nil)
	}
	if err != nil {
		panic(fmt.Sprintf("openapi: the contract cannot be read: %v", err))
	}
	return compile(document)
})

// Version returns the version of the contract.
func (c *Contract) Version() string { return c.version }

// Operations returns every operation, by path and method.
func (c *Contract) Operations() []Operation { return c.operations }

// ValidateRequest returns what is wrong with the body of a request, a tree of
// map[string]any, []any, float64, string, bool and nil; nil if nothing is. An
// unknown operation or one without a body is the caller's bug.
func (c *Contract) ValidateRequest(operationID string, tree any) []Fault {
	op := c.operation(operationID)
	if op.request == nil {
		panic("openapi: " + operationID + " takes no body")
	}
	return validate(op.request, tree, nil)
}

// validate runs a first pass that only decides, and a second one that gathers
// the faults in a fixed order if there are any.
func validate(n *node, v any, p *plans) []Fault {
	verdict := check{plans: p}
	verdict.tree(n, v)
	if !verdict.failed {
		return nil
	}
	gather := check{collect: true, plans: p}
	gather.tree(n, v)
	return gather.faults
}

// ValidateResponse returns what is wrong with the JSON body of a response: a
// tree as in ValidateRequest, or the Go value that will be encoded. A status
// that the operation does not declare is a fault; a body without a schema
// (a picture, say) has none.
func (c *Contract) ValidateResponse(operationID string, status int, value any) []Fault {
	n, declared := c.operation(operationID).responses[status]
	switch {
	case !declared:
		return []Fault{{Keyword: "status", Detail: "a status that the operation does not declare", Received: strconv.Itoa(status)}}
	case n == nil:
		return nil
	}
	return validate(n, value, &c.plans)
}

// ValidateAs returns what is wrong with a value as a component schema of the
// contract, such as "Stage".
func (c *Contract) ValidateAs(component string, value any) []Fault {
	return validate(c.component(component), value, &c.plans)
}

func (c *Contract) operation(id string) *operation {
	op := c.byID[id]
	if op == nil {
		panic("openapi: no operation " + id)
	}
	return op
}

func (c *Contract) component(name string) *node {
	n := c.components[componentPrefix+name]
	if n == nil {
		panic("openapi: no component schema " + name)
	}
	return n
}

// compile compiles every operation of the document.
func compile(document *openapi3.T) *Contract {
	k := compiler{components: map[string]*node{}}
	c := &Contract{byID: map[string]*operation{}, components: k.components, version: document.Info.Version}
	for path, item := range document.Paths.Map() {
		for method, o := range item.Operations() {
			op := k.operation(method, path, o)
			c.byID[op.ID] = op
			c.operations = append(c.operations, op.Operation)
		}
	}
	slices.SortFunc(c.operations, func(a, b Operation) int {
		return cmp.Or(strings.Compare(a.Path, b.Path), strings.Compare(a.Method, b.Method))
	})
	return c
}
