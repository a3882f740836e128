package caution

// Merge takes in what another Seen has gathered, as if its points had been added
// here one after another.
func (s *Seen) Merge(o *Seen) {
	if o.points == 0 {
		return
	}
	s.widen(o.InputPointer, o.Input, o.SourceResistance, o.Output)
	s.AddQuantities(&o.Least, &o.Greatest)
	for i, t := range o.PartDegC {
		s.PartDegC[i] = greatest(s.PartDegC[i], t)
	}
	if o.Runaway && !s.Runaway {
		s.Runaway, s.RunawayPointer = true, o.RunawayPointer
	}
}
