package loop

import (
	"railproof/calc/statespace"
	"railproof/calc/switched"
)

// Leg tells what one phase of the bridge does.
type Leg uint8

const (
	High Leg = iota // the high side conducts
	Low             // the rectifier conducts
	Idle            // neither does: the inductor current rests at zero
)

// Legs is the state of every phase.
type Legs [switched.MaxPhases]Leg

// Inputs of a joint system.
const (
	InputLoad      = iota // [1] index of the constant-current load, amperes
	InputVoltage          // [1] of the source voltage
	InputReference        // [1] of the reference voltage
	InputOne              // [1] of the constant
	Inputs                // [1] how many
	NoInput        = -1
)

// Joint is the stage with its compensator and source as one linear system for
// each state of the switches. States: inductor currents, output bank voltages,
// source, compensator, then, if asked for, the running integral of the output
// voltage and the two states of an injected tone. The states before Network move
// by themselves while the switches follow a fixed schedule.
type Joint struct {
	Circuit    switched.Circuit
	Source     Source
	Networks   [DriveStates]Network
	Integrate  bool    // add the integral of the output voltage
	ToneRate   float64 // [rad/s] 0: no tone
	ToneInput  int     // input that the tone is added to, or NoInput: it is a state only
	N          int     // states
	Bank       int     // index of the first bank voltage
	Feed       int     // of the first source state
	Network    int     // of the first compensator state
	Integral   int     // of the integral of the output voltage
	Tone       int     // of the tone, sine then cosine
	Output     statespace.Functional
	legs       [switched.MaxPhases]switched.Leg
	compensate bool
}

// Set prepares the joint system of a plant. Without a compensator (as for the
// bare stage) only the circuit and the source remain.
func (j *Joint) Set(p *Plant, limits Limits) {
	c := &p.Circuit
	j.Circuit, j.Source = *c, p.Source
	for i := range c.Phases {
		j.legs[i] = c.Leg
		if c.Legs != nil {
			j.legs[i] = c.Legs[i]
		}
	}
	j.compensate = p.Compensator.Present
	n := 0
	if j.compensate {
		for d := range j.Networks {
			j.Networks[d].Build(&p.Compensator, &p.Feedback, Drive(d), limits)
		}
		n = j.Networks[Linear].N
	}
	j.Bank = c.Phases
	j.Feed = j.Bank + c.Banks
	j.Network = j.Feed + p.Source.states()
	j.Integral = j.Network + n
	j.Tone = j.Integral
	if j.Integrate {
		j.Tone++
	}
	j.N = j.Tone
	if j.ToneRate != 0 {
		j.N += 2
	}
	j.setOutput()
}

// setOutput fills the functional of the output voltage,
// vo = (sum of i + sum of vk/Rk - I) / (G + sum of 1/Rk).
func (j *Joint) setOutput() {
	c := &j.Circuit
	j.Output = statespace.Functional{}
	g := c.Conductance
	for k := range c.Banks {
		g += 1 / c.Bank[k].ESR
	}
	for i := range c.Phases {
		j.Output[i] = 1 / g
	}
	for k := range c.Banks {
		j.Output[j.Bank+k] = 1 / (c.Bank[k].ESR * g)
	}
	j.Output[j.N+InputLoad] = -1 / g
	if j.ToneRate != 0 && j.ToneInput == InputLoad {
		j.Output[j.Tone] = -1 / g
	}
}

// Control returns the functional of the control voltage in a drive.
func (j *Joint) Control(d Drive) statespace.Functional {
	n := &j.Networks[d]
	return j.compose(n.C[:], &n.D)
}

// Push returns the functional of what would move a held control voltage up.
func (j *Joint) Push(d Drive) statespace.Functional {
	n := &j.Networks[d]
	return j.compose(n.Push[:], &n.PushD)
}

// compose expresses a function of compensator state, output voltage, reference
// and constant in the joint state.
func (j *Joint) compose(c []float64, d *[3]float64) statespace.Functional {
	var f statespace.Functional
	for i := range j.Output {
		f[i] = d[0] * j.Output[i]
	}
	for i := range j.Networks[Linear].N {
		f[j.Network+i] += c[i]
	}
	f[j.N+InputReference] += d[1]
	f[j.N+InputOne] += d[2]
	return f
}

