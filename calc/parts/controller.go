package parts

// Controller drives the switches and sets timing limits.
type Controller struct {
	PartNumber       string
	Drive            float64 // [V] gate drive voltage
	GateOn           float64 // [ohm] driver plus external resistance, turn-on
	GateOff          float64 // [ohm] turn-off
	DeadTime         float64 // [s] each edge
	MinOnTime        float64 // [s]
	MinOffTime       float64 // [s]
	MaxDutyRatio     float64 // [1]
	QuiescentCurrent float64 // [A]
	DriveSupply      DriveSupply
	AuxiliaryPower   float64 // [W] drawn from the input besides
	Rating           ControllerRating
	Thermal          Thermal
}

// DriveSupply tells where the gate charge comes from.
type DriveSupply uint8

const (
	DriveFromInput    DriveSupply = iota // linear regulator from the input: Qg Vin f
	DriveFromExternal                    // a supply at the drive voltage: Qg Vdr f
	DriveFromOutput                      // the stage's own output, linear: Qg Vout f
)

// ControllerRating holds absolute maximum ratings.
type ControllerRating struct {
	Input        float64 // [V]
	JunctionDegC float64 // [degC]
}
