//go:build e2e

package e2e

import (
	"encoding/json"
	"fmt"
	"os"
	"strconv"
	"strings"
	"syscall"
	"testing"
	"time"

	"github.com/stretchr/testify/require"

	"railproof/tests/cluster"
)

// TestNight is a night's work of a caller: rails, each with its samples, one run large
// enough to be split, and the bill of material of all rails, over two replicas on
// PostgreSQL, of which one is killed half-way. RAILPROOF_NIGHT makes it 40 rails of
// 100,000 samples, a run of 200,000 and 5,000 lines. Every result must be what the program on the command
// line gives, byte for byte.
func TestNight(t *testing.T) {
	rails, samples, split, lines := 9, 500, 130_000, 500
	if os.Getenv("RAILPROOF_NIGHT") != "" {
		rails, samples, split, lines = 40, 100_000, 200_000, 5_000
	}
	c := cluster.Start(t)
	a, b := replica(t, c), replica(t, c)
	began := time.Now()
	var works []*work
	send := func(command, operation, body string) {
		base := []string{a.base, b.base}[len(works)%2]
		works = append(works, &work{command, body, begin(t, base, operation, body)})
	}
	for i := range rails {
		send("corners", "corners", rail(t, exampleRails[i%len(exampleRails)], samples, i))
	}
	send("corners", "corners", rail(t, "buoy-3v3", split, 99))
	send("bom", "bom-checks", billOf(t, rails, lines))

	half := works[len(works)/2].job
	ended(t, half, 30*time.Minute, b.base)
	require.Eventually(t, func() bool { return strings.Contains(a.log.String()+b.log.String(), `"msg":"job ended","job":"`+half) }, 10*time.Second, time.Millisecond)
	has := func(s *served, what string) int { return strings.Count(s.log.String(), `"msg":"job `+what+`"`) }
	require.Eventually(t, func() bool { return has(a, "taken") > has(a, "ended") }, 10*time.Minute, time.Millisecond, "in the middle of a job")
	require.NoError(t, a.process.Process.Signal(syscall.SIGKILL))
	_ = a.process.Wait() // killed, as asked
	t.Logf("one replica killed after %v", time.Since(began).Round(time.Millisecond))
	results := map[string]string{}
	for _, w := range works {
		results[w.job] = result(t, b.base, ended(t, w.job, 30*time.Minute, b.base))
	}
	t.Logf("%d rails of %d samples, one of %d, and a bill of %d lines: all done after %v", rails, samples, split, lines, time.Since(began).Round(time.Millisecond))

	status, list := get(t, b.base+"/v1/jobs?limit=200")
	require.Equal(t, 200, status)
	require.Equal(t, len(works), strings.Count(list, `"state":"done"`), "nothing lost, nothing twice")
	story := a.log.String() + b.log.String()
	told := func(words string) { require.True(t, strings.Contains(story, words), words) }
	told(`"msg":"jobs whose process stopped beating are run again"`)
	untold := 0
	for _, w := range works {
		told(`"msg":"job taken","job":"` + w.job)
		if strings.Contains(story, `"msg":"job ended","job":"`+w.job) {
			continue
		}
		untold++ // killed between storing the result and telling so
		require.NotContains(t, b.log.String(), `"msg":"job taken","job":"`+w.job)
	}
	require.LessOrEqual(t, untold, 2, "the jobs that the killed replica had")
	again := begin(t, b.base, "corners", works[0].body)
	require.Equal(t, works[0].job, again, "the same request is the same job")
	for _, w := range works {
		alone := railproof(t, w.body, w.command, "-")
		require.Contains(t, []int{0, 1, 4}, alone.code, "%.500s", alone.err)
		require.True(t, alone.out == results[w.job], "%s %.300s", w.job, results[w.job])
	}
	var bill struct {
		Verdict string
		Lines   []struct {
			Designators []string
			Verdict     string
		}
	}
	require.NoError(t, json.Unmarshal([]byte(results[works[len(works)-1].job]), &bill))
	require.Equal(t, "differs", bill.Verdict)
	for _, l := range bill.Lines {
		require.Equal(t, l.Designators[0] == designator("L2", wrongRail), l.Verdict == "differs", "%v %s", l.Designators, l.Verdict)
	}
}

// replica is one of the processes that share the jobs of a database.
func replica(t *testing.T, c *cluster.Cluster) *served {
	return start(t, []string{"--address", "127.0.0.1:0", "--deadline", "1m"}, "RAILPROOF_EPHEMERAL=", "RAILPROOF_POSTGRES="+c.DSN)
}

// work is a job and what it is to give.
type work struct{ command, body, job string }

var exampleRails = []string{"buoy-5v0", "buoy-3v3", "mast-12v0"}

// wrongRail is the rail of billOf of which the inductor's value is not the stage's.
const wrongRail = 4

// billOf is a bill of material of so many lines: those of the rails, each an example
// rail under designators of its own, and parts that belong to none.
func billOf(t *testing.T, rails, lines int) string {
	t.Helper()
	var bill, parts []any
	for i := range rails {
		text := example(t, exampleRails[i%len(exampleRails)]+"/bom-checks.json")
		var request map[string]any
		require.NoError(t, json.Unmarshal([]byte(text), &request))
		mark := func(v any) {
			list := v.([]any)
			for k := range list {
				list[k] = designator(list[k].(string), i)
			}
		}
		for _, v := range request["bom"].(map[string]any)["lines"].([]any) {
			line := v.(map[string]any)
			if i == wrongRail && line["designators"].([]any)[0] == "L2" {
				line["value"] = "1u 20%"
			}
			mark(line["designators"])
			line["line"] = len(bill) + 1
			bill = append(bill, line)
		}
		one := request["rails"].([]any)[0].(map[string]any)
		one["name"] = fmt.Sprintf("%s-%d", one["name"], i)
		for _, v := range one["bindings"].([]any) {
			mark(v.(map[string]any)["designators"])
		}
		delete(one, "designator_ranges")
		parts = append(parts, one)
	}
	for len(bill) < lines {
		bill = append(bill, map[string]any{"line": len(bill) + 1, "designators": []any{fmt.Sprintf("R%d", 100_000+len(bill))}, "value": "10K 1%"})
	}
	body, err := json.Marshal(map[string]any{"bom": map[string]any{"lines": bill}, "rails": parts})
	require.NoError(t, err)
	require.Less(t, len(body), 1<<20, "what a server takes by default")
	return string(body)
}

// designator moves a designator of an example into the numbers of a rail: L1 of rail 4
// is L4001.
func designator(name string, rail int) string {
	letters := strings.TrimRight(name, "0123456789")
	n, err := strconv.Atoi(name[len(letters):])
	if err != nil {
		panic(err)
	}
	return letters + strconv.Itoa(1000*rail+n)
}
