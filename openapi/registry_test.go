package openapi_test

import (
	"encoding/json"
	"regexp"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/calc/evaluate"
	"railproof/calc/losses"
	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
	"railproof/openapi"
)

type schema = map[string]any

func components(t *testing.T) schema {
	t.Helper()
	var document struct {
		Components struct {
			Schemas schema `json:"schemas"`
		} `json:"components"`
	}
	require.NoError(t, json.Unmarshal(openapi.JSON(), &document))
	return document.Components.Schemas
}

var index = regexp.MustCompile(`^[0-9]+$`)

// at follows a field id such as output_capacitors/0/esr_ohm from a component.
func at(t *testing.T, all schema, component, id string) schema {
	t.Helper()
	s := all[component].(schema)
	for _, token := range regexp.MustCompile(`[^/]+`).FindAllString(id, -1) {
		if index.MatchString(token) {
			s = s["items"].(schema)
		} else {
			p, ok := s["properties"].(schema)[token]
			require.True(t, ok, "%s: the contract has no %s", id, token)
			s = p.(schema)
		}
		if ref, ok := s["$ref"].(string); ok {
			s = all[ref[len("#/components/schemas/"):]].(schema)
		}
	}
	return s
}

// Every number that a stage knows stands in the contract, takes a spread where
// the stage says so, and has the same bounds.
func TestStageFieldsAreInTheContract(t *testing.T) {
	all := components(t)
	for _, rectifier := range []stage.Rectifier{stage.Synchronous, stage.DiodeRectified} {
		for kind := parts.OpAmpType1; kind <= parts.TransconductanceType3; kind++ {
			for mode := parts.VoltageMode; mode <= parts.PeakCurrentMode; mode++ {
				s := stage.NewStage(rectifier, 1, 1, 1, true, true, true, true)
				s.Compensator.Type, s.Modulator.Mode = kind, mode
				for _, f := range s.Fields() {
					checkField(t, at(t, all, "Stage", f.ID), f)
				}
			}
		}
	}
}

func checkField(t *testing.T, s schema, f stage.Field) {
	t.Helper()
	require.Equal(t, f.Spread, s["x-spread"] == true, "%s: spread", f.ID)
	if branches, ok := s["oneOf"].([]any); ok {
		s = branches[0].(schema)
	}
	require.InDelta(t, f.Least, s["minimum"], 1e-12*max(1e-9, f.Least), "%s: least", f.ID)
	require.InDelta(t, f.Greatest, s["maximum"], 1e-9*f.Greatest, "%s: greatest", f.ID)
}

// The quantities of an answer are those of the table, with the same units.
func TestQuantitiesAreTheTable(t *testing.T) {
	all := components(t)
	properties := all["Quantities"].(schema)["properties"].(schema)
	require.Len(t, properties, len(quantity.All()), "the contract has other quantities than the table")
	for _, q := range quantity.All() {
		s := at(t, all, "Quantities", q.Key)
		column := at(t, all, "QuantityColumns", q.Key)["items"].(schema)
		if q.Family != quantity.Single {
			s, column = s["items"].(schema), column["items"].(schema)
		}
		require.Equal(t, q.Unit, s["x-unit"], q.Key)
		require.Equal(t, q.Unit, column["x-unit"], q.Key)
		require.Empty(t, openapi.Load().ValidateAs("Limit", map[string]any{"quantity": q.ID.Key(), "max": 1.0}), q.Key)
	}
}

// Loss mechanisms, parts and states are spelled as calc spells them.
func TestNamesAreThoseOfCalc(t *testing.T) {
	all := components(t)
	var mechanisms, roles, states []any
	for m := losses.Mechanism(0); m < losses.MechanismCount; m++ {
		mechanisms = append(mechanisms, m.String())
	}
	for p := losses.Part(0); p < losses.PartCount; p++ {
		roles = append(roles, p.String())
	}
	for s := evaluate.OK; s < evaluate.StatusCount; s++ {
		states = append(states, s.String())
	}
	require.Equal(t, mechanisms, at(t, all, "LossItem", "mechanism")["enum"])
	require.Equal(t, roles, at(t, all, "LossItem", "part")["enum"])
	require.Equal(t, states, at(t, all, "LossesItem", "status")["enum"])
}
