package wire

import (
	"railproof/calc/parts"
	"railproof/calc/stage"
)

var rectifiers = map[string]stage.Rectifier{
	"synchronous": stage.Synchronous, "synchronous-emulated": stage.SynchronousEmulated, "diode": stage.DiodeRectified,
}

var capacitorKinds = map[string]parts.CapacitorKind{
	"": parts.CapacitorUnspecified, "ceramic-class-1": parts.CeramicClass1, "ceramic-class-2": parts.CeramicClass2,
	"aluminium-electrolytic": parts.AluminiumElectrolytic, "aluminium-polymer": parts.AluminiumPolymer,
	"tantalum-solid": parts.TantalumSolid, "tantalum-polymer": parts.TantalumPolymer, "film": parts.Film,
}

var driveSupplies = map[string]parts.DriveSupply{
	"": parts.DriveFromInput, "input": parts.DriveFromInput, "external": parts.DriveFromExternal, "output": parts.DriveFromOutput,
}

var modulatorModes = map[string]parts.ModulatorMode{
	"voltage": parts.VoltageMode, "peak-current": parts.PeakCurrentMode,
}

var compensatorTypes = map[string]parts.CompensatorType{
	"op-amp-1": parts.OpAmpType1, "op-amp-2": parts.OpAmpType2, "op-amp-3": parts.OpAmpType3,
	"transconductance-2": parts.TransconductanceType2, "transconductance-3": parts.TransconductanceType3,
}

// nameOf returns the wire name of a value; the empty name is only an alias for
// the default and never returned when another exists.
func nameOf[T comparable](names map[string]T, value T) string {
	for name, v := range names {
		if v == value && name != "" {
			return name
		}
	}
	return ""
}
