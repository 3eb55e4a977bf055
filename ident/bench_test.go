package ident

import (
	"fmt"
	"math"
	"math/rand/v2"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
	"time"
)

// benchInputs are the inputs of the benchmarks on rows of 50 ms: one bump after
// a tenth of the record, and a telegraph that changes every 20 rows. Behind a
// dead time of 0.22 s a change lands between two rows.
var benchInputs = map[string]func(t []float64) Input{
	"bump": func(t []float64) Input {
		return Input{At: []float64{t[len(t)/10]}, Value: []float64{1}}
	},
	"telegraph": func(t []float64) Input {
		var in Input
		for k := 0; k < len(t); k += 20 {
			in.At = append(in.At, t[k])
			in.Value = append(in.Value, float64(1-len(in.Value)%2))
		}
		return in
	},
}

// everyRow is an input that changes at every row, as in closed loop.
func everyRow(t []float64) Input {
	in := Input{At: t[1:]}
	for k := range in.At {
		in.Value = append(in.Value, math.Sin(0.01*float64(k)))
	}
	return in
}

const benchDeadTime = 0.22

var benchLags = map[string][]float64{
	"fopdt":  {2.1},
	"chain2": {2.1, 0.65},
	"chain3": {2.1, 0.65, 0.05},
	"chain4": {2.1, 0.65, 0.2, 0.05},
	"equal3": {0.9},
	"equal8": {0.3},
}

func uniformRows(rows int) []float64 {
	t := make([]float64, rows)
	for k := range t {
		t[k] = float64(k) * 0.05
	}
	return t
}

// leastTime reports the least time of one call, which a busy machine disturbs
// less than the mean.
func leastTime(b *testing.B, rows int, call func()) float64 {
	b.Helper()
	b.ReportAllocs()
	call() // touches the memory
	least := math.Inf(1)
	for b.Loop() {
		start := time.Now()
		call()
		least = min(least, time.Since(start).Seconds())
	}
	perRow := 1e9 * least / float64(rows)
	b.ReportMetric(perRow, "least-ns/row")
	return perRow
}

func BenchmarkSensitivities(b *testing.B) {
	for _, name := range []string{"fopdt", "chain2", "chain3", "chain4", "equal3", "equal8", "ipdt"} {
		for _, input := range []string{"bump", "telegraph"} {
			for _, rows := range []int{1e3, 1e4, 1e6} {
				b.Run(fmt.Sprintf("%s/%s/%.0e", name, input, float64(rows)), func(b *testing.B) {
					t := uniformRows(rows)
					st := structure(b, name)
					s, dst := NewSimulator(t, benchInputs[input](t)), columnsFor(st, rows)
					leastTime(b, rows, func() { s.Sensitivities(dst, st, benchLags[name], benchDeadTime) })
				})
			}
		}
	}
}

// BenchmarkEveryRow times an input that changes at every row.
func BenchmarkEveryRow(b *testing.B) {
	const rows = 1e4
	t := uniformRows(rows)
	for _, name := range []string{"fopdt", "chain3", "equal3"} {
		st := structure(b, name)
		s, dst := NewSimulator(t, everyRow(t)), columnsFor(st, rows)
		b.Run(name+"/sensitivities", func(b *testing.B) {
			leastTime(b, rows, func() { s.Sensitivities(dst, st, benchLags[name], benchDeadTime) })
		})
		b.Run(name+"/response", func(b *testing.B) {
			leastTime(b, rows, func() { s.Response(dst[0], st, benchLags[name], benchDeadTime) })
		})
	}
}

// BenchmarkRagged times rows whose time stamps jitter by ±20 % of the interval.
func BenchmarkRagged(b *testing.B) {
	const rows = 1e4
	rng := rand.New(rand.NewPCG(1, 1))
	t := uniformRows(rows)
	for k := range t {
		t[k] += 0.02 * (rng.Float64() - 0.5)
	}
	for _, name := range []string{"fopdt", "chain3", "equal3"} {
		for _, input := range []string{"bump", "telegraph"} {
			b.Run(name+"/"+input, func(b *testing.B) {
				st := structure(b, name)
				s, dst := NewSimulator(t, benchInputs[input](t)), columnsFor(st, rows)
				leastTime(b, rows, func() { s.Sensitivities(dst, st, benchLags[name], benchDeadTime) })
			})
		}
	}
}

// BenchmarkAgainstC reports how much longer the sensitivities take than the
// same recursion in C, compiled with -O3 from testdata/bench.c: against filling
// the columns, and against forming the normal equations without storing them.
func BenchmarkAgainstC(b *testing.B) {
	cc, err := exec.LookPath("cc")
	if err != nil {
		b.Skip("no C compiler on the path")
	}
	program := filepath.Join(b.TempDir(), "bench")
	if out, err := exec.Command(cc, "-O3", "-o", program, "testdata/bench.c", "-lm").CombinedOutput(); err != nil {
		b.Fatalf("%v\n%s", err, out)
	}
	for _, name := range []string{"fopdt", "chain3"} {
		for _, input := range []string{"bump", "telegraph"} {
			for _, rows := range []int{1e3, 1e4, 1e6} {
				b.Run(fmt.Sprintf("%s/%s/%.0e", name, input, float64(rows)), func(b *testing.B) {
					out, err := exec.Command(program, name, input, fmt.Sprint(rows), "0.3").Output()
					if err != nil {
						b.Fatal(err)
					}
					var fill, fused float64
					if _, err := fmt.Sscan(strings.TrimSpace(string(out)), &fill, &fused); err != nil {
						b.Fatal(err)
					}
					t := uniformRows(rows)
					st := structure(b, name)
					s, dst := NewSimulator(t, benchInputs[input](t)), columnsFor(st, rows)
					least := leastTime(b, rows, func() { s.Sensitivities(dst, st, benchLags[name], benchDeadTime) })
					b.ReportMetric(least/fill, "of-C-fill")
					b.ReportMetric(least/fused, "of-C-fused")
				})
			}
		}
	}
}

// BenchmarkBlocks times a log of 2.2e5 samples summarised in 450 rows: after
// each of three bumps blocks of twelve rows, each set twice as long as the one
// before.
func BenchmarkBlocks(b *testing.B) {
	const h = 0.05
	var rows []Row
	var in Input
	sample := 0
	for bump := range 3 {
		in.At = append(in.At, float64(sample+3)*h)
		in.Value = append(in.Value, float64(bump+1))
		m := 1
		for k := range 150 {
			rows = append(rows, Row{T: float64(sample) * h, H: h, M: m})
			sample += m
			if k%12 == 11 {
				m *= 2
			}
		}
	}
	for _, name := range []string{"fopdt", "chain3", "equal8"} {
		b.Run(name, func(b *testing.B) {
			st := structure(b, name)
			s, dst := NewBlockSimulator(rows, in), columnsFor(st, len(rows))
			leastTime(b, len(rows), func() { s.Sensitivities(dst, st, benchLags[name], benchDeadTime) })
		})
	}
}
