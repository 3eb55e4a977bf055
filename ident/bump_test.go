package ident

import (
	"math"
	"math/rand/v2"
	"testing"
)

// ramped returns an input that goes to each level over some rows and stays
// there until the next row given.
func ramped(rows int, start float64, at []int, to []float64, over int) []float64 {
	u := make([]float64, rows)
	value, next := start, 0
	for k := range u {
		if next < len(at) && k >= at[next] {
			from := start
			if next > 0 {
				from = to[next-1]
			}
			share := min(float64(k-at[next]+1)/float64(over), 1)
			value = from + share*(to[next]-from)
			if share == 1 {
				next++
			}
		}
		u[k] = value
	}
	return u
}

func TestFindBumps(t *testing.T) {
	const rows = 1000
	at, to := []int{200, 500, 800}, []float64{5, 3, 6}
	rng := rand.New(rand.NewPCG(8, 1))
	for _, c := range []struct {
		name  string
		over  int
		noise float64
		stray bool
	}{
		{"steps", 1, 0, false},
		{"a rate limit", 5, 0, false},
		{"a measured voltage", 1, 0.01, false},
		{"a measured voltage with stray readings", 1, 0.01, true},
	} {
		u := ramped(rows, 2, at, to, c.over)
		times, y := make([]float64, rows), make([]float64, rows)
		for k := range times {
			times[k] = 0.1 * float64(k)
		}
		for k, x := range NewSimulator(times, HeldInput(times, u, Linear)).Response(nil, structure(t, "chain2"), []float64{2, 1}, 0.5) {
			y[k] = 40 + 8*x + 0.05*rng.NormFloat64()
			u[k] += c.noise * rng.NormFloat64()
		}
		if c.stray {
			u[100], u[650] = 9, 0
		}
		bumps := FindBumps(times, u, y)
		if len(bumps) != len(at) {
			t.Fatalf("%s: found %d bumps, want %d: %+v", c.name, len(bumps), len(at), bumps)
		}
		from, base := 2.0, 40.0
		for i, b := range bumps {
			if b.Row != at[i] {
				t.Errorf("%s: bump %d is at row %d, want %d", c.name, i, b.Row, at[i])
			}
			near(t, c.name+" time", b.Time, times[at[i]], 0)
			near(t, c.name+" ramp", b.Ramp, 0.1*float64(c.over-1), 1e-9)
			near(t, c.name+" from", b.From, from, c.noise/2)
			near(t, c.name+" to", b.To, to[i], c.noise/2)
			near(t, c.name+" before", b.Before, base, 0.05)
			base += 8 * (to[i] - from)
			from = to[i]
			near(t, c.name+" after", b.After, base, 0.05)
			near(t, c.name+" rise over noise", b.RiseOverNoise()*b.Noise, math.Abs(b.Rise()), 1e-9)
			near(t, c.name+" noise", b.Noise, 0.05, 0.0175) // 4 standard errors of 66 rows
			if !b.SettledBefore || !b.SettledAfter {
				t.Errorf("%s: bump %d is not taken as settled: %+v", c.name, i, b)
			}
		}
		near(t, "hold", bumps[0].Hold, 30, 1e-9)
		near(t, "last hold", bumps[2].Hold, 19.9, 1e-9)
	}
}

// TestFindBumpsTelegraph finds every change of a random telegraph input, also
// those a single row apart.
func TestFindBumpsTelegraph(t *testing.T) {
	rng := rand.New(rand.NewPCG(2, 2))
	var times, u []float64
	changes := 0
	for k := range 500 {
		times = append(times, float64(k))
		value := 4.0
		if k > 0 {
			value = u[k-1]
		}
		if rng.IntN(3) == 0 {
			value = 10 - value
			if k > 0 {
				changes++
			}
		}
		u = append(u, value)
	}
	bumps := FindBumps(times, u, make([]float64, len(u)))
	if len(bumps) != changes {
		t.Errorf("found %d bumps of %d changes", len(bumps), changes)
	}
}

func TestFindBumpsUnsettled(t *testing.T) {
	times, u := make([]float64, 100), make([]float64, 100)
	for k := range times {
		times[k] = float64(k)
		if k >= 50 {
			u[k] = 1
		}
	}
	y := NewSimulator(times, HeldInput(times, u, Linear)).Response(nil, structure(t, "fopdt"), []float64{40}, 0)
	b := FindBumps(times, u, y)[0]
	if !b.SettledBefore || b.SettledAfter {
		t.Errorf("a response of 1.25 lags is not settled after: %+v", b)
	}
}

func TestFindBumpsOfOddRecords(t *testing.T) {
	nan := math.NaN()
	for _, c := range []struct{ t, u, y []float64 }{
		{nil, nil, nil},
		{[]float64{0}, []float64{1}, []float64{2}},
		{[]float64{0, 1, 2}, []float64{1, 1, 1}, []float64{2, 3, 4}},
		{[]float64{0, 1}, []float64{1, 1, 1}, []float64{2, 3}},
	} {
		if got := FindBumps(c.t, c.u, c.y); got != nil {
			t.Errorf("%v: found %+v", c, got)
		}
	}
	bumps := FindBumps([]float64{0, 1, 2}, []float64{0, 1, 2}, []float64{nan, nan, nan})
	for _, b := range bumps {
		if !math.IsNaN(b.Rise()) || b.SettledAfter {
			t.Errorf("nothing was measured: %+v", b)
		}
	}
}
