package rules

import (
	"math"
	"strings"

	"railproof/calc/parts"
	"railproof/calc/quantity"
)

// fact is one named value with what is known about it.
type fact struct {
	value   float64 // [any]
	low     float64 // [any]
	high    float64 // [any]
	banded  bool
	corner  int
	corners bool // corner is given
	by      Search
	beyond  []string
	under   Under
}

// facts are the named values of one place of a case. Values of the whole case
// are shared between its places.
type facts struct {
	shared map[string]fact
	own    map[string]fact
	words  map[string]string
	flags  map[string]bool
	pack   map[string]float64
}

func (f *facts) find(name string) (fact, bool) {
	if v, ok := f.own[name]; ok {
		return v, true
	}
	if v, ok := f.shared[name]; ok {
		return v, true
	}
	if key, ok := strings.CutPrefix(name, rootParameter); ok {
		v, ok := f.pack[key]
		return fact{value: v}, ok
	}
	return fact{}, false
}

// prepared is a case with its facts by place.
type prepared struct {
	c      *Case
	shared map[string]fact
	fields map[string]fieldRange
}

// fieldRange is a number of the stage with the ends of its spread.
type fieldRange struct{ least, typ, most float64 }

func prepare(c *Case) *prepared {
	p := &prepared{c: c, shared: make(map[string]fact, 512), fields: make(map[string]fieldRange, 96)}
	assumed := make(map[string]bool, len(c.Assumed))
	for _, a := range c.Assumed {
		assumed[a.Field] = true
	}
	for _, f := range c.Stage.Fields() {
		if v := *f.Value; parts.Known(v) && !assumed[f.ID] {
			p.fields[f.ID] = fieldRange{v, v, v}
		}
	}
	for i := range c.Spreads {
		v := &c.Spreads[i]
		if _, ok := p.fields[v.Field]; ok {
			p.fields[v.Field] = fieldRange{v.Min, v.Typ, v.Max}
		}
	}
	for id, r := range p.fields {
		if !strings.HasPrefix(id, "output_capacitors/") && !strings.HasPrefix(id, "input_capacitors/") {
			addField(p.shared, rootStage, id, r)
		}
	}
	if c.Requirement != nil {
		for _, n := range requirementNumbers(c.Requirement) {
			if parts.Known(n.value) {
				p.shared[rootRequirement+n.key] = fact{value: n.value}
			}
		}
	}
	for _, q := range quantity.All() {
		switch q.Family {
		case quantity.Single:
			p.addQuantity(p.shared, q.Key, q.ID)
		case quantity.PerOutputBank:
			p.addBanks(q, len(c.Stage.OutputCapacitors))
		case quantity.PerInputBank:
			p.addBanks(q, len(c.Stage.InputCapacitors))
		}
	}
	p.shared[rootStage+"phase_count"] = fact{value: float64(c.Stage.PhaseCount)}
	return p
}

func addField(to map[string]fact, root, id string, r fieldRange) {
	key := strings.ReplaceAll(id, "/", ".")
	bare := strings.TrimSuffix(root, ".")
	to[root+key] = fact{value: r.typ}
	to[bare+"_least."+key] = fact{value: r.least}
	to[bare+"_greatest."+key] = fact{value: r.most}
}

// addBanks makes one bank's quantity known to limits, which name it with its
// index.
func (p *prepared) addBanks(q quantity.Info, banks int) {
	for k := range banks {
		id := q.ID + quantity.ID(k)
		p.addQuantity(p.shared, id.Key(), id)
	}
}

func (p *prepared) addQuantity(to map[string]fact, key string, id quantity.ID) {
	if n := p.c.Nominal; n != nil && parts.Known(n[id]) {
		to[rootNominal+key] = fact{value: n[id], beyond: p.c.NominalUses, under: p.c.NominalUnder[id]}
	}
	put := func(name string, w Worst) {
		if parts.Known(w.Value) {
			to[name] = fact{value: w.Value, low: w.Low, high: w.High, banded: w.Banded, corner: w.Corner, corners: true, by: w.By, beyond: w.Beyond, under: w.Under}
		}
	}
	if e, ok := p.c.Extremes[id]; ok {
		put(rootLeast+key, e.Least)
		put(rootGreatest+key, e.Greatest)
	}
	if e, ok := p.c.FullLoad[id]; ok {
		put(rootFullLoadLeast+key, e.Least)
		put(rootFullLoadGreatest+key, e.Greatest)
	}
}

// at returns the facts of one place.
func (p *prepared) at(scope Scope, place int, pack map[string]float64) *facts {
	s := p.c.Stage
	f := &facts{shared: p.shared, own: map[string]fact{}, words: map[string]string{}, flags: map[string]bool{}, pack: pack}
	f.words[rootStage+"rectifier"] = rectifierNames[s.Rectifier]
	f.flags[rootStage+"has_loop"] = s.Modulator.Present && s.Compensator.Present
	f.flags[rootStage+"has_feedback"] = s.Feedback.Present
	if scope == OverStage {
		return f
	}
	tail := scope.part(place) + "/"
	for id, r := range p.fields {
		if own, ok := strings.CutPrefix(id, tail); ok {
			addField(f.own, rootPart, own, r)
		}
	}
	switch scope {
	case OverHighSide:
		f.flags[rootPart+"assumed"] = s.HighSide.Assumed
	case OverLowSide:
		f.flags[rootPart+"assumed"] = s.LowSide.Assumed
	case OverDiode:
		f.flags[rootPart+"assumed"] = s.Diode.Assumed
	case OverInductor:
		f.flags[rootPart+"assumed"] = s.Inductor.Assumed
	case OverOutputCapacitors:
		p.bank(f, &s.OutputCapacitors[place], quantity.PerOutputBank, place)
	case OverInputCapacitors:
		p.bank(f, &s.InputCapacitors[place], quantity.PerInputBank, place)
	}
	return f
}

func (p *prepared) bank(f *facts, c *parts.Capacitor, family quantity.Family, place int) {
	f.own[rootPart+"count"] = fact{value: math.Max(1, float64(c.Count))}
	if table := c.CapacitanceAtBias.X; len(table) > 0 {
		f.own[rootPart+biasEnd] = p.biasEnd(table[len(table)-1], family, place)
	}
	f.words[rootPart+"kind"] = kindNames[c.Kind]
	f.flags[rootPart+"assumed"] = c.Assumed
	for _, q := range quantity.All() {
		if q.Family == family {
			p.addQuantity(f.own, q.Key, q.ID+quantity.ID(place))
		}
	}
}

// biasEnd returns the last voltage of a bank's bias table; it is beyond its own end
// where the bank sees more.
func (p *prepared) biasEnd(end float64, family quantity.Family, place int) fact {
	seen, bank := p.c.Extremes[quantity.OutputMean].Greatest.Value, OverOutputCapacitors
	if family == quantity.PerInputBank {
		seen, bank = p.c.Extremes[quantity.BridgeVoltage].Greatest.Value, OverInputCapacitors
	}
	if seen > end {
		return fact{value: end, beyond: []string{join(p.c.StageAt, bank.part(place), biasTable)}}
	}
	return fact{value: end}
}

// rectifierNames and kindNames are the words of the wire, by value; the kind that
// nobody gave is the empty word.
var (
	rectifierNames = [...]string{"synchronous", "synchronous-emulated", "diode"}
	kindNames      = [...]string{"", "ceramic-class-1", "ceramic-class-2", "aluminium-electrolytic", "aluminium-polymer", "tantalum-solid", "tantalum-polymer", "film"}
)
