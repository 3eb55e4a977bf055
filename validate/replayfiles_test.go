package validate

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"sync/atomic"
	"testing"
	"time"

	"lagwright/data"
	"lagwright/fit"
	"lagwright/ident"
	"lagwright/tune"
)

// seedFiles writes n files that each hold the seed of a run; every 97th is bad.
func seedFiles(t testing.TB, dir string, n int) []string {
	t.Helper()
	var files []string
	for i := range n {
		name := filepath.Join(dir, fmt.Sprintf("run%04d.csv", i))
		text := strconv.Itoa(i)
		if i%97 == 96 {
			text = "not a log"
		}
		if err := os.WriteFile(name, []byte(text), 0o600); err != nil {
			t.Fatal(err)
		}
		files = append(files, name)
	}
	return files
}

// readSeed makes the run that a seed file stands for.
func readSeed(_ context.Context, file string) ([]*data.Run, error) {
	text, err := os.ReadFile(file)
	if err != nil {
		return nil, err
	}
	seed, err := strconv.Atoi(string(text))
	if err != nil {
		return nil, errors.New("line 1: not a log")
	}
	id, _ := identify(file)
	rng := rand.New(rand.NewPCG(uint64(seed), 1))
	run := &data.Run{Source: data.Source{File: filepath.Base(file), SHA256: id.sha}, Units: data.Units{Input: "V", Temperature: "degC"}}
	for i := range 80 {
		run.T = append(run.T, float64(i))
		run.U = append(run.U, 4)
		run.Y = append(run.Y, 60+rng.NormFloat64())
		run.Setpoint = append(run.Setpoint, 60+10*float64(min(1, i/20)))
	}
	return []*data.Run{run}, nil
}

func seedJob(t testing.TB) (*fit.Card, *tune.Gains) {
	plant := mustPlant(t, "chain2", 8, []float64{6, 2}, 1.2)
	gains := piGains(0.1, 8, 1)
	gains.Requirement.Settling = ptr(30)
	return cardOf(t, "linear", fit.Noise{SD: 1, WhiteSD: 1}, plant, plausible(t, plant, 8, 0.05, 1)...), gains
}

