package ident

import (
	"fmt"
	"math"
	"testing"
)

// TestFreeStates checks the columns against the closed form of two distinct
// lags and against equal ones, and their derivatives against central
// differences.
func TestFreeStates(t *testing.T) {
	times := []float64{10, 10.1, 10.2, 10.3, 10.37, 11, 12.5, 12.6, 12.7, 15}
	s := NewSimulator(times, Input{Before: 4, At: []float64{10, 11}, Value: []float64{7, 9}})

	st := structure(t, "chain2")
	long, short := 1.7, 0.4
	got := make([][]float64, 2)
	for j := range got {
		got[j] = make([]float64, len(times))
	}
	s.FreeStates(got, st, []float64{short, long}, 0.3)
	for k := range times {
		x := times[k] - times[0]
		if want := math.Exp(-x / long); math.Abs(got[0][k]-want) > 1e-14 {
			t.Errorf("long lag, row %d: got %v, want %v", k, got[0][k], want)
		}
		want := short / (long - short) * (math.Exp(-x/long) - math.Exp(-x/short))
		if math.Abs(got[1][k]-want) > 1e-14 {
			t.Errorf("short lag, row %d: got %v, want %v", k, got[1][k], want)
		}
	}

	for _, c := range []struct {
		structure string
		lags      []float64
	}{
		{"fopdt", []float64{0.7}},
		{"chain2", []float64{0.4, 1.7}},
		{"chain3", []float64{2.1, 0.65, 0.05}},
		{"chain3", []float64{2.1, 0.65, 0}},
		{"equal2", []float64{0.6}},
		{"equal5", []float64{0.3}},
	} {
		st := structure(t, c.structure)
		columns := func(lags []float64, derivatives bool) [][]float64 {
			out := make([][]float64, st.Order()*(1+st.NumLags()))
			for i := range out {
				out[i] = make([]float64, len(times))
			}
			if derivatives {
				s.FreeStateSensitivities(out, st, lags, 0.3)
			} else {
				s.FreeStates(out, st, lags, 0.3)
			}
			return out
		}
		all := columns(c.lags, true)
		for i, tau := range c.lags {
			if tau == 0 {
				continue
			}
			step := 1e-5 * tau
			up, down := append([]float64(nil), c.lags...), append([]float64(nil), c.lags...)
			up[i] += step
			down[i] -= step
			a, b := columns(up, false), columns(down, false)
			for j := range st.Order() {
				for k := range times {
					want := (a[j][k] - b[j][k]) / (2 * step)
					if have := all[st.Order()+j*st.NumLags()+i][k]; math.Abs(have-want) > 1e-8/tau {
						t.Errorf("%s: column %d, lag %d, row %d: got %v, differences give %v", fmt.Sprint(c.structure, c.lags), j, i, k, have, want)
					}
				}
			}
		}
		free := columns(c.lags, false)
		for j := range st.Order() {
			if d := greatestDifference(free[j], all[j]); d > 1e-15 {
				t.Errorf("%s: column %d differs by %g", c.structure, j, d)
			}
		}
	}
}
