package data

import (
	"math"
	"math/rand/v2"
	"testing"
)

// An even sampling of any period and phase, stamped with a coarser clock, gets
// its times back to within half a stamp, however many rows share one.
func TestSpreadEven(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 9))
	for range 500 {
		n := 60 + rng.IntN(400)
		period := 0.02 + 0.93*rng.Float64() // of a stamp
		phase := rng.Float64()
		s := &stampSeries{same: func(i, j int) bool { return false }, line: func(i int) int { return i }, dated: true}
		for i := range n {
			s.t = append(s.t, int64(math.Floor(phase+period*float64(i)))*1e9)
		}
		if err := s.mend(); err != nil {
			t.Fatalf("%d rows every %v: %v", n, period, err)
		}
		if s.drop != nil || len(s.notes) != 1 {
			t.Fatalf("%d rows every %v: dropped %v, notes %v", n, period, s.reasons, s.notes)
		}
		limit := 0.55
		if s.notes[0].Code == "clock-coarse" {
			limit = 1
		}
		for i, x := range s.t {
			if off := float64(x)/1e9 - phase - period*float64(i); math.Abs(off) > limit || i > 0 && x <= s.t[i-1] {
				t.Fatalf("%d rows every %v: row %d is off by %v (%s)", n, period, i, off, s.notes[0].Code)
			}
		}
	}
}

// Uneven samples under one stamp keep their order and their stamp, and the
// doubt is said.
func TestSpreadUneven(t *testing.T) {
	rng := rand.New(rand.NewPCG(4, 9))
	s := &stampSeries{same: func(i, j int) bool { return false }, line: func(i int) int { return i }, dated: true}
	var truth []float64
	at := 0.0
	for range 300 {
		truth = append(truth, at)
		s.t = append(s.t, int64(math.Floor(at))*1e9)
		at += rng.ExpFloat64() / 3
	}
	if err := s.mend(); err != nil {
		t.Fatal(err)
	}
	if len(s.notes) != 1 || s.notes[0].Code != "clock-coarse" {
		t.Errorf("notes %v, want clock-coarse", s.notes)
	}
	for i, x := range s.t {
		if off := float64(x)/1e9 - truth[i]; math.Abs(off) > 1 || i > 0 && x <= s.t[i-1] {
			t.Fatalf("row %d is off by %v", i, off)
		}
	}
}
