package parts

import (
	"math"
	"testing"

	"pgregory.net/rapid"

	"railproof/calc/internal/calctest"
)

func ceramic() *Capacitor {
	return &Capacitor{
		Capacitance: 22e-6, Count: 4, ESR: 3e-3, ESL: 4e-10, Kind: CeramicClass2,
		CapacitanceAtBias: table(0, 1, 5, 0.82, 10, 0.5),
		CapacitanceTemp:   table(-40, 0.9, 25, 1, 125, 0.85),
		CapacitanceAgeing: table(0, 1, 1, 0.9),
		ESRTemp:           table(-40, 1.2, 25, 1, 125, 0.9),
		ESRAgeing:         table(0, 1, 1, 1.5),
	}
}

func TestBankValues(t *testing.T) {
	c := ceramic()
	calctest.Close(t, "losses of capacitance multiply", c.CapacitanceAt(5, 125, 1), 4*22e-6*0.82*0.85*0.9, 1e-12)
	calctest.Close(t, "reversed bias as forward", c.CapacitanceAt(-5, 25, 0), c.CapacitanceAt(5, 25, 0), 1e-15)
	calctest.Close(t, "bias goes on falling", c.CapacitanceAt(15, 25, 0), 88e-6*0.18, 1e-12)
	calctest.Close(t, "to the floor", c.CapacitanceAt(30, 25, 0), 88e-6*0.1, 1e-12)
	r, slope := c.ESRAt(75, 1)
	calctest.Close(t, "series resistance", r, 3e-3/4*1.5*0.95, 1e-12)
	calctest.Close(t, "its slope", slope, -3e-3/4*1.5*0.001, 1e-9)
	calctest.Close(t, "series inductance", c.BankESL(), 1e-10, 1e-15)
	plain := &Capacitor{Capacitance: 1e-6, ESR: 1e-2}
	calctest.Close(t, "an unset count is one piece", plain.CapacitanceAt(3, 90, 1), 1e-6, 1e-15)
}

func TestChargeAndEnergyAreIntegralsOverBias(t *testing.T) {
	c := ceramic()
	small := func(v float64) float64 { return c.CapacitanceAt(v, 60, 0.3) }
	for _, s := range [][2]float64{{0, 4}, {4, 9}, {9, 4}, {3, 25}, {-6, 8}, {18, 30}} {
		calctest.Close(t, "charge", c.ChargeBetween(s[0], s[1], 60, 0.3), integrate(small, s[0], s[1]), 1e-6)
		calctest.Close(t, "energy", c.EnergyBetween(s[0], s[1], 60, 0.3), integrate(func(v float64) float64 { return v * small(v) }, s[0], s[1]), 1e-6)
		calctest.Close(t, "mean", c.CapacitanceBetween(s[0], s[1], 60, 0.3), integrate(small, s[0], s[1])/(s[1]-s[0]), 1e-6)
	}
	calctest.Close(t, "vanishing step", c.CapacitanceBetween(7, 7, 60, 0.3), small(7), 1e-12)
}

func TestCapacitorProperties(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		c := ceramic()
		v := rapid.Float64Range(-60, 60).Draw(t, "v")
		degC := rapid.Float64Range(-100, 300).Draw(t, "degC")
		age := rapid.Float64Range(0, 2).Draw(t, "age")
		value := c.CapacitanceAt(v, degC, age)
		if !(value > 0 && value <= 88e-6*1.2) {
			t.Fatalf("capacitance %g", value)
		}
		if more := c.CapacitanceAt(math.Abs(v)+1, degC, age); more > value {
			t.Fatalf("more bias, more capacitance: %g to %g", value, more)
		}
		if r, _ := c.ESRAt(degC, age); !(r > 0) {
			t.Fatalf("series resistance %g", r)
		}
		if e := c.EnergyBetween(0, v, degC, age); e < 0 || e > 0.5*88e-6*1.2*v*v+1e-18 {
			t.Fatalf("energy %g at %g V", e, v)
		}
	})
}

func electrolytic() *Capacitor {
	return &Capacitor{
		Capacitance: 100e-6, Count: 2, ESR: 0.1, Kind: AluminiumElectrolytic,
		Rating: CapacitorRating{Voltage: 50, RippleCurrent: 0.8, TemperatureDegC: 105},
		Life:   CapacitorLife{Rated: 5000 * 3600, RatedRise: 5, FrequencyFactor: 1.2},
	}
}

