package ident

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"
)

// An input that moves at every row, or nearly, is the sum of its steps: the responses
// to each of them alone, which take another way through the simulator. Means of rows
// are those of the samples.
func TestDriven(t *testing.T) {
	r := rand.New(rand.NewPCG(7, 1))
	const step = 0.1
	for _, rows := range []string{"all", "some missing"} {
		var times []float64
		in := Input{Before: 4}
		for k := range 90 {
			at := float64(k) * step
			if rows == "all" || k < 40 || k%7 != 0 {
				times = append(times, at)
			}
			rests := k > 50 && k < 56 || k%11 == 0
			if k > 0 && !rests {
				in.At, in.Value = append(in.At, at), append(in.Value, 4+r.NormFloat64())
			}
		}
		driven := NewSimulator(times, in)
		var pairs []Row
		for k := 0; k+1 < len(times); k += 2 {
			pairs = append(pairs, Row{T: times[k], H: step, M: 2})
		}
		means := NewBlockSimulator(pairs, in)
		for _, c := range []struct {
			structure string
			lags      []float64
		}{
			{"fopdt", []float64{0.7}}, {"chain2", []float64{0.9, 0.3}}, {"chain3", []float64{0.8, 0.8, 0.05}},
			{"chain4", []float64{1.1, 0.6, 0.2, 0.01}}, {"chain2", []float64{0.9, 0}}, {"equal3", []float64{0.4}}, {"equal7", []float64{0.1}},
		} {
			st, err := ParseStructure(c.structure)
			if err != nil {
				t.Fatal(err)
			}
			for _, dead := range []float64{0, 0.1, 0.3, 0.137, 0.25, 0.4 - 1e-13, 0.4 + 1e-13} {
				name := fmt.Sprintf("%s, %s %v, dead time %v", rows, c.structure, c.lags, dead)
				k := st.NumLags() + 2
				got, want, one := columnsOf(k, len(times)), columnsOf(k, len(times)), columnsOf(k, len(times))
				driven.Sensitivities(got, st, c.lags, dead)
				before := in.Before
				for j, at := range in.At {
					NewSimulator(times, Input{At: []float64{at}, Value: []float64{1}}).Sensitivities(one, st, c.lags, dead)
					for i := range want {
						for row := range want[i] {
							want[i][row] += (in.Value[j] - before) * one[i][row]
						}
					}
					before = in.Value[j]
				}
				for i := range want {
					for row := range want[i] {
						if math.Abs(got[i][row]-want[i][row]) > 1e-11*(1+math.Abs(want[i][row])) {
							t.Fatalf("%s: column %d, row %d: %v, want %v", name, i, row, got[i][row], want[i][row])
						}
					}
				}
				if y := driven.Response(nil, st, c.lags, dead); !slices.Equal(y, got[0]) && farthest(y, got[0]) > 1e-12 {
					t.Errorf("%s: without sensitivities the response is another", name)
				}
				if y := means.Response(nil, st, c.lags, dead); rows == "all" {
					for i, v := range y {
						if math.Abs(v-(got[0][2*i]+got[0][2*i+1])/2) > 1e-11 {
							t.Errorf("%s: mean %d is %v", name, i, v)
						}
					}
				}
				next := driven.Pieces(st, c.lags, dead, true)
				for lo := 0; lo < len(times); {
					piece := columnsOf(k, 13)
					n := next(piece)
					for i := range piece {
						if farthest(piece[i][:n], got[i][lo:lo+n]) > 1e-12 {
							t.Errorf("%s: rows %d and after differ in pieces", name, lo)
						}
					}
					lo += n
				}
			}
		}
	}
}

func columnsOf(k, n int) [][]float64 {
	out := make([][]float64, k)
	for i := range out {
		out[i] = make([]float64, n)
	}
	return out
}

func farthest(a, b []float64) float64 {
	worst := 0.0
	for i := range a {
		worst = math.Max(worst, math.Abs(a[i]-b[i]))
	}
	return worst
}
