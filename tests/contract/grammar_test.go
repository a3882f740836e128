package contract

import (
	"encoding/json"
	"maps"
	"math"
	"math/rand/v2"
	"slices"
	"strconv"
	"strings"

	"pgregory.net/rapid"

	"railproof/openapi"
)

// grammar reads the contract's own schemas, apart from the program's reader, and
// writes documents that they accept and ones that break a single keyword.
type grammar struct {
	document map[string]any
	random   *rand.Rand
}

func newGrammar(seed uint64) *grammar {
	g := &grammar{random: rand.New(rand.NewPCG(seed, 7))}
	if err := json.Unmarshal(openapi.JSON(), &g.document); err != nil {
		panic(err)
	}
	return g
}

// at follows a JSON pointer of the document.
func (g *grammar) at(pointer string) map[string]any {
	var v any = g.document
	for name := range strings.SplitSeq(strings.TrimPrefix(pointer, "#/"), "/") {
		v = v.(map[string]any)[strings.NewReplacer("~1", "/", "~0", "~").Replace(name)]
	}
	return v.(map[string]any)
}

// schema follows a reference.
func (g *grammar) schema(v any) map[string]any {
	s := v.(map[string]any)
	for s["$ref"] != nil {
		s = g.at(s["$ref"].(string))
	}
	return s
}

// body returns the schema of an operation's request.
func (g *grammar) body(op openapi.Operation) map[string]any {
	o := g.document["paths"].(map[string]any)[op.Path].(map[string]any)["post"].(map[string]any)
	return g.schema(o["requestBody"].(map[string]any)["content"].(map[string]any)["application/json"].(map[string]any)["schema"])
}

func names(m any) []string { return slices.Sorted(maps.Keys(m.(map[string]any))) }

func bound(s map[string]any, keyword string, otherwise float64) float64 {
	if v, given := s[keyword].(float64); given {
		return v
	}
	return otherwise
}

// branch returns the alternative of a oneOf for the JSON type of a value, nil where
// there is none.
func (g *grammar) branch(s map[string]any, v any) map[string]any {
	if s["oneOf"] == nil {
		return s
	}
	for _, c := range g.alternatives(s) {
		if typeOf(v) == c["type"] || c["type"] == "integer" && typeOf(v) == "number" {
			return c
		}
	}
	return nil
}

// alternatives returns those of a oneOf. The ends of a spread (x-spread) have the range
// of the number that it stands for.
func (g *grammar) alternatives(s map[string]any) []map[string]any {
	var list []map[string]any
	for _, b := range s["oneOf"].([]any) {
		list = append(list, g.schema(b))
	}
	if s["x-spread"] != true {
		return list
	}
	number := list[slices.IndexFunc(list, func(c map[string]any) bool { return c["type"] == "number" })]
	for i, c := range list {
		if c["type"] == "object" {
			c = maps.Clone(c)
			ends := maps.Clone(c["properties"].(map[string]any))
			for _, end := range []string{"min", "typ", "max"} {
				ends[end] = number
			}
			c["properties"] = ends
			list[i] = c
		}
	}
	return list
}

func typeOf(v any) string {
	switch v.(type) {
	case map[string]any:
		return "object"
	case []any:
		return "array"
	case string:
		return "string"
	case float64:
		return "number"
	case bool:
		return "boolean"
	}
	return "null"
}

// deepest is the depth below which optional members are left out.
const deepest = 6

// value writes a value that the schema accepts.
func (g *grammar) value(v any, depth int) any {
	s := g.schema(v)
	if s["oneOf"] != nil {
		list := g.alternatives(s)
		return g.value(list[g.random.IntN(len(list))], depth)
	}
	switch s["type"] {
	case "object":
		return g.object(s, depth)
	case "array":
		least := int(bound(s, "minItems", 0))
		list := make([]any, min(least+g.random.IntN(3), int(bound(s, "maxItems", 3))))
		for i := range list {
			list[i] = g.value(s["items"], depth+1)
		}
		return list
	case "string":
		return g.text(s)
	case "number", "integer":
		return g.number(s)
	case "boolean":
		return g.random.IntN(2) == 0
	}
	return "anything"
}

func (g *grammar) object(s map[string]any, depth int) map[string]any {
	out := map[string]any{}
	properties, _ := s["properties"].(map[string]any)
	required, _ := s["required"].([]any)
	for _, name := range names(properties) {
		if slices.Contains(required, any(name)) || depth < deepest && g.random.IntN(3) == 0 {
			out[name] = g.value(properties[name], depth+1)
		}
	}
	for _, name := range names(properties) {
		if len(out) < int(bound(s, "minProperties", 0)) && out[name] == nil {
			out[name] = g.value(properties[name], depth+1)
		}
		if len(out) > int(bound(s, "maxProperties", math.MaxInt32)) {
			delete(out, name)
		}
	}
	return out
}

func (g *grammar) text(s map[string]any) string {
	if list, is := s["enum"].([]any); is {
		return list[g.random.IntN(len(list))].(string)
	}
	most := int(bound(s, "maxLength", 8))
	if pattern, is := s["pattern"].(string); is {
		for {
			if v := rapid.StringMatching(pattern).Example(g.random.IntN(math.MaxInt32)); len(v) <= most {
				return v
			}
		}
	}
	const letters = "abcXYZ 019-Ωé\"\\/~<&"
	runes := []rune(letters)
	var b strings.Builder
	for range min(most, int(bound(s, "minLength", 0))+g.random.IntN(6)) {
		b.WriteRune(runes[g.random.IntN(len(runes))])
	}
	return b.String()
}

