package transient

import (
	"math"
	"math/rand/v2"
	"testing"

	"github.com/stretchr/testify/require"
)

func TestAnyRunEndsInANamedState(t *testing.T) {
	r := rand.New(rand.NewPCG(11, 4))
	span := func(least, greatest float64) float64 { return least * math.Pow(greatest/least, r.Float64()) }
	seen := map[Status]int{}
	for name, p := range every(t) {
		for range 25 {
			q := p
			c := &q.Compensator
			gain := span(0.1, 10)
			c.FeedbackF, c.ShuntF, c.FeedbackOhm = c.FeedbackF/gain, c.ShuntF/gain, c.FeedbackOhm*gain
			period := q.Circuit.Period
			setup := Setup{Plant: q, Bounds: bounds(&q), Duration: 150 * period, Band: 0.05, Saturation: 10, Record: Record{Points: r.IntN(300)}}
			setup.Bounds.MinOn = span(1e-9, 0.1*period)
			setup.Bounds.MinOff = span(1e-9, 0.3*period)
			setup.Bounds.MaxDuty = 0.3 + 0.7*r.Float64()
			setup.Bounds.ControlHigh *= span(0.3, 2)
			if r.IntN(2) == 0 {
				setup.Plant.Modulator.CurrentLimit = span(0.5, 20)
			}
			if r.IntN(3) == 0 {
				setup.Start = Start{Kind: AtRest, Precharge: 6 * r.Float64(), SoftStart: 100 * period * r.Float64(), LoadFrom: 5 * r.Float64()}
			}
			at := 0.0
			for range r.IntN(4) {
				at += 40 * period * r.Float64()
				e := Event{Kind: EventKind(r.IntN(3)), At: at, Slew: span(1e2, 1e8)}
				switch e.Kind {
				case LoadStep:
					e.Change = 8 * (r.Float64() - 0.3)
				case InputStep:
					e.Change = 10 * (r.Float64() - 0.5)
				case ReferenceStep:
					e.Change = 0.3 * (r.Float64() - 0.5)
				}
				if r.IntN(4) == 0 {
					e.Slew = 0
				}
				setup.Events = append(setup.Events, e)
			}
			e, err := New(&setup)
			require.NoError(t, err, "%s %+v", name, setup)
			for e.Advance(1 + r.IntN(20)) {
			}
			res := e.Result()
			seen[res.Status]++
			require.NotEqual(t, Running, res.Status)
			require.LessOrEqual(t, res.At, setup.Duration*(1+1e-12))
			last := 0.0
			for _, row := range e.Rows() {
				require.GreaterOrEqual(t, row.At, last)
				last = row.At
				require.False(t, math.IsNaN(row.Output+row.Control+row.Inductor[0]), "%s at %g: %+v", name, row.At, setup)
			}
			if res.Status != Finished {
				continue
			}
			for _, o := range res.Outcomes {
				require.False(t, math.IsNaN(o.Up+o.Down), "%+v", o)
			}
		}
	}
	t.Log(seen)
	require.Greater(t, seen[Finished], 100)
}
