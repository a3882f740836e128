package corners

import (
	"encoding/binary"
	"errors"
	"hash/crc32"
	"math"

	"railproof/calc/evaluate"
	"railproof/calc/switched"
)

// PartJob runs the pilot and one part of the tasks of a Monte Carlo run, so that
// several machines can share it.
type PartJob struct {
	m        *MonteCarlo
	from, to int
}

// Part returns the job of one of several parts of the run, counted from 0.
func (m *MonteCarlo) Part(part, parts int) *PartJob {
	n := m.Tasks()
	return &PartJob{m, n * part / parts, n * (part + 1) / parts}
}

// Next implements Job.
func (j *PartJob) Next() Work {
	w := j.m.Next()
	switch w {
	case Work(j.m):
		return j
	case Work(&j.m.again): // for Join, which knows the worst of all parts
		return nil
	}
	return w
}

// Tasks implements Work.
func (j *PartJob) Tasks() int { return j.to - j.from }

// Run implements Work.
func (j *PartJob) Run(task, worker int, model Model) { j.m.Run(j.from+task, worker, model) }

// Counts returns what the part has counted, for Join, with a checksum in front; the
// job must have ended.
func (j *PartJob) Counts() []byte {
	b := j.m.total.append(make([]byte, checksumSize))
	binary.LittleEndian.PutUint32(b, crc32.ChecksumIEEE(b[checksumSize:]))
	return b
}

const checksumSize = 4 // [bytes]

// JoinJob ends a Monte Carlo run with what its parts have counted.
type JoinJob struct {
	m     *MonteCarlo
	parts []*tally
}

// Join returns the job that runs the pilot and takes the rest from the counts of all
// parts. Their order does not matter.
func (m *MonteCarlo) Join(counts [][]byte) (*JoinJob, error) {
	j := &JoinJob{m: m}
	for _, b := range counts {
		if len(b) < checksumSize || binary.LittleEndian.Uint32(b) != crc32.ChecksumIEEE(b[checksumSize:]) {
			return nil, errCounts
		}
		t := m.newTally()
		r := reader{b: b[checksumSize:]}
		r.tally(t)
		if r.failed || len(r.b) > 0 {
			return nil, errCounts
		}
		j.parts = append(j.parts, t)
	}
	return j, nil
}

var errCounts = errors.New("corners: counts of another run, or of another version")

// Next implements Job.
func (j *JoinJob) Next() Work {
	w := j.m.Next()
	if w != Work(j.m) {
		return w
	}
	j.m.workers = j.parts
	return j.m.Next()
}

// append writes the tally: numbers as variable-length integers, since most counts
// are small, and the bits of what is no integer.
func (t *tally) append(b []byte) []byte {
	for i := range t.sketches {
		s := &t.sketches[i]
		b = appendInts(b, s.n, s.far)
		b = appendFloats(b, s.sum, s.square, s.min, s.max)
		for _, c := range s.counts {
			b = binary.AppendUvarint(b, uint64(c))
		}
	}
	for _, list := range [][]int{t.passes, t.units, t.beyond, t.broken} {
		b = appendInts(b, list...)
	}
	for _, f := range t.failures {
		b = appendInts(b, int(f.Status), f.Corner, f.Count, f.First)
	}
	for _, kept := range t.worst {
		b = appendInts(b, len(kept))
		for _, w := range kept {
			b = appendInts(b, w.Sample, w.Corner, int(w.Status), int(w.Mode))
			b = appendFloats(b, w.Value, w.score)
		}
	}
	return b
}

func appendInts(b []byte, list ...int) []byte {
	for _, v := range list {
		b = binary.AppendUvarint(b, uint64(v))
	}
	return b
}

func appendFloats(b []byte, list ...float64) []byte {
	for _, v := range list {
		b = binary.LittleEndian.AppendUint64(b, math.Float64bits(v))
	}
	return b
}

// reader reads what append wrote; failed tells that it did not.
type reader struct {
	b      []byte
	failed bool
}

func (r *reader) tally(t *tally) {
	for i := range t.sketches {
		s := &t.sketches[i]
		r.ints(&s.n, &s.far)
		r.floats(&s.sum, &s.square, &s.min, &s.max)
		for k := range s.counts {
			s.counts[k] = uint32(r.int())
		}
	}
	for _, list := range [][]int{t.passes, t.units, t.beyond, t.broken} {
		for k := range list {
			list[k] = r.int()
		}
	}
	for i := range t.failures {
		f := &t.failures[i]
		f.Status = evaluate.Status(r.int())
		r.ints(&f.Corner, &f.Count, &f.First)
	}
	for k := range t.worst {
		for n := r.int(); n > 0 && !r.failed; n-- {
			var w WorstSample
			r.ints(&w.Sample, &w.Corner)
			w.Status, w.Mode = evaluate.Status(r.int()), switched.Mode(r.int())
			r.floats(&w.Value, &w.score)
			t.worst[k] = append(t.worst[k], w)
		}
	}
}

func (r *reader) int() int {
	v, n := binary.Uvarint(r.b)
	if n <= 0 || v > math.MaxInt64 {
		r.failed, r.b = true, nil
		return 0
	}
	r.b = r.b[n:]
	return int(v)
}

func (r *reader) ints(into ...*int) {
	for _, v := range into {
		*v = r.int()
	}
}

func (r *reader) floats(into ...*float64) {
	for _, v := range into {
		if len(r.b) < 8 {
			r.failed, r.b = true, nil
			return
		}
		*v = math.Float64frombits(binary.LittleEndian.Uint64(r.b))
		r.b = r.b[8:]
	}
}
