package data

import (
	"math"
	"math/rand/v2"
	"testing"
)

func TestClipped(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 9))
	rise := func(i int) float64 { return 40 + 16*(1-math.Exp(-math.Max(0, float64(i-100))/40)) }
	clean, noise := ramp(600, rise), ramp(600, func(i int) float64 { return rise(i) + 0.1*rng.NormFloat64() })
	at50 := func(y float64) float64 { return math.Min(y, 50) }
	for _, c := range []struct {
		name string
		y    []float64
		want bool
	}{
		{"noise", noise, false},
		{"noise, cut off at 50", mapped(noise, at50), true},
		{"noise, cut off below 40.5", mapped(noise, func(y float64) float64 { return math.Max(y, 40.5) }), true},
		{"no noise", clean, false},
		{"no noise, cut off", mapped(clean, at50), false},
		{"tenths of noise", mapped(noise, func(y float64) float64 { return math.Round(10*y) / 10 }), false},
		{"steps of 1 K", mapped(noise, math.Round), false},
		{"steps of 4 K", mapped(noise, func(y float64) float64 { return 4 * math.Round(y/4) }), false},
		{"missing", mapped(noise, func(float64) float64 { return nan }), false},
		{"nothing", nil, false},
	} {
		if n, ok := clippedNote(c.y); ok != c.want {
			t.Errorf("%s: said %v (%s), want %v", c.name, ok, n.Text, c.want)
		}
	}
}
