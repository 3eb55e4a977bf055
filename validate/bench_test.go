package validate

import (
	"fmt"
	"math"
	"math/rand/v2"
	"time"

	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"context"

	"lagwright/data"
	"lagwright/fit"
	"lagwright/ident"
	"lagwright/tune"
)

// benchRun is an even log of n rows with a setpoint move.
func benchRun(n int, dt float64) *data.Run {
	rng := rand.New(rand.NewPCG(1, 1))
	run := &data.Run{Source: data.Source{File: "bench.csv"}}
	for i := range n {
		run.T = append(run.T, float64(i)*dt)
		run.U = append(run.U, 4)
		run.Y = append(run.Y, 60+0.1*rng.NormFloat64())
		run.Setpoint = append(run.Setpoint, 60+10*float64(min(1, 4*i/n)))
	}
	return run
}

func benchPlan(b *testing.B, plants int) *plan {
	plant := mustPlant(b, "chain3", 8, []float64{6, 2, 0.3}, 1.23)
	p, err := newPlan(cardOf(b, "linear", fit.Noise{SD: 0.1, WhiteSD: 0.1}, plant, plausible(b, plant, plants, 0.03, 1)...), piGains(0.2, 8, 0.1), Options{})
	if err != nil {
		b.Fatal(err)
	}
	return p
}

// One closed loop of a chain of 3 with dead time, PI, limits and anti-windup:
// ns/step, and its ratio to the same in C where a compiler is present.
func BenchmarkClosedLoopStep(b *testing.B) {
	const n = 2000
	p := benchPlan(b, 1)
	c, err := newCourse(benchRun(n, 0.1), segment{0, n, 0}, p)
	if err != nil {
		b.Fatal(err)
	}
	r := newRunner(ident.Linear, p.gains, p.plants)
	y, u := make([]float64, n), make([]float64, n)
	if err := r.replay(c, 0, y, u); err != nil {
		b.Fatal(err)
	}
	b.ReportAllocs()
	best := math.Inf(1) // as the reference takes its best: the machine is shared
	for b.Loop() {
		start := time.Now()
		if err := r.replay(c, 0, y, u); err != nil {
			b.Fatal(err)
		}
		best = min(best, float64(time.Since(start))/n)
	}
	b.ReportMetric(best, "ns/step")
	if reference := compiledReference(b); reference > 0 {
		b.ReportMetric(best/reference, "×C")
	}
}

// 1,000 plants × 2,000 steps with metrics, on the workers of -cpu.
func BenchmarkThousandPlants(b *testing.B) {
	const n, plants = 2000, 1000
	for _, workers := range []int{1, 2} {
		b.Run(fmt.Sprintf("workers=%d", workers), func(b *testing.B) {
			p := benchPlan(b, plants)
			run := benchRun(n, 0.1)
			p.options.Workers = workers
			team := p.teams(1)[0]
			b.ResetTimer()
			for b.Loop() {
				if _, err := p.replayRun(context.Background(), run, team); err != nil {
					b.Fatal(err)
				}
			}
			b.ReportMetric(float64(b.Elapsed())/float64(b.N)/n/plants, "ns/step")
		})
	}
}

// Rows that the scans do not meet, scan by scan.
func BenchmarkUnevenRows(b *testing.B) {
	const n = 2000
	p := benchPlan(b, 1)
	run := benchRun(n, 0.1)
	rng := rand.New(rand.NewPCG(3, 3))
	for i := range run.T {
		run.T[i] += 0.02 * rng.Float64()
	}
	c, err := newCourse(run, segment{0, n, 0}, p)
	if err != nil {
		b.Fatal(err)
	}
	r := newRunner(ident.Linear, p.gains, p.plants)
	y, u := make([]float64, n), make([]float64, n)
	for b.Loop() {
		if err := r.replay(c, 0, y, u); err != nil {
			b.Fatal(err)
		}
	}
	b.ReportMetric(float64(b.Elapsed())/float64(b.N)/n, "ns/step")
}

// BenchmarkTuneStep is the part of a step that tune's controller and stepper take.
func BenchmarkTuneStep(b *testing.B) {
	p := benchPlan(b, 1)
	control, err := tune.NewController(p.gains, 0.1)
	if err != nil {
		b.Fatal(err)
	}
	stepper, err := tune.NewPlantStepper(p.best, 0.1)
	if err != nil {
		b.Fatal(err)
	}
	control.Start(60, 60, 4)
	y := 60.0
	for b.Loop() {
		y = 60 + stepper.Step(control.Next(70, y)-4)
	}
}

// compiledReference compiles and times testdata/closedloop.c: ns a step, 0
// where there is no compiler.
func compiledReference(b *testing.B) float64 {
	cc, err := exec.LookPath("cc")
	if err != nil {
		return 0
	}
	program := filepath.Join(b.TempDir(), "closedloop")
	if out, err := exec.Command(cc, "-O3", "-o", program, filepath.Join("testdata", "closedloop.c"), "-lm").CombinedOutput(); err != nil {
		b.Logf("no C reference: %v\n%s", err, out)
		return 0
	}
	out, err := exec.Command(program).Output()
	if err != nil {
		b.Logf("no C reference: %v", err)
		return 0
	}
	step, err := strconv.ParseFloat(strings.TrimSpace(string(out)), 64)
	if err != nil {
		b.Log(err)
		return 0
	}
	return step
}
