package fit

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"testing"

	"lagwright/data"
	"lagwright/ident"
)

// randomLog invents a log for the search: one of four kinds of input, one of
// five structures, noise from faint to strong.
func randomLog(seed uint64) (*data.Run, ident.Structure) {
	r := rand.New(rand.NewPCG(seed, 99))
	name := []string{"fopdt", "chain2", "chain3", "equal2", "equal4"}[r.IntN(5)]
	st, _ := ident.ParseStructure(name)
	n, h := 150+r.IntN(150), 0.1
	lags := make([]float64, st.NumLags())
	for i := range lags {
		lags[i] = h * math.Exp(math.Log(0.5)+r.Float64()*math.Log(60))
		if st.Equal() {
			lags[i] /= 3
		}
	}
	dead := h * 12 * r.Float64()
	run := &data.Run{Source: data.Source{File: fmt.Sprintf("random-%d", seed)}}
	u := 0.0
	kind := r.IntN(4)
	for k := range n {
		switch {
		case kind == 0 && k == n/6: // a bump
			u = 1
		case kind == 1 && k%(n/6) == n/12: // a staircase
			u++
		case kind == 2 && r.Float64() < 0.12: // a random telegraph
			u = 1 - u
		case kind == 3 && (k == n/5 || k == n/2): // a doublet
			u = 1 - u
		}
		run.T = append(run.T, float64(k)*h)
		run.U = append(run.U, u)
	}
	y := ident.NewSimulator(run.T, ident.HeldInput(run.T, run.U, ident.Linear)).Response(nil, st, lags, dead)
	sd := 5 * math.Exp(math.Log(0.003)+r.Float64()*math.Log(30))
	for k := range y {
		run.Y = append(run.Y, 20+5*y[k]+sd*r.NormFloat64())
	}
	if ident.HeldInput(run.T, run.U, ident.Linear).At == nil {
		run.U[n-1] = 1
	}
	return run, st
}

// exhaustive is the least sum of squares of the plain fit found by the general
// solver from several starts in every sampling interval of dead time, gain and
// baseline among its unknowns: another route to the same number.
func exhaustive(t *testing.T, run *data.Run, st ident.Structure) float64 {
	n, nl := len(run.T), st.NumLags()
	sim := ident.NewSimulator(run.T, ident.HeldInput(run.T, run.U, ident.Linear))
	cols := columns(nl+2, n)
	pr := Problem{M: n, N: nl + 3,
		Residuals: func(r, p []float64) {
			sim.Response(cols[0], st, p[1:nl+1], p[nl+1])
			for k := range r {
				r[k] = run.Y[k] - p[nl+2] - p[0]*cols[0][k]
			}
		},
		Jacobian: func(j [][]float64, p []float64) {
			sim.Sensitivities(cols, st, p[1:nl+1], p[nl+1])
			for k := range n {
				j[0][k] = -cols[0][k]
				for l := range nl + 1 {
					j[l+1][k] = -p[0] * cols[l+1][k]
				}
				j[nl+2][k] = -1
			}
		},
		Lower: make([]float64, nl+3), Upper: make([]float64, nl+3),
	}
	for i := range pr.Lower {
		pr.Lower[i], pr.Upper[i] = math.Inf(-1), math.Inf(1)
		if i > 0 && i <= nl {
			pr.Lower[i], pr.Upper[i] = 1e-7, 20*run.T[n-1]
		}
	}
	h := run.T[1]
	best := math.Inf(1)
	for m := range 30 {
		pr.Lower[nl+1], pr.Upper[nl+1] = float64(m)*h, float64(m+1)*h
		for _, scale := range []float64{0.5, 3, 15} {
			for _, spread := range []float64{1, 0.2} {
				start := make([]float64, nl+3)
				start[0], start[nl+1], start[nl+2] = 5, (float64(m)+0.5)*h, 20
				for i := range nl {
					start[i+1] = scale * h * math.Pow(spread, float64(i))
				}
				res, err := LeastSquares(pr, start, Settings{MaxIterations: 60})
				if err == nil && res.SSE < best {
					best = res.SSE
				}
				if nl == 1 {
					break
				}
			}
		}
	}
	return best
}

// TestGlobalOptimum holds the plain fit to an exhaustive search.
func TestGlobalOptimum(t *testing.T) {
	logs := 12
	if os.Getenv("LAGWRIGHT_LONG") != "" {
		logs = 500
	}
	better := 0
	for i := range logs {
		run, st := randomLog(uint64(i))
		card, err := Fit(context.Background(), []*data.Run{run}, Options{
			Structure: st.String(), Noise: "white", Initial: "rest", Drift: "none", Plants: -1, Workers: 1})
		if err != nil {
			t.Fatalf("log %d: %v", i, err)
		}
		want := exhaustive(t, run, st)
		got := card.Models[0].SSE
		if got > want*(1+1e-6) {
			p, _ := card.Plant()
			t.Errorf("log %d, %s: sum of squares %.9g, the exhaustive search found %.9g; lags %v dead time %v", i, st, got, want, p.Lags, p.DeadTime)
		}
		if got < want*(1-1e-6) {
			better++
		}
	}
	t.Logf("%d of %d fits are better than the exhaustive search", better, logs)
}
