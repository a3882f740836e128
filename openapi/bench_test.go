package openapi

import (
	"encoding/json"
	"io/fs"
	"testing"

	"github.com/getkin/kin-openapi/openapi3"
)

func exampleTree(b *testing.B, name string) any {
	b.Helper()
	text, err := fs.ReadFile(Examples(), name)
	if err != nil {
		b.Fatal(err)
	}
	var tree any
	if err := json.Unmarshal(text, &tree); err != nil {
		b.Fatal(err)
	}
	return tree
}

// BenchmarkRequest checks the losses request of buoy-5v0, compiled and by the
// general validator.
func BenchmarkRequest(b *testing.B) {
	tree := exampleTree(b, "buoy-5v0/losses.json")
	b.Run("compiled", func(b *testing.B) {
		b.ReportAllocs()
		for b.Loop() {
			if Load().ValidateRequest("losses", tree) != nil {
				b.Fatal("faults")
			}
		}
	})
	b.Run("general", func(b *testing.B) {
		s := loadGeneral(b).Components.Schemas["LossesRequest"].Value
		b.ReportAllocs()
		for b.Loop() {
			if s.VisitJSON(tree, openapi3.VisitAsRequest(), openapi3.DisableSchemaErrorDetails()) != nil {
				b.Fatal("faults")
			}
		}
	})
}

// answer is a wire type of about the size of a losses answer.
type answer struct {
	Items []answerItem `json:"items"`
}

type answerItem struct {
	Status string         `json:"status"`
	Losses []answerLoss   `json:"losses"`
	Parts  []answerPart   `json:"part_temperatures"`
	Point  map[string]any `json:"point"`
}

type answerLoss struct {
	Part      string  `json:"part"`
	Mechanism string  `json:"mechanism"`
	Power     float64 `json:"power_w"`
	Count     int     `json:"count"`
	Low       float64 `json:"low_w"`
	High      float64 `json:"high_w"`
}

type answerPart struct {
	Part        string   `json:"part"`
	Temperature float64  `json:"temperature_degc"`
	Rating      *float64 `json:"rating_degc,omitzero"`
}

func newAnswer(items int) *answer {
	rating := 125.0
	a := &answer{}
	for range items {
		item := answerItem{Status: "ok", Point: map[string]any{"input_v": 24.0, "ambient_degc": 25.0}}
		for range 30 {
			item.Losses = append(item.Losses, answerLoss{"high_side", "conduction", 0.0816341, 1, 0.0714321, 0.0936541})
		}
		for range 8 {
			item.Parts = append(item.Parts, answerPart{"low_side", 81.4637281, &rating})
		}
		a.Items = append(a.Items, item)
	}
	return a
}

// BenchmarkAnswer checks a list of loss items as a Go value, and its JSON tree by
// the general validator.
func BenchmarkAnswer(b *testing.B) {
	whole := loadGeneral(b).Components.Schemas["LossesAnswer"].Value.Properties["items"].Value
	n := Load().component("LossesAnswer").properties["items"]
	for _, size := range []struct {
		name  string
		items int
	}{{"20KB", 5}, {"500KB", 125}} {
		v := newAnswer(size.items).Items
		text, err := json.Marshal(v)
		if err != nil {
			b.Fatal(err)
		}
		b.Run(size.name+"/compiled", func(b *testing.B) {
			b.SetBytes(int64(len(text)))
			b.ReportAllocs()
			for b.Loop() {
				if faults := validate(n, v, &Load().plans); faults != nil {
					b.Fatal(faults)
				}
			}
		})
		b.Run(size.name+"/general", func(b *testing.B) {
			var tree any
			if err := json.Unmarshal(text, &tree); err != nil {
				b.Fatal(err)
			}
			b.SetBytes(int64(len(text)))
			b.ReportAllocs()
			for b.Loop() {
				if err := whole.VisitJSON(tree, openapi3.DisableSchemaErrorDetails()); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}

// BenchmarkLoad compiles the contract from its JSON.
func BenchmarkLoad(b *testing.B) {
	for b.Loop() {
		document, err := openapi3.NewLoader().LoadFromData(jsonBytes)
		if err != nil {
			b.Fatal(err)
		}
		compile(document)
	}
}
