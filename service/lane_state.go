package service

// LaneState is what a lane of slots does at the moment.
type LaneState struct {
	Name    string
	Slots   int
	Busy    int   // slots taken
	Waiting int   // callers in its queue
	Refused int64 // callers turned away since the start
}

// Lanes returns the state of each lane.
func (s *Service) Lanes() []LaneState {
	names := [laneCount]string{interactive: "interactive", bulk: "bulk", deferred: "jobs"}
	states := make([]LaneState, laneCount)
	for i, l := range s.lanes {
		states[i] = LaneState{names[i], cap(l.slots), len(l.slots), int(l.waiting.Load()), l.refused.Load()}
	}
	return states
}
