package sizing

// What the tests' brute-force grids are built from: the placeholders' technology.
var (
	SwitchPlaceholder   = switchPlaceholder
	InductorPlaceholder = inductorPlaceholder
	WindingLeast        = windingLeast
	Coolings            = coolings
	LossyEnd            = lossyEnd
)

// Grades lists tolerances of reference and resistors.
func Grades() (g [][2]float64) {
	for _, a := range grades {
		g = append(g, [2]float64{a.reference, a.resistor})
	}
	return g
}

// ModelMargin is what the closed forms are held to against the exact engine.
const ModelMargin = modelMargin

// RecoverySlowness is the time of the fastest recovery per ampere and henry.
var RecoverySlowness = recoverySlowness