func jsonOf(t testing.TB, r *Replay) []byte {
	t.Helper()
	var b bytes.Buffer
	if err := r.WriteJSON(&b); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

// One bad file is listed and stops nothing; runs stand in the order of the
// files; the bytes do not depend on the workers.
func TestReplayFiles(t *testing.T) {
	files := seedFiles(t, t.TempDir(), 100)
	files = append(files, filepath.Join(t.TempDir(), "missing.csv"))
	card, gains := seedJob(t)
	var want []byte
	for _, workers := range []int{1, 4} {
		var calls atomic.Int64
		r, err := ReplayFiles(context.Background(), card, files, readSeed, gains, Options{Workers: workers, Progress: func(done, total int) {
			if calls.Add(1) != int64(done) || total != 101 {
				t.Errorf("progress %d of %d at call %d", done, total, calls.Load())
			}
		}})
		if err != nil {
			t.Fatal(err)
		}
		if len(r.Runs) != 99 || len(r.Failed) != 2 || r.Failed[0] != (FailedRun{"run0096.csv", "line 1: not a log"}) || calls.Load() != 101 {
			t.Fatalf("%d runs, failed %+v, %d calls of progress", len(r.Runs), r.Failed, calls.Load())
		}
		for i := 1; i < len(r.Runs); i++ {
			if r.Runs[i].File <= r.Runs[i-1].File {
				t.Fatalf("%s after %s", r.Runs[i].File, r.Runs[i-1].File)
			}
		}
		if want == nil {
			want = jsonOf(t, r)
		} else if !bytes.Equal(want, jsonOf(t, r)) {
			t.Error("other bytes with 4 workers")
		}
	}
}

// A panic over one file, as a damaged file can cause deep in a reader, fails
// that file only.
func TestReplayFilesSurvivesAPanic(t *testing.T) {
	files := seedFiles(t, t.TempDir(), 5)
	card, gains := seedJob(t)
	r, err := ReplayFiles(context.Background(), card, files, func(ctx context.Context, file string) ([]*data.Run, error) {
		if strings.HasSuffix(file, "2.csv") {
			panic("damaged page")
		}
		return readSeed(ctx, file)
	}, gains, Options{})
	if err != nil || len(r.Runs) != 4 || len(r.Failed) != 1 || !strings.Contains(r.Failed[0].Reason, "damaged page") {
		t.Errorf("%+v, %v", r, err)
	}
}

const (
	childJournal = "LAGWRIGHT_TEST_JOURNAL"
	childFiles   = "LAGWRIGHT_TEST_FILES"
)

// TestKilledChild is the process that TestKillAndResume kills.
func TestKilledChild(t *testing.T) {
	path := os.Getenv(childJournal)
	if path == "" {
		t.Skip("runs only as the child of TestKillAndResume")
	}
	files, err := filepath.Glob(filepath.Join(os.Getenv(childFiles), "*.csv"))
	if err != nil {
		t.Fatal(err)
	}
	card, gains := seedJob(t)
	if _, err := ReplayFiles(context.Background(), card, files, readSeed, gains, Options{Workers: 2, Journal: path}); err != nil {
		t.Fatal(err)
	}
}

// Killed with SIGKILL in the middle of 1,000 runs and gone on with, the job
// gives the bytes of one that was left alone, and does not repeat what was done.
func TestKillAndResume(t *testing.T) {
	dir := t.TempDir()
	logs := filepath.Join(dir, "logs")
	if err := os.Mkdir(logs, 0o700); err != nil {
		t.Fatal(err)
	}
	files := seedFiles(t, logs, 1000)
	path := filepath.Join(dir, "replay.json.journal")
	child := exec.Command(os.Args[0], "-test.run=^TestKilledChild$")
	child.Env = append(os.Environ(), childJournal+"="+path, childFiles+"="+logs)
	if err := child.Start(); err != nil {
		t.Fatal(err)
	}
	lines := func() int {
		b, _ := os.ReadFile(path)
		return bytes.Count(b, []byte("\n"))
	}
	for deadline := time.Now().Add(60 * time.Second); lines() < 200; time.Sleep(time.Millisecond) {
		if time.Now().After(deadline) {
			t.Fatal("the child has not done 200 runs in a minute")
		}
	}
	if err := child.Process.Kill(); err != nil {
		t.Fatal(err)
	}
	if err := child.Wait(); err == nil {
		t.Fatal("the child was done before it could be killed")
	}
	done := lines() - 1
	if done >= 1000 {
		t.Fatal("nothing is left to go on with")
	}
	if f, err := os.OpenFile(path, os.O_APPEND|os.O_WRONLY, 0); err != nil {
		t.Fatal(err)
	} else if _, err := f.WriteString(`{"file":"run0999.csv","sha`); err != nil || f.Close() != nil { // torn
		t.Fatal(err)
	}

	card, gains := seedJob(t)
	if _, err := ReplayFiles(context.Background(), card, files, readSeed, gains, Options{Journal: path}); !errors.Is(err, ErrJournal) {
		t.Errorf("without resume a journal is overwritten: %v", err)
	}
	var read atomic.Int64
	counted := func(ctx context.Context, file string) ([]*data.Run, error) {
		read.Add(1)
		return readSeed(ctx, file)
	}
	resumed, err := ReplayFiles(context.Background(), card, files, counted, gains, Options{Journal: path, Resume: true})
	if err != nil {
		t.Fatal(err)
	}
	undisturbed, err := ReplayFiles(context.Background(), card, files, readSeed, gains, Options{})
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(jsonOf(t, resumed), jsonOf(t, undisturbed)) {
		t.Error("a killed and resumed job gives other bytes than an undisturbed one")
	}
	if int(read.Load()) != 1000-done {
		t.Errorf("%d files read on resuming, want %d", read.Load(), 1000-done)
	}

	other := *gains
	other.Kc *= 2
	if _, err := ReplayFiles(context.Background(), card, files, readSeed, &other, Options{Journal: path, Resume: true}); !errors.Is(err, ErrJournal) {
		t.Errorf("other gains go on with this journal: %v", err)
	}
}

// With a finished result at hand only what is new or failed is read again.
func TestResumeFromResult(t *testing.T) {
	files := seedFiles(t, t.TempDir(), 100)
	card, gains := seedJob(t)
	old, err := ReplayFiles(context.Background(), card, files[:60], readSeed, gains, Options{})
	if err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(files[7], []byte("7007"), 0o600); err != nil { // changed since
		t.Fatal(err)
	}
	whole, err := ReplayFiles(context.Background(), card, files, readSeed, gains, Options{})
	if err != nil {
		t.Fatal(err)
	}
	var read atomic.Int64
	r, err := ReplayFiles(context.Background(), card, files, func(ctx context.Context, file string) ([]*data.Run, error) {
		read.Add(1)
		return readSeed(ctx, file)
	}, gains, Options{Resume: true, Previous: old})
	if err != nil {
		t.Fatal(err)
	}
	if read.Load() != 41 || !bytes.Equal(jsonOf(t, r), jsonOf(t, whole)) {
		t.Errorf("%d files read, want 41; same bytes: %v", read.Load(), bytes.Equal(jsonOf(t, r), jsonOf(t, whole)))
	}
}

// Cancelling stops the job with the cause and leaves the journal.
func TestReplayFilesCancelled(t *testing.T) {
	dir := t.TempDir()
	files := seedFiles(t, dir, 50)
	card, gains := seedJob(t)
	ctx, cancel := context.WithCancel(context.Background())
	path := filepath.Join(dir, "journal")
	_, err := ReplayFiles(ctx, card, files, readSeed, gains, Options{Journal: path, Workers: 1, Progress: func(done, _ int) {
		if done == 10 {
			cancel()
		}
	}})
	if !errors.Is(err, context.Canceled) {
		t.Errorf("error %v, want %v", err, context.Canceled)
	}
	if b, err := os.ReadFile(path); err != nil || bytes.Count(b, []byte("\n")) != 11 {
		t.Errorf("journal of %d lines, %v; want 11", bytes.Count(b, []byte("\n")), err)
	}
}

// A journal with something else in it is neither read nor overwritten.
func TestForeignJournal(t *testing.T) {
	dir := t.TempDir()
	files := seedFiles(t, dir, 3)
	card, gains := seedJob(t)
	path := filepath.Join(dir, "notes.txt")
	const text = "measured on Monday\n"
	if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	for _, resume := range []bool{false, true} {
		if _, err := ReplayFiles(context.Background(), card, files, readSeed, gains, Options{Journal: path, Resume: resume}); !errors.Is(err, ErrJournal) {
			t.Errorf("resume %v: %v, want an error about the journal", resume, err)
		}
	}
	if b, err := os.ReadFile(path); err != nil || string(b) != text {
		t.Errorf("the file now holds %q, %v", b, err)
	}
}

// The uneven way costs more; both give one answer (see also TestScansBetweenRows).
func TestUnevenRows(t *testing.T) {
	plant := mustPlant(t, "chain2", 8, []float64{6, 2}, 1.3)
	rng := rand.New(rand.NewPCG(2, 2))
	run := &data.Run{}
	at := 0.0
	for i := range 300 {
		run.T = append(run.T, at)
		at += 0.5 + 0.2*rng.Float64()
		run.U = append(run.U, 4+float64(min(1, i/50)))
		run.Setpoint = append(run.Setpoint, 60+10*float64(min(1, i/60)))
	}
	run.Y = ident.NewSimulator(run.T, ident.HeldInput(run.T, run.U, ident.Linear)).Response(nil, plant.Structure, plant.Lags, plant.DeadTime)
	for i := range run.Y {
		run.Y[i] = 60 + plant.Gain*run.Y[i]
	}
	gains := piGains(0.2, 8, 0.25)
	p, err := newPlan(cardOf(t, "linear", fit.Noise{}, plant), gains, Options{})
	if err != nil {
		t.Fatal(err)
	}
	c, err := newCourse(run, segment{0, 300, 0}, p)
	if err != nil || c.even {
		t.Fatalf("even %v, %v", c.even, err)
	}
	y, u := make([]float64, 300), make([]float64, 300)
	if err := newRunner(p.law, p.gains, p.plants).replay(c, 0, y, u); err != nil {
		t.Fatal(err)
	}
	// without disturbance it is the loop on the plant itself, scan by scan
	control, err := tune.NewController(gains, 0.25)
	if err != nil {
		t.Fatal(err)
	}
	stepper, err := tune.NewPlantStepper(plant, 0.25)
	if err != nil {
		t.Fatal(err)
	}
	control.Start(60, 60, 4)
	var times, inputs []float64
	now, held, row := 60.0, 4.0, 0
	for k := 0; float64(k)*0.25 <= run.T[299]; k++ {
		s := float64(k) * 0.25
		for row+1 < 300 && run.T[row+1] <= s {
			row++
		}
		if k > 0 {
			held = control.Next(run.Setpoint[row], now)
		}
		times, inputs = append(times, s), append(inputs, held)
		now = 60 + stepper.Step(held-4)
	}
	want := ident.NewSimulator(run.T, ident.HeldInput(times, inputs, ident.Linear)).Response(nil, plant.Structure, plant.Lags, plant.DeadTime)
	for i := range y {
		if math.Abs(y[i]-60-plant.Gain*want[i]) > 1e-9 {
			t.Fatalf("row %d: %.12g, want %.12g", i, y[i], 60+plant.Gain*want[i])
		}
	}
}
