package wire

import (
	"reflect"
	"slices"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/openapi"
)

// schemas pairs every wire type with its schema in the contract.
var schemas = map[string]reflect.Type{
	"Spread": reflect.TypeFor[Spread](), "Stage": reflect.TypeFor[Stage](), "Mosfet": reflect.TypeFor[MOSFET](), "MosfetRating": reflect.TypeFor[MOSFETRating](),
	"Thermal": reflect.TypeFor[Thermal](), "Diode": reflect.TypeFor[Diode](), "DiodeRating": reflect.TypeFor[DiodeRating](), "Inductor": reflect.TypeFor[Inductor](),
	"InductorRating": reflect.TypeFor[InductorRating](), "Core": reflect.TypeFor[Core](), "Steinmetz": reflect.TypeFor[Steinmetz](),
	"Capacitor": reflect.TypeFor[Capacitor](), "CapacitorRating": reflect.TypeFor[CapacitorRating](), "CapacitorLife": reflect.TypeFor[CapacitorLife](),
	"Controller": reflect.TypeFor[Controller](), "ControllerRating": reflect.TypeFor[ControllerRating](), "Modulator": reflect.TypeFor[Modulator](),
	"Compensator": reflect.TypeFor[Compensator](), "Feedback": reflect.TypeFor[Feedback](), "Board": reflect.TypeFor[Board](),
	"PhaseOverride": reflect.TypeFor[PhaseOverride](), "ThermalCoupling": reflect.TypeFor[ThermalCoupling](),
	"Point": reflect.TypeFor[Point](), "Load": reflect.TypeFor[Load](), "Control": reflect.TypeFor[Control](), "Conditions": reflect.TypeFor[Conditions](),
	"Limit": reflect.TypeFor[Limit](), "Engine": reflect.TypeFor[Engine](), "Assumption": reflect.TypeFor[Assumption](), "Caution": reflect.TypeFor[Caution](),
	"Warning": reflect.TypeFor[Warning](), "Quantities": reflect.TypeFor[Quantities](), "QuantityColumns": reflect.TypeFor[Columns](),
	"NearestOperable": reflect.TypeFor[NearestOperable](), "Runaway": reflect.TypeFor[Runaway](), "PartTemperature": reflect.TypeFor[PartTemperature](),
	"LossItem": reflect.TypeFor[LossItem](), "LossesRequest": reflect.TypeFor[LossesRequest](), "GridRequest": reflect.TypeFor[GridRequest](),
	"LossesItem": reflect.TypeFor[LossesItem](), "LossesGrid": reflect.TypeFor[LossesGrid](), "LossesAnswer": reflect.TypeFor[LossesAnswer](),
	"SteadyStateRequest": reflect.TypeFor[SteadyStateRequest](), "SteadyStateAnswer": reflect.TypeFor[SteadyStateAnswer](),
	"Requirement": reflect.TypeFor[Requirement](), "FrequencyRange": reflect.TypeFor[FrequencyRange](), "Targets": reflect.TypeFor[Targets](),
	"SizingRequest": reflect.TypeFor[SizingRequest](), "SizingChoices": reflect.TypeFor[SizingChoices](), "SizingAnswer": reflect.TypeFor[SizingAnswer](),
	"Window": reflect.TypeFor[Window](), "Bound": reflect.TypeFor[Bound](), "Corner": reflect.TypeFor[Corner](), "RequiredRating": reflect.TypeFor[RequiredRating](),
	"Conflict": reflect.TypeFor[SizingConflict](), "Divider": reflect.TypeFor[Divider](), "SizingCheck": reflect.TypeFor[SizingCheck](), "SweepRow": reflect.TypeFor[SweepRow](),
	"Equation":       reflect.TypeFor[Equation](),
	"CornersRequest": reflect.TypeFor[CornersRequest](), "CornerPoint": reflect.TypeFor[CornerPoint](), "Bias": reflect.TypeFor[Bias](), "CornersAnswer": reflect.TypeFor[CornersAnswer](),
	"SearchEffort": reflect.TypeFor[SearchEffort](), "Variable": reflect.TypeFor[Variable](), "VariableValue": reflect.TypeFor[VariableValue](), "QuantityCorners": reflect.TypeFor[QuantityCorners](),
	"WorstPoint": reflect.TypeFor[WorstPoint](), "Contribution": reflect.TypeFor[Contribution](), "TornadoBar": reflect.TypeFor[TornadoBar](), "Variance": reflect.TypeFor[Variance](),
	"VarianceShare": reflect.TypeFor[VarianceShare](), "RootSumSquare": reflect.TypeFor[RootSumSquare](), "Statistics": reflect.TypeFor[Statistics](), "QuantileValue": reflect.TypeFor[QuantileValue](),
	"Histogram": reflect.TypeFor[Histogram](), "Yield": reflect.TypeFor[Yield](), "FailureCount": reflect.TypeFor[FailureCount](), "WorstSample": reflect.TypeFor[WorstSample](),
	"Fault": reflect.TypeFor[Fault](), "QuantityInfo": reflect.TypeFor[QuantityInfo](), "QuantitiesAnswer": reflect.TypeFor[QuantitiesAnswer](),
	"Finding": reflect.TypeFor[Finding](), "FindingCounts": reflect.TypeFor[FindingCounts](), "Waiver": reflect.TypeFor[Waiver](), "PackChoice": reflect.TypeFor[PackChoice](),
	"PackUsed": reflect.TypeFor[PackUsed](), "OverrideUsed": reflect.TypeFor[OverrideUsed](), "RulePackSummary": reflect.TypeFor[RulePackSummary](), "RulePacksAnswer": reflect.TypeFor[RulePacksAnswer](),
	"RulePackAnswer": reflect.TypeFor[RulePackAnswer](), "RuleChecksRequest": reflect.TypeFor[RuleChecksRequest](), "RuleChecksAnswer": reflect.TypeFor[RuleChecksAnswer](),
	"Replacement": reflect.TypeFor[Replacement](), "RankWeights": reflect.TypeFor[RankWeights](), "RankTerms": reflect.TypeFor[RankTerms](), "SubstitutionReason": reflect.TypeFor[SubstitutionReason](),
	"SubstitutionsRequest": reflect.TypeFor[SubstitutionsRequest](), "SubstitutionsAnswer": reflect.TypeFor[SubstitutionsAnswer](), "SubstitutionItem": reflect.TypeFor[SubstitutionItem](),
	"QuantityChange": reflect.TypeFor[QuantityChange](), "FindingChange": reflect.TypeFor[FindingChange](),
	"BomChecksRequest": reflect.TypeFor[BomChecksRequest](), "Bom": reflect.TypeFor[Bom](), "BomLine": reflect.TypeFor[BomLine](), "BomCsv": reflect.TypeFor[BomCSV](), "BomColumns": reflect.TypeFor[BomColumns](),
	"Rail": reflect.TypeFor[Rail](), "Binding": reflect.TypeFor[Binding](), "Alternate": reflect.TypeFor[Alternate](), "BomChecksAnswer": reflect.TypeFor[BomChecksAnswer](),
	"BomRailResult": reflect.TypeFor[BomRailResult](), "BomRoleResult": reflect.TypeFor[BomRoleResult](), "BomAlternateResult": reflect.TypeFor[BomAlternateResult](),
	"BomLineResult": reflect.TypeFor[BomLineResult](), "BomDifference": reflect.TypeFor[BomDifference](), "BomUnboundLine": reflect.TypeFor[BomUnboundLine](),
	"PreferredSeries": reflect.TypeFor[PreferredSeries](), "PreferredValuesAnswer": reflect.TypeFor[PreferredValuesAnswer](),
}

// unsent are optional properties of the contract that no answer has yet: a
// caution's words name its quantity and source.
var unsent = []string{"aution.quantity:", "aution.source:", "autions.quantity:", "autions.source:"}

func TestWireTypesMatchTheContract(t *testing.T) {
	contract := openapi.Load()
	for name, goType := range schemas {
		t.Run(name, func(t *testing.T) {
			for _, line := range contract.CompareType(name, goType) {
				require.True(t, slices.ContainsFunc(unsent, func(tail string) bool { return strings.Contains(line, tail) }), line)
			}
		})
	}
}

func TestExampleStageFitsTheContract(t *testing.T) {
	require.Empty(t, openapi.Load().ValidateAs("Stage", exampleStage(t)))
}
