package rules

import (
	"sort"
	"strings"

	"railproof/calc/parts"
	"railproof/calc/quantity"
	"railproof/calc/stage"
)

// Kind tells what a fact is.
type Kind uint8

const (
	NumberFact Kind = iota
	WordFact
	FlagFact
)

// Name is a fact that expressions of a scope may use.
type Name struct {
	Key   string
	Kind  Kind
	Unit  string   // UCUM code of a number
	Words []string // every word that a word fact can be
}

// Roots of the names. A quantity stands under the first five, a number of the
// stage under the rest with its pointer's slashes written as dots.
const (
	rootNominal          = "nominal."
	rootLeast            = "least."
	rootGreatest         = "greatest."
	rootFullLoadLeast    = "full_load_least."
	rootFullLoadGreatest = "full_load_greatest."
	rootRequirement      = "requirement."
	rootStage            = "stage."
	rootStageLeast       = "stage_least."
	rootStageGreatest    = "stage_greatest."
	rootPart             = "part."
	rootPartLeast        = "part_least."
	rootPartGreatest     = "part_greatest."
	rootParameter        = "parameter."
)

// biasEnd is the fact of a capacitor bank that tells up to which voltage its table
// capacitance_at_bias goes; without the table it is missing.
const (
	biasTable = "capacitance_at_bias"
	biasEnd   = biasTable + "_to_v"
)

// ParameterRoot is what the names of a pack's parameters begin with.
const ParameterRoot = rootParameter

// Vocabulary lists the facts that a scope's expressions may use, sorted.
//
// Every quantity has five names: nominal.X at typical values, least.X and
// greatest.X over all corners, full_load_least.X and full_load_greatest.X over
// the corners at the greatest load. A per-bank quantity is known in the scope of
// its banks only, where it is the bank's own. stage.F is the typical value of a
// field, stage_least.F and stage_greatest.F the ends of its spread; part.F and
// its siblings are the fields of the part in scope; requirement.F those of the
// requirement.
func Vocabulary(scope Scope) []Name {
	var names []Name
	number := func(key, unit string) { names = append(names, Name{Key: key, Unit: unit}) }
	for _, q := range quantity.All() {
		if inScope(q.Family, scope) {
			for _, root := range []string{rootNominal, rootLeast, rootGreatest, rootFullLoadLeast, rootFullLoadGreatest} {
				number(root+q.Key, q.Unit)
			}
		}
	}
	for _, r := range requirementNumbers(&stage.Requirement{}) {
		unit, _ := unitOfField(r.key)
		number(rootRequirement+r.key, unit)
	}
	tail := strings.TrimSuffix(scope.String(), "*")
	for id, spreads := range allFields() {
		unit, ok := unitOfField(id)
		if !ok {
			continue
		}
		field := func(root, id string) {
			key := strings.ReplaceAll(id, "/", ".")
			number(root+key, unit)
			if spreads {
				number(strings.TrimSuffix(root, ".")+"_least."+key, unit)
				number(strings.TrimSuffix(root, ".")+"_greatest."+key, unit)
			}
		}
		if !strings.HasPrefix(id, "output_capacitors/") && !strings.HasPrefix(id, "input_capacitors/") {
			field(rootStage, id)
		}
		if own, found := strings.CutPrefix(strings.Replace(id, "/0/", "/", 1), strings.TrimSuffix(tail, "/")+"/"); found && scope != OverStage {
			field(rootPart, own)
		}
	}
	number(rootStage+"phase_count", "1")
	names = append(names,
		Name{Key: rootStage + "rectifier", Kind: WordFact, Words: rectifierNames[:]},
		Name{Key: rootStage + "has_loop", Kind: FlagFact},
		Name{Key: rootStage + "has_feedback", Kind: FlagFact})
	if scope == OverOutputCapacitors || scope == OverInputCapacitors {
		number(rootPart+"count", "1")
		number(rootPart+biasEnd, "V")
		names = append(names, Name{Key: rootPart + "kind", Kind: WordFact, Words: kindNames[1:]})
	}
	if scope != OverStage && scope != OverController {
		names = append(names, Name{Key: rootPart + "assumed", Kind: FlagFact})
	}
	sort.Slice(names, func(i, j int) bool { return names[i].Key < names[j].Key })
	return names
}

func inScope(f quantity.Family, s Scope) bool {
	switch f {
	case quantity.PerOutputBank:
		return s == OverOutputCapacitors
	case quantity.PerInputBank:
		return s == OverInputCapacitors
	}
	return true
}

// allFields returns the id of every field that some topology has, and whether it
// takes a spread.
func allFields() map[string]bool {
	all := map[string]bool{}
	for _, r := range []stage.Rectifier{stage.Synchronous, stage.DiodeRectified} {
		for mode := parts.VoltageMode; mode <= parts.PeakCurrentMode; mode++ {
			for kind := parts.OpAmpType1; kind <= parts.TransconductanceType3; kind++ {
				s := stage.NewStage(r, 1, 1, 0, true, true, true, true)
				s.Modulator.Mode, s.Compensator.Type = mode, kind
				for _, f := range s.Fields() {
					all[f.ID] = f.Spread
				}
			}
		}
	}
	return all
}

type named struct {
	key   string
	value float64 // [any] in the unit of the key
}

// requirementNumbers lists the numbers of a requirement under their pointers'
// dotted form.
func requirementNumbers(r *stage.Requirement) []named {
	t := &r.Targets
	return []named{
		{"input.min_v", r.Input.Min},
		{"input.typ_v", r.Input.Typ},
		{"input.max_v", r.Input.Max},
		{"input.source_ohm", r.SourceResistance},
		{"output.voltage_v", r.Output},
		{"output.tolerance_ratio", r.OutputTolerance},
		{"load.min_a", r.LoadCurrent.Min},
		{"load.typ_a", r.LoadCurrent.Typ},
		{"load.max_a", r.LoadCurrent.Max},
		{"ambient.min_degc", r.AmbientDegC.Min},
		{"ambient.typ_degc", r.AmbientDegC.Typ},
		{"ambient.max_degc", r.AmbientDegC.Max},
		{"switching_frequency.min_hz", r.SwitchingFrequency.Min},
		{"switching_frequency.max_hz", r.SwitchingFrequency.Max},
		{"targets.inductor_ripple_ratio", t.InductorRippleRatio},
		{"targets.output_ripple_pp_v", t.OutputRipple},
		{"targets.input_ripple_pp_v", t.InputRipple},
		{"targets.continuous_down_to_a", t.ContinuousDownTo},
		{"targets.load_step.step_a", t.LoadStep.Step},
		{"targets.load_step.slew_a_per_s", t.LoadStep.Slew},
		{"targets.load_step.deviation_v", t.LoadStep.Deviation},
		{"targets.load_step.recovery_s", t.LoadStep.Recovery},
		{"targets.hold_up.time_s", t.HoldUp.Time},
		{"targets.hold_up.to_v", t.HoldUp.To},
		{"targets.efficiency_ratio", t.Efficiency},
		{"targets.junction_degc", t.JunctionDegC},
		{"targets.life_s", t.Life},
	}
}