func TestElectrolyticLife(t *testing.T) {
	c := electrolytic()
	calctest.Close(t, "rise at rated ripple of each piece", c.RippleRise(2*0.8*1.2), 5, 1e-12)
	calctest.Close(t, "a quarter at half", c.RippleRise(0.8*1.2), 1.25, 1e-12)
	calctest.Close(t, "rated life at rated temperature and ripple", c.LifeAt(105, 5), 5000*3600, 1e-12)
	calctest.Close(t, "double for 10 K less", c.LifeAt(95, 5), 2*5000*3600, 1e-12)
	if life := c.LifeAt(60, 40); life != 0 {
		t.Errorf("beyond the rule's range of rise: life %g", life)
	}
	for rise := 0.0; rise < 39; rise += 3 {
		if a, b := c.LifeAt(70, rise), c.LifeAt(70, rise+1); !(b < a) {
			t.Errorf("more ripple, longer life: %g to %g", a, b)
		}
	}
}

func TestLifeIsUnknownWithoutEndurance(t *testing.T) {
	for name, spoil := range map[string]func(*Capacitor){
		"ceramic":              func(c *Capacitor) { c.Kind = CeramicClass2 },
		"no endurance":         func(c *Capacitor) { c.Life.Rated = Unknown },
		"no rated temperature": func(c *Capacitor) { c.Rating.TemperatureDegC = Unknown },
	} {
		c := electrolytic()
		spoil(c)
		if life := c.LifeAt(60, 1); Known(life) {
			t.Errorf("%s: life %g", name, life)
		}
	}
	c := electrolytic()
	c.Rating.RippleCurrent = Unknown
	if rise := c.RippleRise(1); Known(rise) {
		t.Errorf("no ripple rating: rise %g", rise)
	}
}

func TestArrheniusAgreesWithHalvingAtOneTemperatureOnly(t *testing.T) {
	calctest.Within(t, "0.81 eV, 100 to 90 degC", ArrheniusAcceleration(0.81, 100, 90), 2, 0.01)
	calctest.Within(t, "0.70 eV, 75 to 65 degC", ArrheniusAcceleration(0.70, 75, 65), 2, 0.02)
	if far := ArrheniusAcceleration(0.81, 105, 45); far < 64*1.1 {
		t.Errorf("0.81 eV from 105 to 45 degC: %g, must exceed the 64 of six halvings clearly", far)
	}
}

func TestBeyondNamesTheTable(t *testing.T) {
	m := &MOSFET{OnResistanceTemp: table(25, 1, 125, 1.5), OnResistanceDrive: table(4, 1.2, 10, 1), OutputChargeTable: table(0, 0, 40, 1e-8)}
	d := &Diode{Leakage: table(25, 1e-5, 125, 1e-2)}
	l := saturating()
	l.Core = Core{Present: true, Temp: table(25, 1.3, 90, 1)}
	c := ceramic()
	for _, k := range []struct {
		name string
		got  Beyond
		want []string
	}{
		{"switch inside", m.Beyond(80, 5, 24), nil},
		{"switch at the very ends", m.Beyond(125, 10, 40), nil},
		{"hot switch", m.Beyond(126, 5, 24), []string{"on_resistance_temp"}},
		{"weak drive, high voltage", m.Beyond(80, 3, 41), []string{"on_resistance_drive", "output_charge_table"}},
		{"hot diode", d.Beyond(130), []string{"leakage"}},
		{"peak beyond the curve, cold core", l.Beyond(-1, 15, 20), []string{"inductance_at_current", "core/temp"}},
		{"valley beyond the curve", l.Beyond(-15, 1, 60), []string{"inductance_at_current"}},
		{"bank inside", c.Beyond(5, 60, 0.5), nil},
		{"bias", c.Beyond(11, 60, 0.5), []string{"capacitance_at_bias"}},
		{"hot and old", c.Beyond(5, 130, 1.5), []string{"capacitance_temp", "esr_temp", "ageing"}},
	} {
		got := k.got.Fields()
		if len(got) != len(k.want) {
			t.Errorf("%s: %v, want %v", k.name, got, k.want)
			continue
		}
		for i := range got {
			if got[i] != k.want[i] {
				t.Errorf("%s: %v, want %v", k.name, got, k.want)
			}
		}
	}
}
