package service

import (
	"runtime"
	"sync"
	"time"

	"railproof/calc/evaluate"
	"railproof/calc/stage"
)

// Options sets the budgets of a Service; a zero field means its default.
type Options struct {
	ContractVersion string        // version of the contract that requests were checked against
	Workers         int           // slots of each lane; default: GOMAXPROCS at the time of New, at most the cores
	Jobs            int           // jobs that run at once, for which there are slots; default: as Workers
	QueueLength     int           // callers that may wait for a slot of a lane; default 64
	QueueWait       time.Duration // how long one waits before it is turned away; default 2 s
}

// slotsOfAJob is enough for the analyses that one job has going at the same time: a
// report has two.
const slotsOfAJob = 4

// Service runs the use cases. It is safe for concurrent use and keeps nothing
// between calls but the slots of its lanes and what it has counted.
type Service struct {
	engine  Engine
	workers int
	lanes   [laneCount]*lane
	cores   *cores
	done    WorkDone
	idle    sync.Pool // of *evaluate.Evaluator: each is large, and any serves any stage
}

// New returns a service with the given budgets.
func New(o Options) *Service {
	if o.Workers == 0 {
		o.Workers = min(runtime.NumCPU(), runtime.GOMAXPROCS(0))
	}
	if o.QueueLength == 0 {
		o.QueueLength = 64
	}
	if o.QueueWait == 0 {
		o.QueueWait = 2 * time.Second
	}
	s := &Service{engine: NewEngine(o.ContractVersion), workers: o.Workers, cores: newCores(o.Workers)}
	if o.Jobs == 0 {
		o.Jobs = o.Workers
	}
	slots := [laneCount]int{interactive: o.Workers, bulk: o.Workers, deferred: slotsOfAJob * o.Jobs}
	for i, n := range slots {
		s.lanes[i] = newLane(n, o.QueueLength, o.QueueWait)
	}
	return s
}

// evaluator returns one for the stage; give it back with release.
func (s *Service) evaluator(of *stage.Stage) *evaluate.Evaluator {
	if e, ok := s.idle.Get().(*evaluate.Evaluator); ok {
		e.Reset(of)
		return e
	}
	return evaluate.Prepare(of)
}

func (s *Service) release(e *evaluate.Evaluator) { s.idle.Put(e) }

// Engine names what computes the answers.
func (s *Service) Engine() Engine { return s.engine }
