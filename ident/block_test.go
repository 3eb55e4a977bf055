package ident

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// TestBlockMeans compares rows that are means with the means of single samples,
// of any number of them and of powers of two, which are walked rung by rung.
func TestBlockMeans(t *testing.T) {
	t.Run("any", func(t *testing.T) { testBlockMeans(t, []int{1, 1, 7, 64, 64, 301}, false) })
	t.Run("rungs", func(t *testing.T) { testBlockMeans(t, []int{1, 1, 2, 8, 64, 256}, true) })
}

func testBlockMeans(t *testing.T, sizes []int, rungs bool) {
	const h = 0.05
	rng := rand.New(rand.NewPCG(3, 1))
	var rows []Row
	var times []float64
	for sample := 0; sample < 4000; {
		m := sizes[rng.IntN(len(sizes))]
		for range 1 + rng.IntN(8) {
			rows = append(rows, Row{T: float64(sample) * h, H: h, M: m})
			for i := range m {
				times = append(times, float64(sample+i)*h)
			}
			sample += m
		}
		if rng.IntN(3) == 0 {
			sample += rng.IntN(20) // samples left out between the rows
		}
	}
	in := Input{Before: 1}
	for at := 0.0; at < 180; at += rng.ExpFloat64() * 9 {
		in.At = append(in.At, at)
		in.Value = append(in.Value, rng.NormFloat64())
	}
	plain, means := NewSimulator(times, in), NewBlockSimulator(rows, in)
	if got := means.rungs != nil; got != rungs {
		t.Fatalf("rungs: %v", got)
	}
	for _, c := range []struct {
		structure string
		lags      []float64
		deadTime  float64
	}{
		{"fopdt", []float64{2}, 0.22},
		{"fopdt", []float64{0}, 0.22},
		{"fopdt", []float64{900}, 0.1},
		{"chain2", []float64{2, 2}, 0},
		{"chain2", []float64{40, 0.004}, 0.31},
		{"chain3", []float64{2.1, 0.65, 0.05}, 0.22},
		{"chain3", []float64{2.1, 0, 500}, 0.22},
		{"chain4", []float64{2.1, 0.65, 0.05, 1e-6}, 3},
		{"equal2", []float64{3}, 0.2},
		{"equal8", []float64{0.7}, 0.15},
		{"ipdt", nil, 0.22},
	} {
		st := structure(t, c.structure)
		all, got := columnsFor(st, len(times)), columnsFor(st, len(rows))
		plain.Sensitivities(all, st, c.lags, c.deadTime)
		means.Sensitivities(got, st, c.lags, c.deadTime)
		for i := range all {
			want := make([]float64, len(rows))
			sample := 0
			for k, r := range rows {
				for range r.M {
					want[k] += all[i][sample] / float64(r.M)
					sample++
				}
			}
			name := fmt.Sprintf("%s %v column %d", c.structure, c.lags, i)
			if d := greatestDifference(got[i], want); !(d <= 1e-12*span(all[i])) {
				t.Errorf("%s: mean is off by %.2g of the span", name, d/span(all[i]))
			}
		}
		response := means.Response(nil, st, c.lags, c.deadTime)
		if d := greatestDifference(response, got[0]); !(d <= 1e-13*span(got[0])) {
			t.Errorf("%s: response alone is off by %.2g", c.structure, d)
		}
	}
}

// TestLongBlocks compares the means over very long blocks, of powers of two and
// other numbers of samples, with the mean of the closed form of a geometric
// series.
func TestLongBlocks(t *testing.T) {
	testLongBlocks(t, []int{1 << 20, 1 << 9, 1 << 23, 1 << 14, 777_777, 1 << 23})
	testLongBlocks(t, []int{1 << 20, 1 << 9, 1 << 9, 1 << 9, 1 << 23, 1 << 14, 1, 1, 1 << 23, 1 << 23})
}

func testLongBlocks(t *testing.T, sizes []int) {
	const h, tau = 0.001, 9000.0
	var rows []Row
	sample := 1
	for _, m := range sizes {
		rows = append(rows, Row{T: float64(sample) * h, H: h, M: m})
		sample += m
	}
	s := NewBlockSimulator(rows, Input{At: []float64{0}, Value: []float64{1}})
	for k, y := range s.Response(nil, structure(t, "fopdt"), []float64{tau}, 0) {
		r := rows[k]
		m := float64(r.M)
		want := 1 - math.Exp(-r.T/tau)*math.Expm1(-m*h/tau)/math.Expm1(-h/tau)/m
		near(t, fmt.Sprintf("block of %d", r.M), y, want, 1e-12)
	}
}

// TestPairs compares rows that are the mean of two samples at any distance, at
// uneven times, with single samples.
func TestPairs(t *testing.T) {
	rng := rand.New(rand.NewPCG(8, 2))
	var rows []Row
	var times []float64
	for at := 0.0; at < 100; {
		h := 0.01 + rng.ExpFloat64()*0.3
		rows = append(rows, Row{T: at, H: h, M: 2})
		times = append(times, at, at+h)
		at += h + 0.01 + rng.ExpFloat64()*0.2
	}
	in := Input{Before: 1, At: []float64{3.3, 20.123, 20.2, 61}, Value: []float64{2, 1, 3, 0}}
	plain, means := NewSimulator(times, in), NewBlockSimulator(rows, in)
	for _, c := range []struct {
		structure string
		lags      []float64
	}{{"fopdt", []float64{2}}, {"chain2", []float64{2, 2.01}}, {"chain3", []float64{2.1, 0.65, 0.05}}, {"chain4", []float64{30, 3, 0, 0.4}}, {"equal5", []float64{0.7}}} {
		st := structure(t, c.structure)
		all, got := columnsFor(st, len(times)), columnsFor(st, len(rows))
		plain.Sensitivities(all, st, c.lags, 0.22)
		means.Sensitivities(got, st, c.lags, 0.22)
		for i := range all {
			want := make([]float64, len(rows))
			for k := range rows {
				want[k] = (all[i][2*k] + all[i][2*k+1]) / 2
			}
			if d := greatestDifference(got[i], want); !(d <= 1e-12*span(all[i])) {
				t.Errorf("%s %v column %d: mean is off by %.2g of the span", c.structure, c.lags, i, d/span(all[i]))
			}
		}
	}
}
