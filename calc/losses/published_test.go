package losses

import (
	"math"
	"testing"

	"railproof/calc/internal/calctest"
)

// published is one case of tests/reference/power-stage.json.
type published struct {
	ID, Area, Title, Source string
	Inputs                  map[string]any
	Expected                []struct {
		Name         string
		Unit         string
		Value        any
		ToleranceAbs float64 `json:"tolerance_abs"`
	}
}

// ledger checks the outcomes of one case; each must be checked or left out with a
// reason.
type ledger struct {
	t    *testing.T
	c    *published
	seen map[string]bool
}

func (l *ledger) in(name string) float64 {
	l.t.Helper()
	v, ok := l.c.Inputs[name].(float64)
	if !ok {
		l.t.Fatalf("no input %s", name)
	}
	return v
}

func (l *ledger) want(name string) (value, tolerance float64) {
	l.t.Helper()
	for _, e := range l.c.Expected {
		if e.Name == name {
			return e.Value.(float64), e.ToleranceAbs
		}
	}
	l.t.Fatalf("no outcome %s", name)
	return 0, 0
}

// got compares an outcome with the printed or recomputed value.
func (l *ledger) got(name string, value float64) {
	l.t.Helper()
	want, tolerance := l.want(name)
	l.seen[name] = true
	calctest.Within(l.t, name, value, want, tolerance)
}

// leaveOut names outcomes that do not apply, and why.
func (l *ledger) leaveOut(reason string, names ...string) {
	l.t.Helper()
	for _, name := range names {
		l.want(name)
		l.seen[name] = true
		l.t.Logf("%s left out: %s", name, reason)
	}
}

// TestPublished runs every case of the areas losses, core-loss and thermal-life.
func TestPublished(t *testing.T) {
	var cases []published
	calctest.Load(t, "power-stage.json", &cases)
	checks := map[string]func(*ledger){}
	for _, group := range []map[string]func(*ledger){publishedLosses, publishedCore, publishedThermal} {
		for id, f := range group {
			checks[id] = f
		}
	}
	for i := range cases {
		c := &cases[i]
		switch c.Area {
		case "losses", "core-loss", "thermal-life":
		default:
			continue
		}
		t.Run(c.ID+"/"+c.Title, func(t *testing.T) {
			check := checks[c.ID]
			if check == nil {
				t.Fatal("no check for this case")
			}
			delete(checks, c.ID)
			l := &ledger{t, c, map[string]bool{}}
			check(l)
			for _, e := range c.Expected {
				if !l.seen[e.Name] {
					t.Errorf("outcome %s neither checked nor left out", e.Name)
				}
			}
		})
	}
	for id := range checks {
		t.Errorf("check %s has no case", id)
	}
}

func square(x float64) float64 { return x * x }

// constantCapacitance is the charge and energy of a constant capacitance.
func constantCapacitance(c, v float64) (charge, energy float64) { return c * v, c * v * v / 2 }

func close12(l *ledger, what string, got, want float64) {
	l.t.Helper()
	calctest.Close(l.t, what, got, want, 1e-12)
}

func rms(ripple float64) float64 { return ripple / math.Sqrt(12) }
