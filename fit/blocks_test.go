package fit

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"lagwright/data"
	"lagwright/ident"
)

// TestBlocks holds the optimum on averaged rows to that on every row, on even logs,
// and on those whose sampling scatters by up to ±20 % of the interval: the
// standard error agrees to half a percent, and the values to what a percent of
// information lost would scatter them by (√0.01 standard errors), half as much again.
// Where a third or three quarters of the rows are missing here and there, the mean of
// uneven rows of correlated noise is not quite the best figure: twice as much is lost.
func TestBlocks(t *testing.T) {
	st, err := ident.ParseStructure("chain2")
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct{ jitter, missing float64 }{{0, 0}, {0.05, 0}, {0.4, 0}, {0, 0.33}, {0, 0.75}, {0.4, 0.75}} {
		f := families()[2] // ar 0.8
		f.n, f.step, f.jitter, f.ar = 4000, 0.02, c.jitter, 0.95
		if c.missing > 0.5 {
			f.n, f.step, f.ar = 16000, 0.005, 0.987
		}
		most, worth := 0.15, 0.005
		if c.missing > 0 {
			most, worth = 0.3, 0.01
		}
		jitter := fmt.Sprintf("%g, missing %g", c.jitter, c.missing)
		for seed := range uint64(5) {
			rec, err := newRecord(thinned(f.make(seed), c.missing, seed), ident.Linear)
			if err != nil {
				t.Fatal(err)
			}
			whole := rec.whole()
			whole.model(rest, false)
			s := shape{tc: 0.4, white: 0.05}
			whole.setShape(s)
			blocks := whole.focus(f.dead, 3*f.step)
			if len(blocks.t) > len(whole.t)/4 {
				t.Fatalf("jitter %s: %d rows became %d", jitter, len(whole.t), len(blocks.t))
			}
			start := []float64{f.lags[0], f.lags[1], f.dead}
			a := newEngine(st, []*record{whole}).descend(start, finalTol)
			b := newEngine(st, []*record{blocks}).descend(start, finalTol)
			ca, cb := invert(a.normal), invert(b.normal)
			sd := math.Sqrt(a.part[0] / float64(len(whole.t)))
			for i := range ca {
				va, vb := a.gain, b.gain
				if i > 0 {
					va, vb = a.eta[i-1], b.eta[i-1]
				}
				se := sd * math.Sqrt(ca[i][i])
				if d := math.Abs(va-vb) / se; d > most {
					t.Errorf("jitter %s, seed %d: parameter %d is %.3f standard errors off", jitter, seed, i, d)
				}
				if r := math.Sqrt(cb[i][i] / ca[i][i]); math.Abs(r-1) > worth {
					t.Errorf("jitter %s, seed %d: standard error of parameter %d is %.4f of that on every row", jitter, seed, i, r)
				}
			}
		}
	}
}

// thinned is the log without a share of its rows, here and there.
func thinned(run *data.Run, share float64, seed uint64) *data.Run {
	r := rand.New(rand.NewPCG(seed, 7))
	out := *run
	out.T, out.U, out.Y = nil, nil, nil
	for k := range run.T {
		if k == 0 || run.U[k] != run.U[k-1] || r.Float64() >= share {
			out.T, out.U, out.Y = append(out.T, run.T[k]), append(out.U, run.U[k]), append(out.Y, run.Y[k])
		}
	}
	return &out
}

// TestSumOf adds up rows from anywhere to anywhere.
func TestSumOf(t *testing.T) {
	y := make([]float64, 3*chunkRows+77)
	for k := range y {
		y[k] = math.Sin(float64(k)) + 60
	}
	r := &record{y: y, chunks: chunkSums(y)}
	for _, lo := range []int{0, 1, 200, 255, 256, 257, 512, 700} {
		for _, hi := range []int{lo, lo + 1, 256, 257, 512, 768, 800, len(y)} {
			if hi < lo {
				continue
			}
			want := 0.0
			for _, v := range y[lo:hi] {
				want += v
			}
			if got := r.sumOf(lo, hi); math.Abs(got-want) > 1e-9 {
				t.Errorf("rows %d to %d: %g, want %g", lo, hi, got, want)
			}
		}
	}
}
