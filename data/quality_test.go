package data

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"
)

func TestIntervals(t *testing.T) {
	ts := []float64{0, 1, 2, 3, 4.1, 5, 6, 14, 15, 16}
	median, jitter := intervals(ts)
	if median != 1 {
		t.Errorf("median %v, want 1", median)
	}
	if jitter < 0.05 || jitter > 0.2 { // all but the hole are within 0.1
		t.Errorf("jitter %v, want about 0.1", jitter)
	}
	gaps := findGaps(ts, median)
	if len(gaps) != 1 || gaps[0] != (Gap{After: 6, Duration: 8}) {
		t.Errorf("gaps %v, want one of 8 s after row 6", gaps)
	}
	r := &Run{T: ts, Quality: Quality{Gaps: gaps}}
	if got := r.Segments(); !slices.Equal(got, [][2]int{{0, 7}, {7, 10}}) {
		t.Errorf("segments %v", got)
	}
}

// The quantum is that of the converter, whatever the printing adds.
func TestQuantum(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 5))
	noise := ramp(2000, func(int) float64 { return 40 + rng.NormFloat64() })
	for _, c := range []struct {
		name string
		step float64
		f    func(y float64) float64
		want float64
	}{
		{"tenths", 0.1, func(y float64) float64 { return math.Round(10*y) / 10 }, 0.1},
		{"ten bits of 330 K, printed to thousandths", 0, func(y float64) float64 { return math.Round(1000*math.Round(y/0.322265625)*0.322265625) / 1000 }, 0.322265625},
		{"tenths of degF", 0, func(y float64) float64 { return (math.Round(10*(1.8*y+32))/10 - 32) / 1.8 }, 0.1 / 1.8},
		{"none", 0, func(y float64) float64 { return y }, 0},
	} {
		got := quantum(mapped(noise, c.f))
		if math.Abs(got-c.want) > 0.005*c.want {
			t.Errorf("%s: %v, want %v", c.name, got, c.want)
		}
	}
	if got := quantum(ramp(50, func(int) float64 { return 3 })); got != 0 {
		t.Errorf("a constant has quantum %v", got)
	}
}

// A lone outlier is a spike; noise, a bump's rise and a step are none.
func TestSpikes(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 6))
	rise := func(i int) float64 {
		return 24 + 60*(1-math.Exp(-math.Max(0, float64(i-300))/20)) + 0.1*rng.NormFloat64()
	}
	y := ramp(1000, rise)
	if got := findSpikes(y, 0); len(got) != 0 {
		t.Errorf("spikes %v in a clean record", got)
	}
	y[500] += 30
	y[700] -= 30
	if got := findSpikes(y, 0); !slices.Equal(got, []int{500, 700}) {
		t.Errorf("spikes %v, want 500 and 700", got)
	}
	step := ramp(100, func(i int) float64 { return float64(10 * (i / 50)) })
	if got := findSpikes(step, 0); len(got) != 0 {
		t.Errorf("spikes %v in a step", got)
	}
}

// A fill value is told from a reading by its distance.
func TestSentinels(t *testing.T) {
	for _, c := range []struct {
		name string
		in   []float64
		want []float64
	}{
		{"far away", []float64{20, 21, 9999, 25}, []float64{20, 21, nan, 25}},
		{"an oven at 999", []float64{900, 950, 999, 1010}, []float64{900, 950, 999, 1010}},
		{"nothing else", []float64{9999, 9999}, []float64{9999, 9999}},
		{"NaN stays", []float64{20, nan, -9999}, []float64{20, nan, nan}},
	} {
		v := slices.Clone(c.in)
		setSentinelsAside(v, fillValues, map[string]int{})
		same(t, c.name, v, c.want, 0)
	}
	drive := append(ramp(50, func(int) float64 { return 0 }), ramp(50, func(int) float64 { return 32767 })...)
	u := slices.Clone(drive)
	setInputSentinelsAside(u, unitless, map[string]int{})
	same(t, "a drive of 16 bits", u, drive, 0)
	u[10] = 9999
	missing := map[string]int{}
	setInputSentinelsAside(u[:40], unitless, missing)
	if !math.IsNaN(u[10]) || missing["sentinel 9999"] != 1 {
		t.Errorf("the fill value of an input stayed: %v", missing)
	}
}

// An input that was lost while it changed is said; one written only when it
// changes, or the same before and after, is none.
func TestInputChangeUnseen(t *testing.T) {
	steps := func(lost ...int) []float64 {
		return with(ramp(20, func(i int) float64 { return float64(2 + 2*(i/10)) }), func() (pairs []float64) {
			for _, i := range lost {
				pairs = append(pairs, float64(i), nan)
			}
			return pairs
		}()...)
	}
	for _, c := range []struct {
		name string
		u    []float64
		want bool
	}{
		{"nothing lost", steps(), false},
		{"lost at rest", steps(3, 4, 15), false},
		{"lost over the change", steps(10, 11), true},
		{"lost up to the change", steps(8, 9), true},
		{"written on change", steps(1, 2, 3, 4, 5, 6, 7, 8, 9, 11, 12, 13, 14, 15, 16, 17, 18, 19), false},
	} {
		r := &rows{counts: counts{dropped: map[string]int{}, missing: map[string]int{}}}
		r.t = make([]int64, len(c.u))
		for i := range r.t {
			r.t[i] = int64(i) * 5e8
		}
		r.v[roleInput] = c.u
		if err := r.holdInput(); err != nil {
			t.Fatal(err)
		}
		if got := slices.ContainsFunc(r.notes, func(n Note) bool { return n.Code == "input-change-unseen" }); got != c.want {
			t.Errorf("%s: said %v, want %v (%v)", c.name, got, c.want, r.notes)
		}
	}
}
