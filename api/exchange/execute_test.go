package exchange

import (
	"context"
	"encoding/json"
	"io/fs"
	"testing"
	"time"

	"github.com/stretchr/testify/require"

	"railproof/openapi"
	"railproof/service"
	"railproof/service/jobs"
)

var _ jobs.Splitter = Executor{}

// What the contract lists can be given.
func TestEveryListedFormIsGiven(t *testing.T) {
	x := New(openapi.Load(), service.New(service.Options{ContractVersion: openapi.Load().Version()}))
	for _, op := range x.contract.Operations() {
		require.Equal(t, op.MediaTypes, x.Forms(op), op.ID)
	}
}

// A fault of ours is the end of one job: the process and its other jobs go on.
func TestAPanicEndsTheJob(t *testing.T) {
	text, err := fs.ReadFile(openapi.Examples(), "buoy-3v3/corners.json")
	require.NoError(t, err)
	var broken Executor
	for name, o := range map[string]jobs.Outcome{
		"whole":  broken.Execute(t.Context(), "corners", text, new(service.Meter)),
		"merged": broken.Merge(t.Context(), "corners", text, nil),
	} {
		require.Contains(t, string(o.Problem), string(Internal), name)
		require.NotContains(t, string(o.Problem), "nil pointer", name)
		require.ErrorContains(t, o.Cause, "nil pointer", name)
		require.False(t, o.Busy, name)
	}
	_, err = broken.Part(t.Context(), "corners", text, 0, 2, new(service.Meter))
	require.ErrorContains(t, err, "nil pointer")
}

// A job of which the time is over does not begin, and says why.
func TestAJobWithoutTimeDoesNotBegin(t *testing.T) {
	e := New(openapi.Load(), service.New(service.Options{ContractVersion: openapi.Load().Version()})).Executor()
	over, cancel := context.WithTimeout(t.Context(), 0)
	defer cancel()
	for operation, example := range map[string]string{
		"sizing": "sizing", "corners": "corners", "substitutions": "substitutions", "bomChecks": "bom-checks", "reports": "reports",
	} {
		require.True(t, e.x.Computes(operation), operation)
		text, err := fs.ReadFile(openapi.Examples(), "buoy-3v3/"+example+".json")
		require.NoError(t, err)
		began := time.Now()
		o := e.Execute(over, operation, text, new(service.Meter))
		require.Contains(t, string(o.Problem), string(Deadline), operation)
		require.Less(t, time.Since(began), time.Second, operation)
	}
}

// A job that is split gives the bytes of one that is not, whatever the number of
// parts and of workers.
func TestPartsGiveTheBytesOfTheWhole(t *testing.T) {
	text, err := fs.ReadFile(openapi.Examples(), "buoy-3v3/corners.json")
	require.NoError(t, err)
	var tree map[string]any
	require.NoError(t, json.Unmarshal(text, &tree))
	samples, splits := 3000, []int{2, 7}
	if testing.Short() {
		samples, splits = 300, []int{2}
	}
	tree["samples"] = samples
	text, err = json.Marshal(tree)
	require.NoError(t, err)
	executor := func(workers int) Executor {
		return New(openapi.Load(), service.New(service.Options{ContractVersion: openapi.Load().Version(), Workers: workers})).Executor()
	}
	whole := executor(1).Execute(t.Context(), "corners", text, new(service.Meter))
	require.Nil(t, whole.Problem, "%s", whole.Problem)
	for _, parts := range splits {
		counts := make([][]byte, parts)
		drawn := int64(0)
		for i := range parts {
			m := new(service.Meter)
			counts[i], err = executor(1+i%2).Part(t.Context(), "corners", text, i, parts, m)
			require.NoError(t, err)
			done, _ := m.Progress()
			drawn += done
		}
		merged := executor(2).Merge(t.Context(), "corners", text, counts)
		require.Nil(t, merged.Problem, "%s", merged.Problem)
		require.Equal(t, whole.ResultID, merged.ResultID)
		require.Equal(t, string(whole.Answer.Body), string(merged.Answer.Body))
		require.Positive(t, drawn)
	}
}

func TestOnlyLargeRunsAreSplit(t *testing.T) {
	e := New(openapi.Load(), service.New(service.Options{})).Executor()
	text, err := fs.ReadFile(openapi.Examples(), "buoy-5v0/corners.json")
	require.NoError(t, err)
	n, evaluations := e.Parts("corners", text)
	require.Less(t, n, 2)
	require.Positive(t, evaluations)
	var tree map[string]any
	require.NoError(t, json.Unmarshal(text, &tree))
	tree["samples"] = 1_000_000
	text, err = json.Marshal(tree)
	require.NoError(t, err)
	n, evaluations = e.Parts("corners", text)
	require.Greater(t, n, 2)
	require.Greater(t, evaluations, 1_000_000)
	n, _ = e.Parts("sizing", text)
	require.Less(t, n, 2)
	n, _ = e.Parts("corners", []byte(`{}`))
	require.Less(t, n, 2)
}
