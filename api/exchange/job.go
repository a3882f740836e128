package exchange

import (
	"encoding/json"
	"time"

	"railproof/service/jobs"
)

// Job is a job as the contract shows it.
type Job struct {
	ID         string   `json:"id"`
	Operation  string   `json:"operation"`
	State      string   `json:"state"`
	Progress   Progress `json:"progress"`
	ResultID   string   `json:"result_id,omitzero"`
	Problem    *Problem `json:"problem,omitzero"`
	CreatedAt  string   `json:"created_at"`
	FinishedAt string   `json:"finished_at,omitzero"`
}

// Progress is how far a job is.
type Progress struct {
	Fraction  float64  `json:"fraction_ratio"`
	Samples   int64    `json:"samples,omitzero"`
	Rate      float64  `json:"rate_hz,omitzero"`
	Remaining *float64 `json:"remaining_s,omitzero"`
}

// JobsAnswer is a page of jobs.
type JobsAnswer struct {
	Jobs []Job  `json:"jobs"`
	Next string `json:"next,omitzero"`
}

// timeForm is RFC 3339 in milliseconds.
const timeForm = "2006-01-02T15:04:05.000Z"

// EncodeJob shows a job.
func EncodeJob(j *jobs.Job) Job {
	out := Job{
		ID: j.ID, Operation: j.Operation, State: string(j.State), CreatedAt: j.Created.UTC().Format(timeForm),
		Progress: Progress{Fraction: j.Fraction(), Samples: j.Done, Rate: j.Rate()},
	}
	if left, known := j.Remaining(); known {
		seconds := left.Round(time.Millisecond).Seconds()
		out.Progress.Remaining = &seconds
	}
	if !j.Ended.IsZero() {
		out.FinishedAt = j.Ended.UTC().Format(timeForm)
	}
	switch j.State {
	case jobs.Done:
		out.ResultID = j.ResultID
	case jobs.Failed:
		out.Problem = StoredProblem(j)
	case jobs.Waiting, jobs.Running, jobs.Cancelled:
	}
	return out
}

// StoredProblem returns why a job failed.
func StoredProblem(j *jobs.Job) *Problem {
	p := new(Problem)
	if json.Unmarshal(j.Problem, p) != nil || p.Title == "" { // no process lived to say why
		p = NewProblem(Internal, "the job was started several times and never came to an end")
	}
	for _, about := range kinds {
		if p.Type == "/docs/problems/"+string(about.Kind) {
			p.Kind = about.Kind
		}
	}
	p.Instance = j.ID
	return p
}