// Bridge returns the functional of the voltage at the bridge's input.
func (j *Joint) Bridge(legs *Legs) statespace.Functional {
	var f statespace.Functional
	s := &j.Source
	if !s.Present {
		f[j.N+InputVoltage] = 1
		return f
	}
	g := 0.0
	at := j.Feed + s.states() - s.Shunts
	for k := range s.Shunts {
		g += 1 / s.Shunt[k].ESR
		f[at+k] = 1 / s.Shunt[k].ESR
	}
	if s.Inductance > 0 {
		f[j.Feed] = 1
		if s.Damping == AcrossInductor {
			f[j.Feed+1] = 1
		}
	} else {
		g += 1 / s.Resistance
		f[j.N+InputVoltage] = 1 / s.Resistance
	}
	for i := range j.Circuit.Phases {
		if legs[i] == High {
			f[i] = -1
		}
	}
	for i := range f {
		f[i] /= g
	}
	return f
}

// Assemble sets s to the system for the given states of switches and amplifier.
func (j *Joint) Assemble(s *statespace.System, legs *Legs, drive Drive) {
	s.Reset(j.N, Inputs)
	bridge := j.Bridge(legs)
	c := &j.Circuit
	for i := range c.Phases {
		if legs[i] == Idle {
			continue
		}
		row, l := s.Row(i), &j.legs[i]
		addTo(row, &j.Output, -1/l.L)
		if legs[i] == High {
			addTo(row, &bridge, 1/l.L)
			row[i] -= (l.HighSide + l.Winding) / l.L
		} else {
			row[i] -= (l.Rectifier.Slope + l.Winding) / l.L
			row[j.N+InputOne] -= l.Rectifier.Threshold / l.L
		}
	}
	for k := range c.Banks {
		row := s.Row(j.Bank + k)
		r := 1 / (c.Bank[k].C * c.Bank[k].ESR)
		addTo(row, &j.Output, r)
		row[j.Bank+k] -= r
	}
	j.assembleNetwork(s, drive)
	j.assembleSource(s, &bridge)
	if j.Integrate {
		addTo(s.Row(j.Integral), &j.Output, 1)
	}
	if j.ToneRate != 0 {
		if j.ToneInput == InputVoltage {
			for i := range j.Tone {
				row := s.Row(i)
				row[j.Tone] += row[j.N+InputVoltage]
			}
		}
		s.Row(j.Tone)[j.Tone+1] = j.ToneRate
		s.Row(j.Tone + 1)[j.Tone] = -j.ToneRate
	}
}

func (j *Joint) assembleNetwork(s *statespace.System, drive Drive) {
	if !j.compensate {
		return
	}
	n := &j.Networks[drive]
	for i := range n.N {
		row := s.Row(j.Network + i)
		addTo(row, &j.Output, n.B[i][0])
		for k := range n.N {
			row[j.Network+k] += n.A[i][k]
		}
		row[j.N+InputReference] += n.B[i][1]
		row[j.N+InputOne] += n.B[i][2]
	}
}

func (j *Joint) assembleSource(s *statespace.System, bridge *statespace.Functional) {
	f := &j.Source
	if !f.Present {
		return
	}
	if f.Inductance > 0 {
		row := s.Row(j.Feed)
		across := *bridge // voltage at the bridge's end of the chain
		for i := range across {
			across[i] = -across[i]
		}
		across[j.N+InputVoltage]++
		across[j.Feed] -= f.Resistance
		switch f.Damping {
		case AcrossInductor:
			across[j.Feed+1] -= f.Resistance
			damp := s.Row(j.Feed + 1)
			addTo(damp, &across, 1/f.DampH)
			damp[j.Feed+1] -= f.DampOhm / f.DampH
		case InSeries:
			across[j.Feed] -= f.DampOhm
			across[j.Feed+1] += f.DampOhm
			damp := s.Row(j.Feed + 1)
			damp[j.Feed] += f.DampOhm / f.DampH
			damp[j.Feed+1] -= f.DampOhm / f.DampH
		}
		addTo(row, &across, 1/f.Inductance)
	}
	at := j.Feed + f.states() - f.Shunts
	for k := range f.Shunts {
		row := s.Row(at + k)
		r := 1 / (f.Shunt[k].C * f.Shunt[k].ESR)
		addTo(row, bridge, r)
		row[at+k] -= r
	}
}

// addTo adds a functional times scale to a row of a system.
func addTo(row []float64, f *statespace.Functional, scale float64) {
	for i := range row {
		row[i] += float64(f[i] * scale)
	}
}
