package fit

import (
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"testing"

	"lagwright/data"
	"lagwright/ident"
)

// longLog rests most of the time: n rows with a few bumps, correlated noise, readings of a
// tenth of a kelvin, and a drift.
func longLog(n int, seed uint64) *data.Run {
	rng := rand.New(rand.NewPCG(seed, 12))
	const step = 0.1
	run := &data.Run{Units: data.Units{Time: "s", Input: "V", Temperature: "degC"}}
	run.T, run.U = make([]float64, n), make([]float64, n)
	for k := range run.T {
		run.T[k] = step * float64(k)
		run.U[k] = 3
		if k >= 500 && k < n/2+37 || k > n-n/5 {
			run.U[k] = 4
		}
	}
	st, err := ident.ParseStructure("chain2")
	if err != nil {
		panic(err)
	}
	run.Y = ident.NewSimulator(run.T, ident.HeldInput(run.T, run.U, ident.Linear)).Response(nil, st, []float64{3, 0.7}, 0.43)
	noise := 0.0
	for k, y := range run.Y {
		noise = 0.6*noise + 0.1*rng.NormFloat64()
		run.Y[k] = math.Round(10*(55+6*y+1e-4*run.T[k]+noise)) / 10
	}
	run.Quality.MedianInterval, run.Quality.Quantum = step, 0.1
	return run
}

// restCases are models of a long log, right ones and wrong ones, with noise shapes.
func restCases() (plants []explained, shapes []shape) {
	for _, p := range []struct {
		structure string
		gain      float64
		lags      []float64
		dead      float64
	}{
		{"chain2", 6, []float64{3, 0.7}, 0.43},
		{"fopdt", 5.7, []float64{4}, 0.9},
		{"chain3", 6.2, []float64{3, 0.6, 0}, 0.43},
		{"equal3", 6, []float64{1.2}, 0},
		{"ipdt", 1e-4, nil, 2},
		{"fopdt", 90, []float64{40000}, 0}, // never at rest
	} {
		st, err := ident.ParseStructure(p.structure)
		if err != nil {
			panic(err)
		}
		plants = append(plants, explained{st: st, gain: p.gain, lags: p.lags, dead: p.dead})
	}
	return plants, []shape{{tc: 0.2, white: 0.1}, {tc: 0.03, white: 0.1}, {tc: 0.4, white: 0.3}, whiteShape, {tc: 30, white: 0.9}, {tc: 0.2, white: 0.1, walk: 1e-5}}
}

// TestRestSums holds the figures of residuals and the normal equations of long logs whose
// pieces at rest are taken by their sums to those of every row: all initial states and
// drifts, last pieces of any length, groups shorter and longer than the filter's memory.
func TestRestSums(t *testing.T) {
	lengths := []int{2 * noiseRows, 60001}
	if os.Getenv("LAGWRIGHT_LONG") != "" {
		lengths = append(lengths, 300000)
	}
	for _, n := range lengths {
		root, err := newRecord(longLog(n, uint64(n)), ident.Linear)
		if err != nil {
			t.Fatal(err)
		}
		rec := root.coarse(searchRows)
		if root.sums == nil {
			t.Fatal("no sums")
		}
		plants, shapes := restCases()
		for _, in := range []initial{rest, earlier} {
			for _, drift := range []bool{false, true} {
				rec.model(in, drift)
				for _, x := range plants {
					x.beta = []float64{55.3}
					if drift {
						x.beta = append(x.beta, 1.2e-4)
					}
					if in == earlier {
						x.beta = append(x.beta, 0.8)
					}
					for _, s := range shapes {
						rec.shape = s
						name := fmt.Sprintf("%d rows, %s %v, %v, drift %v, %+v", n, x.st, x.lags, in, drift, s)
						compareRest(t, name, rec, x)
					}
				}
			}
		}
		taken := 0
		for _, p := range root.sums.pieces {
			if p.r != nil {
				taken++
			}
		}
		if rows := taken * root.sums.rows; rows < (n-noiseRows)/3 {
			t.Errorf("of %d rows only pieces of %d were taken by their sums", n, rows)
		}
	}
}

func compareRest(t *testing.T, name string, rec *record, x explained) {
	t.Helper()
	every, root := *rec, *rec.root
	every.root = &root
	root.root, root.sums = &root, nil
	got, gw := rec.walkResiduals(x, nil)
	want, ww := every.walkResiduals(x, nil)
	near := func(what string, a, b, scale float64) {
		t.Helper()
		if !(math.Abs(a-b) <= 1e-9*scale) {
			t.Errorf("%s: %s is %.15g, row by row %.15g", name, what, a, b)
		}
	}
	rows := float64(want.n)
	rms := math.Sqrt(want.squares / rows)
	near("number of rows", float64(got.n), rows, 1e-3)
	near("sum", got.sum, want.sum, rows*rms)
	near("sum of squares", got.squares, want.squares, want.squares)
	near("products of neighbours", got.lagged, want.lagged, want.squares)
	near("first", got.first, want.first, rms)
	near("last", got.last, want.last, rms)
	near("whitened sum of squares", gw.sum, ww.sum, ww.sum)
	near("ln determinant", gw.logDeterminant(), ww.logDeterminant(), rows)
	if len(got.white) != len(want.white) || len(got.grouped) != len(want.grouped) {
		t.Fatalf("%s: %d whitened rows, %d groups; row by row %d, %d", name, len(got.white), len(got.grouped), len(want.white), len(want.grouped))
	}
	white := math.Sqrt(ww.sum / rows)
	for k := range got.white {
		near(fmt.Sprint("whitened row ", k), got.white[k], want.white[k], white)
	}
	for k := range got.grouped {
		near(fmt.Sprint("group ", k), got.grouped[k], want.grouped[k], 1e3*white)
	}

	compareNormal(t, name, rec, &every, x)
}

// compareNormal does so for the normal equations.
func compareNormal(t *testing.T, name string, rec, every *record, x explained) {
	t.Helper()
	var grams [2][][]float64
	for i, r := range []*record{rec, every} {
		e := newEngine(x.st, []*record{r})
		f := &fitted{st: x.st, e: e, groups: e.groups}
		at := &polished{eta: append(append([]float64(nil), x.lags...), x.dead), gain: x.gain, beta: [][]float64{x.beta}}
		var sum float64
		grams[i] = f.normal(at, &sum, new(everyRowMemory))
	}
	for a := range grams[0] {
		for c := range grams[0] {
			got, want := grams[0][a][c], grams[1][a][c]
			scale := math.Sqrt(grams[1][a][a] * grams[1][c][c])
			if !(math.Abs(got-want) <= 1e-9*scale) {
				t.Errorf("%s: product %d, %d is %.15g, row by row %.15g (of %.3g)", name, a, c, got, want, scale)
			}
		}
	}
}
