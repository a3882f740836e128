package packs

import (
	"bytes"
	"errors"
	"fmt"
	"strconv"
	"strings"

	"github.com/go-json-experiment/json"
	"github.com/go-json-experiment/json/jsontext"
	"go.yaml.in/yaml/v3"
)

// Bounds of one document.
const (
	maxDocument = 256 << 10 // [1] bytes
	maxNesting  = 12        // [1] levels
	maxRules    = 512       // [1] with the inherited ones
)

// Parsed is a document with the lines of its text.
type Parsed struct {
	Document Document
	lines    map[string]int // pointer -> line
}

// Parse reads a pack document in YAML or, if it begins with a brace, in JSON.
// Unknown fields, duplicate keys, anchors and tags are faults.
func Parse(raw []byte) (*Parsed, error) {
	if len(raw) > maxDocument {
		return nil, &InvalidError{Faults: []Fault{{Detail: fmt.Sprintf("longer than %d bytes", maxDocument)}}}
	}
	p := &Parsed{}
	if trimmed := bytes.TrimSpace(raw); len(trimmed) == 0 || trimmed[0] != '{' {
		tree, err := p.fromYAML(raw)
		if err != nil {
			return nil, err
		}
		raw = tree
	}
	err := json.Unmarshal(raw, &p.Document, json.RejectUnknownMembers(true))
	if err == nil {
		return p, nil
	}
	fault := Fault{Detail: "cannot be read as a rule pack: " + err.Error()}
	var semantic *json.SemanticError
	var syntactic *jsontext.SyntacticError
	switch {
	case errors.As(err, &semantic):
		fault.Pointer = string(semantic.JSONPointer)
		fault.Detail = readable(semantic)
	case errors.As(err, &syntactic):
		fault.Pointer = string(syntactic.JSONPointer)
		fault.Detail = "not JSON: " + syntactic.Err.Error()
	}
	fault.Line = p.lines[fault.Pointer]
	return nil, &InvalidError{Pack: p.Document.ID, Faults: []Fault{fault}}
}

// readable says what is wrong without naming types of the program.
func readable(e *json.SemanticError) string {
	if errors.Is(e, json.ErrUnknownName) {
		return "unknown field"
	}
	if e.Err != nil && e.JSONKind == 0 {
		return e.Err.Error()
	}
	kinds := map[jsontext.Kind]string{'n': "null", 'f': "false", 't': "true", '"': "a string", '0': "a number", '{': "an object", '[': "a list"}
	return kinds[e.JSONKind] + " does not fit here"
}

// fromYAML turns a YAML text into JSON, noting the line of every value.
func (p *Parsed) fromYAML(raw []byte) ([]byte, error) {
	var node yaml.Node
	if err := yaml.Unmarshal(raw, &node); err != nil {
		return nil, &InvalidError{Faults: []Fault{{Detail: "not YAML: " + strings.TrimPrefix(err.Error(), "yaml: ")}}}
	}
	if len(node.Content) != 1 {
		return nil, &InvalidError{Faults: []Fault{{Detail: "empty document"}}}
	}
	p.lines = map[string]int{}
	var out bytes.Buffer
	if fault := p.write(&out, node.Content[0], "", 0); fault != nil {
		return nil, &InvalidError{Faults: []Fault{*fault}}
	}
	return out.Bytes(), nil
}

func (p *Parsed) write(out *bytes.Buffer, n *yaml.Node, at string, depth int) *Fault {
	p.lines[at] = n.Line
	fault := func(text string) *Fault { return &Fault{Pointer: at, Line: n.Line, Detail: text} }
	if depth > maxNesting {
		return fault("nested too deeply")
	}
	if n.Anchor != "" {
		return fault("anchors are not allowed")
	}
	switch n.Kind {
	case yaml.MappingNode:
		seen := map[string]bool{}
		out.WriteByte('{')
		for i := 0; i+1 < len(n.Content); i += 2 {
			key := n.Content[i]
			if key.Kind != yaml.ScalarNode || key.Tag == "!!merge" {
				return fault("a key must be a plain word")
			}
			if seen[key.Value] {
				return &Fault{Pointer: at + "/" + escape(key.Value), Line: key.Line, Detail: "given twice"}
			}
			seen[key.Value] = true
			if i > 0 {
				out.WriteByte(',')
			}
			writeString(out, key.Value)
			out.WriteByte(':')
			if f := p.write(out, n.Content[i+1], at+"/"+escape(key.Value), depth+1); f != nil {
				return f
			}
		}
		out.WriteByte('}')
	case yaml.SequenceNode:
		out.WriteByte('[')
		for i, item := range n.Content {
			if i > 0 {
				out.WriteByte(',')
			}
			if f := p.write(out, item, at+"/"+strconv.Itoa(i), depth+1); f != nil {
				return f
			}
		}
		out.WriteByte(']')
	case yaml.ScalarNode:
		return p.scalar(out, n, fault)
	default:
		return fault("aliases are not allowed")
	}
	return nil
}

func (p *Parsed) scalar(out *bytes.Buffer, n *yaml.Node, fault func(string) *Fault) *Fault {
	switch n.ShortTag() {
	case "!!str":
		writeString(out, n.Value)
	case "!!null":
		out.WriteString("null")
	case "!!bool":
		var b bool
		if err := n.Decode(&b); err != nil {
			return fault("neither true nor false")
		}
		fmt.Fprint(out, b)
	case "!!int", "!!float":
		if !jsontext.Value(n.Value).IsValid() {
			return fault(fmt.Sprintf("%.20q is no decimal number; write it as in JSON", n.Value))
		}
		out.WriteString(n.Value)
	default:
		return fault(fmt.Sprintf("values of the kind %.20s are not allowed; put the text in quotes", n.ShortTag()))
	}
	return nil
}

func writeString(out *bytes.Buffer, s string) {
	quoted, err := jsontext.AppendQuote(nil, s)
	if err != nil {
		quoted, _ = jsontext.AppendQuote(nil, strings.ToValidUTF8(s, "\uFFFD"))
	}
	out.Write(quoted)
}

// escape writes a key as a token of a JSON Pointer.
func escape(key string) string {
	return strings.ReplaceAll(strings.ReplaceAll(key, "~", "~0"), "/", "~1")
}
