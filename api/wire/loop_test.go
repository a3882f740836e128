package wire

import (
	"reflect"
	"slices"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"

	"railproof/openapi"
)

func TestLoopAndTransientsHaveTheShapeOfTheContract(t *testing.T) {
	for name, goType := range map[string]reflect.Type{
		"LoopGainRequest": reflect.TypeFor[LoopGainRequest](), "LoopSynthesis": reflect.TypeFor[LoopSynthesis](), "InputFilter": reflect.TypeFor[InputFilter](), "FrequencyGrid": reflect.TypeFor[FrequencyGrid](),
		"LoopGainAnswer": reflect.TypeFor[LoopGainAnswer](), "SynthesisAnswer": reflect.TypeFor[SynthesisAnswer](), "LoopItem": reflect.TypeFor[LoopItem](), "Crossover": reflect.TypeFor[Crossover](),
		"PhaseCrossing": reflect.TypeFor[PhaseCrossing](), "CurrentLoop": reflect.TypeFor[CurrentLoop](), "SourceInteraction": reflect.TypeFor[SourceInteraction](), "LoopRemark": reflect.TypeFor[LoopRemark](),
		"TransientsRequest": reflect.TypeFor[TransientsRequest](), "TransientEvent": reflect.TypeFor[TransientEvent](), "TransientsAnswer": reflect.TypeFor[TransientsAnswer](), "TransientWaveforms": reflect.TypeFor[TransientWaveforms](),
		"ModelDeviation": reflect.TypeFor[ModelDeviation](), "LoopCurves": reflect.TypeFor[LoopCurves](),
	} {
		for _, line := range openapi.Load().CompareType(name, goType) {
			require.True(t, slices.ContainsFunc(unsent, func(tail string) bool { return strings.Contains(line, tail) }), "%s: %s", name, line)
		}
	}
}
