package validate

import (
	"context"
	"fmt"
	"math/rand/v2"
	"os"
	"path/filepath"
	"runtime"
	"testing"
	"time"

	"lagwright/data"
	"lagwright/fit"
)

// heapDuring replays n files on the plants and returns the largest heap in
// use seen on the way, in MB.
func heapDuring(t *testing.T, n, rows, plants int) float64 {
	t.Helper()
	dir := t.TempDir()
	var files []string
	for i := range n {
		name := filepath.Join(dir, fmt.Sprintf("r%05d.csv", i))
		if err := os.WriteFile(name, []byte(name), 0o600); err != nil {
			t.Fatal(err)
		}
		files = append(files, name)
	}
	plant := mustPlant(t, "chain3", 8, []float64{6, 2, 0.3}, 1.23)
	card := cardOf(t, "linear", fit.Noise{SD: 0.1, WhiteSD: 0.1}, plant, plausible(t, plant, plants, 0.03, 1)...)
	read := func(_ context.Context, file string) ([]*data.Run, error) {
		rng := rand.New(rand.NewPCG(uint64(len(file)), 1))
		run := &data.Run{Source: data.Source{File: filepath.Base(file)}}
		for i := range rows {
			run.T = append(run.T, float64(i)*0.1)
			run.U = append(run.U, 4)
			run.Y = append(run.Y, 60+0.1*rng.NormFloat64())
			run.Setpoint = append(run.Setpoint, 60+10*float64(min(1, 4*i/rows)))
		}
		return []*data.Run{run}, nil
	}
	gains := piGains(0.2, 8, 0.1)
	gains.Requirement.Settling = ptr(30)
	peak := uint64(0)
	start := time.Now()
	r, err := ReplayFiles(context.Background(), card, files, read, gains, Options{
		Journal: filepath.Join(dir, "journal"), Traces: true,
		Progress: func(done, _ int) {
			if done%10 == 0 {
				var m runtime.MemStats
				runtime.ReadMemStats(&m)
				peak = max(peak, m.HeapInuse)
			}
		},
	})
	if err != nil || len(r.Runs) != n {
		t.Fatalf("%d runs, %v", len(r.Runs), err)
	}
	took := time.Since(start)
	t.Logf("%d runs × %d rows × %d plants: %.1f s, %.1f ns a step, heap at most %.1f MB", n, rows, plants,
		took.Seconds(), float64(took)/float64(n*rows*plants), float64(peak)/1e6)
	return float64(peak) / 1e6
}

// The memory of a long job is that of the logs being worked at and about 2 kB
// of result a run.
func TestLongJobMemory(t *testing.T) {
	small, large, rows, plants := 60, 400, 500, 10
	if os.Getenv("LAGWRIGHT_LONG") != "" {
		large, rows, plants = 10000, 2000, 100
	}
	a, b := heapDuring(t, small, rows, plants), heapDuring(t, large, rows, plants)
	if allowed := a + 15 + 0.006*float64(large); b > allowed { // collector's slack and 2 kB a run, twice in flight
		t.Errorf("%d runs take %.0f MB, %d take %.0f MB: want at most %.0f", small, a, large, b, allowed)
	}
}

// Series are kept for the 12 runs least likely to meet the requirement, and
// for no other.
func TestTracesOfTheWorst(t *testing.T) {
	files := seedFiles(t, t.TempDir(), 60)
	card, gains := seedJob(t)
	r, err := ReplayFiles(context.Background(), card, files, readSeed, gains, Options{Traces: true})
	if err != nil {
		t.Fatal(err)
	}
	for i, run := range r.worstFirst() {
		if (run.Trace != nil) != (i < maxTraced) {
			t.Errorf("run %d from the worst has a trace: %v", i, run.Trace != nil)
		}
	}
}