// number takes an end of the range, or something between by magnitude.
func (g *grammar) number(s map[string]any) float64 {
	least, most := bound(s, "minimum", -1e6), bound(s, "maximum", 1e6)
	v := least
	switch g.random.IntN(6) {
	case 0:
	case 1:
		v = most
	default:
		low, high := max(least, math.Min(1e-12, most)), max(most, 1e-12)
		v = math.Exp(math.Log(max(low, 1e-12)) + g.random.Float64()*(math.Log(high)-math.Log(max(low, 1e-12))))
		v = min(max(v, least), most)
		if short, err := strconv.ParseFloat(strconv.FormatFloat(v, 'g', 3, 64), 64); err == nil {
			v = min(max(short, least), most)
		}
	}
	if s["type"] == "integer" {
		v = min(max(math.Round(v), math.Ceil(least)), math.Floor(most))
	}
	return v
}

// site is a place in a document, with its schema.
type site struct {
	pointer string
	schema  map[string]any
	value   any
	put     func(any) // replaces the value
}

// sites lists every place of a document that its schema describes.
func (g *grammar) sites(s map[string]any, v any, at string, put func(any)) []site {
	s = g.branch(s, v)
	if s == nil {
		return nil
	}
	list := []site{{at, s, v, put}}
	switch v := v.(type) {
	case map[string]any:
		properties, _ := s["properties"].(map[string]any)
		for _, name := range names(v) {
			if p := properties[name]; p != nil {
				list = append(list, g.sites(g.schema(p), v[name], at+"/"+name, func(x any) { v[name] = x })...)
			}
		}
	case []any:
		for i := range v {
			list = append(list, g.sites(g.schema(s["items"]), v[i], at+"/"+strconv.Itoa(i), func(x any) { v[i] = x })...)
		}
	}
	return list
}

// vary makes a change at a random place that the contract allows: another value near
// the present one or from the whole range, a member more or less, an entry more.
func (g *grammar) vary(list []site) {
	p := list[g.random.IntN(len(list))]
	switch v := p.value.(type) {
	case float64:
		near := v * math.Exp(g.random.NormFloat64()/2)
		if least, most := bound(p.schema, "minimum", near), bound(p.schema, "maximum", near); p.schema["type"] == "number" && near >= least && near <= most && g.random.IntN(4) > 0 {
			p.put(near)
			return
		}
		p.put(g.number(p.schema))
	case map[string]any:
		g.varyMembers(p.schema, v)
	case []any:
		if len(v) < int(bound(p.schema, "maxItems", 3)) && p.schema["items"] != nil {
			p.put(append(slices.Clone(v), g.value(p.schema["items"], deepest)))
		}
	default:
		p.put(g.value(p.schema, deepest))
	}
}

func (g *grammar) varyMembers(s, v map[string]any) {
	properties, _ := s["properties"].(map[string]any)
	required, _ := s["required"].([]any)
	if len(properties) == 0 {
		return
	}
	all := names(properties)
	name := all[g.random.IntN(len(all))]
	switch {
	case v[name] == nil:
		if len(v) < int(bound(s, "maxProperties", math.MaxInt32)) {
			v[name] = g.value(properties[name], deepest-2)
		}
	case !slices.Contains(required, any(name)) && len(v) > int(bound(s, "minProperties", 0)):
		delete(v, name)
	}
}

// spoil breaks one keyword of the place's schema and returns it; "" where there is
// none to break.
func (g *grammar) spoil(p site) (keyword string) {
	var ways []string
	put := map[string]func(){}
	way := func(keyword string, change func()) {
		ways = append(ways, keyword)
		put[keyword] = change
	}
	s := p.schema
	if p.pointer != "" {
		way("type", func() { p.put(nil) })
	}
	switch v := p.value.(type) {
	case float64:
		if most, has := s["maximum"].(float64); has && most < 1e300 {
			way("maximum", func() { p.put(most + math.Max(1, math.Abs(most))) })
		}
		if least, has := s["minimum"].(float64); has {
			way("minimum", func() { p.put(least - math.Max(1, math.Abs(least))) })
		}
		if s["type"] == "integer" {
			way("integer", func() { p.put(v + 0.5) })
		}
	case string:
		if s["enum"] != nil {
			way("enum", func() { p.put("none-of-these") })
		} else if most, has := s["maxLength"].(float64); has && s["pattern"] == nil {
			way("maxLength", func() { p.put(strings.Repeat("x", int(most)+1)) })
		}
		if s["pattern"] != nil {
			way("pattern", func() { p.put("\x01 no \n") })
		}
	case []any:
		if most, has := s["maxItems"].(float64); has && most < 2000 && len(v) > 0 {
			way("maxItems", func() { p.put(slices.Repeat(v[:1], int(most)+1)) })
		}
		if s["minItems"] != nil {
			way("minItems", func() { p.put([]any{}) })
		}
	case map[string]any:
		if s["additionalProperties"] == false {
			way("additionalProperties", func() { v["not_in_the_contract"] = 1.0 })
		}
		if required, _ := s["required"].([]any); len(required) > 0 {
			way("required", func() { delete(v, required[g.random.IntN(len(required))].(string)) })
		}
	}
	if len(ways) == 0 {
		return ""
	}
	keyword = ways[g.random.IntN(len(ways))]
	put[keyword]()
	return keyword
}
