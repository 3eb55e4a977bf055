package ident

import (
	"encoding/json"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"slices"
	"sync"
	"testing"
)

// closedForms is testdata/closed_forms.json, written by closed_forms.py.
type closedForms struct {
	Input struct {
		Before float64
		At     []float64
		Value  []float64
	}
	Grids map[string][]float64
	Cases []struct {
		Structure string
		Lags      []float64
		DeadTime  float64 `json:"dead_time"`
		Grid      string
		Columns   [][]float64
	}
}

func readClosedForms(t *testing.T) closedForms {
	t.Helper()
	blob, err := os.ReadFile("testdata/closed_forms.json")
	if err != nil {
		t.Fatal(err)
	}
	var c closedForms
	if err := json.Unmarshal(blob, &c); err != nil {
		t.Fatal(err)
	}
	return c
}

func structure(t testing.TB, name string) Structure {
	t.Helper()
	st, err := ParseStructure(name)
	if err != nil {
		t.Fatal(err)
	}
	return st
}

func columnsFor(st Structure, rows int) [][]float64 {
	dst := make([][]float64, st.NumLags()+2)
	for i := range dst {
		dst[i] = make([]float64, rows)
	}
	return dst
}

func span(x []float64) float64 { return slices.Max(x) - slices.Min(x) }

func greatestDifference(a, b []float64) float64 {
	worst := 0.0
	for k := range a {
		if d := math.Abs(a[k] - b[k]); !(d <= worst) {
			worst = d
		}
	}
	return worst
}

// TestClosedForms holds the simulation to closed forms computed in 300-digit
// arithmetic: distinct, equal, nearly equal (1e-6 apart) and widely spread
// lags, on uniform, jittered and gapped rows, with changes of the input between
// the rows and at the first.
func TestClosedForms(t *testing.T) {
	forms := readClosedForms(t)
	in := Input{forms.Input.Before, forms.Input.At, forms.Input.Value}
	for _, c := range forms.Cases {
		name := fmt.Sprintf("%s %v %g %s", c.Structure, c.Lags, c.DeadTime, c.Grid)
		st := structure(t, c.Structure)
		s := NewSimulator(forms.Grids[c.Grid], in)
		got := columnsFor(st, len(forms.Grids[c.Grid]))
		s.Sensitivities(got, st, c.Lags, c.DeadTime)
		// The times themselves are rounded, to 4e-15 s at 29 s.
		tolerance := 1e-11 + 4e-15/slices.Min(c.Lags)
		if c.Structure != "fopdt" {
			tolerance = 1e-11
		}
		unit := span(c.Columns[0])
		if d := greatestDifference(got[0], c.Columns[0]); !(d <= tolerance*unit) {
			t.Errorf("%s: response is off by %.2g of its span", name, d/unit)
		}
		for i, column := range c.Columns[1:] {
			// Of a response that is over before the next row, the rows show only
			// the last of the tail; its span is at least a hundredth of input
			// over lag.
			unit := max(span(column), 0.01*span(in.Value)/slices.Max(c.Lags))
			if d := greatestDifference(got[1+i], column); !(d <= tolerance*unit) {
				t.Errorf("%s: sensitivity %d is off by %.2g of its span", name, i, d/unit)
			}
		}
		if d := greatestDifference(s.Response(nil, st, c.Lags, c.DeadTime), c.Columns[0]); !(d <= tolerance*unit) {
			t.Errorf("%s: response alone is off by %.2g of its span", name, d/unit)
		}
	}
}

// TestLongRecord compares 2e5 uniform and 2e4 jittered rows with closed forms
// evaluated row by row: nothing may build up, and the pieces in which a run is
// computed must join.
func TestLongRecord(t *testing.T) {
	jittered := uniformRows(20_000)
	rng := rand.New(rand.NewPCG(6, 1))
	for k := range jittered {
		jittered[k] += 0.03 * (rng.Float64() - 0.5)
	}
	for name, times := range map[string][]float64{"uniform": uniformRows(200_000), "jittered": jittered} {
		t.Run(name, func(t *testing.T) { compareLong(t, times) })
	}
}

func compareLong(t *testing.T, times []float64) {
	rows := len(times)
	in := Input{At: []float64{1}, Value: []float64{1}}
	s := NewSimulator(times, in)
	for _, c := range []struct {
		structure string
		lags      []float64
		step      func(t float64) float64
	}{
		{"chain2", []float64{0.5, 0.04}, func(t float64) float64 {
			return 1 - (0.5*math.Exp(-t/0.5)-0.04*math.Exp(-t/0.04))/0.46
		}},
		{"fopdt", []float64{9e4}, func(t float64) float64 { return -math.Expm1(-t / 9e4) }},
		{"chain2", []float64{2e5, 3e4}, func(t float64) float64 {
			return 1 - (2e5*math.Exp(-t/2e5)-3e4*math.Exp(-t/3e4))/1.7e5
		}},
		{"fopdt", []float64{1700}, func(t float64) float64 { return -math.Expm1(-t / 1700) }},
		{"chain2", []float64{2000, 300}, func(t float64) float64 {
			return 1 - (2000*math.Exp(-t/2000)-300*math.Exp(-t/300))/1700
		}},
		{"equal2", []float64{700}, func(t float64) float64 { return 1 - (1+t/700)*math.Exp(-t/700) }},
		{"equal4", []float64{400}, func(t float64) float64 {
			x := t / 400
			return 1 - (1+x+x*x/2+x*x*x/6)*math.Exp(-x)
		}},
	} {
		want := make([]float64, rows)
		for k, at := range times {
			if at >= 1.22 {
				want[k] = c.step(at - 1.22)
			}
		}
		st := structure(t, c.structure)
		all := columnsFor(st, rows)
		s.Sensitivities(all, st, c.lags, 0.22)
		if d := greatestDifference(all[0], want); !(d < 5e-13) {
			t.Errorf("%s: off by %g", c.structure, d)
		}
		if d := greatestDifference(s.Response(nil, st, c.lags, 0.22), want); !(d < 5e-13) {
			t.Errorf("%s: response alone is off by %g", c.structure, d)
		}
	}
}

// TestDifferences compares the sensitivities with central differences of the
// response, on uniform and jittered rows, for a random input that changes at
// every row in one part, away from kinks.
func TestDifferences(t *testing.T) {
	rng := rand.New(rand.NewPCG(4, 4))
	uniform := uniformRows(900)
	jittered := slices.Clone(uniform)
	for k := range jittered {
		jittered[k] += 0.02 * (rng.Float64() - 0.5)
	}
	var u []float64
	for k := range uniform {
		switch {
		case k > 300 && k < 500:
			u = append(u, rng.NormFloat64())
		case k%37 == 0:
			u = append(u, 3*rng.Float64())
		default:
			u = append(u, u[k-1])
		}
	}
	for _, times := range [][]float64{uniform, jittered} {
		s := NewSimulator(times, HeldInput(times, u, Power))
		for name, lags := range map[string][]float64{
			"fopdt": {0.7}, "chain2": {0.02, 0.9}, "chain3": {2.1, 0.65, 0.05}, "chain4": {0.5, 1.9, 0.8, 0.03},
			"equal2": {0.4}, "equal5": {0.3}, "equal8": {0.2}, "ipdt": nil,
		} {
			st := structure(t, name)
			const theta = 0.2345
			got := columnsFor(st, len(times))
			s.Sensitivities(got, st, lags, theta)
			parameters := append(slices.Clone(lags), theta)
			for i, value := range parameters {
				h := 1e-4 * value
				at := func(x float64) []float64 {
					p := slices.Clone(parameters)
					p[i] = x
					return s.Response(nil, st, p[:len(lags)], p[len(lags)])
				}
				// Fourth-order differences: the second-order error would hide 1e-6.
				a, b, c, d := at(value-2*h), at(value-h), at(value+h), at(value+2*h)
				unit := max(slices.Max(got[1+i]), -slices.Min(got[1+i]))
				for k := range times {
					want := (a[k] - 8*b[k] + 8*c[k] - d[k]) / (12 * h)
					if diff := math.Abs(got[1+i][k] - want); !(diff <= 1e-6*unit) {
						t.Fatalf("%s parameter %d, row %d: got %v, differences give %v", name, i, k, got[1+i][k], want)
					}
				}
			}
		}
	}
}

// TestZeroLag is the limit of a chain whose lag goes to zero: the shorter
// chain, and one-sided derivatives.
func TestZeroLag(t *testing.T) {
	times := []float64{0, 0.1, 0.2, 0.3, 0.41, 0.5, 0.6, 0.7, 0.8, 0.9, 1, 1.5, 2}
	s := NewSimulator(times, Input{At: []float64{0.05}, Value: []float64{2}})
	two, three := structure(t, "chain2"), structure(t, "chain3")
	short, long := columnsFor(two, len(times)), columnsFor(three, len(times))
	s.Sensitivities(short, two, []float64{0.5, 0.2}, 0.12)
	s.Sensitivities(long, three, []float64{0.2, 0, 0.5}, 0.12)
	for _, pair := range [][2]int{{0, 0}, {1, 3}, {2, 1}, {3, 4}, {3, 2}} {
		if d := greatestDifference(short[pair[0]], long[pair[1]]); d != 0 {
			t.Errorf("column %d of chain3 differs from column %d of chain2 by %g", pair[1], pair[0], d)
		}
	}
	tiny := columnsFor(three, len(times))
	s.Sensitivities(tiny, three, []float64{0.2, 1e-9, 0.5}, 0.12)
	for i := range long {
		if d := greatestDifference(tiny[i], long[i]); d > 1e-7 {
			t.Errorf("column %d jumps by %g at a lag of zero", i, d)
		}
	}
	none := columnsFor(two, len(times))
	s.Sensitivities(none, two, []float64{0, 0}, 0.25)
	for k, at := range times {
		want := 0.0
		if at >= 0.3 {
			want = 2
		}
		if none[0][k] != want || none[1][k] != 0 || none[3][k] != 0 {
			t.Errorf("without a lag, row %d: %v %v %v, want %v 0 0", k, none[0][k], none[1][k], none[3][k], want)
		}
	}
}

// TestIntegrator compares ipdt with the integral by hand.
func TestIntegrator(t *testing.T) {
	times := []float64{0, 1, 2, 3.5, 5, 9}
	in := Input{Before: 2, At: []float64{0, 1, 4}, Value: []float64{3, 5, 0}}
	got := columnsFor(structure(t, "ipdt"), len(times))
	NewSimulator(times, in).Sensitivities(got, structure(t, "ipdt"), nil, 0.5)
	// Less 2, the input is 1 from 0.5 s on, 3 from 1.5 s and −2 from 4.5 s.
	want := []float64{0, 0.5, 1 + 1.5, 1 + 6, 1 + 9 - 1, 1 + 9 - 9}
	slope := []float64{0, -1, -3, -3, 2, 2}
	for k := range times {
		near(t, fmt.Sprintf("row %d", k), got[0][k], want[k], 1e-14)
		near(t, fmt.Sprintf("row %d, dead time", k), got[1][k], slope[k], 0)
	}
}

// TestEarlierChanges counts changes before the first row and at it.
func TestEarlierChanges(t *testing.T) {
	st := structure(t, "chain2")
	lags := []float64{3, 1}
	all := uniformRows(400)
	in := Input{At: []float64{1, 5, 10, 10.02}, Value: []float64{1, -2, 4, 3}}
	whole := NewSimulator(all, in).Response(nil, st, lags, 0.22)
	late := NewSimulator(all[200:], in).Response(nil, st, lags, 0.22)
	if d := greatestDifference(whole[200:], late); d > 1e-14 {
		t.Errorf("the second half of a record differs by %g from the whole", d)
	}
}

// TestStrangeParameters must neither panic nor hang, and give NaN where
// nothing sensible can be said.
func TestStrangeParameters(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	times := append(uniformRows(300), 15.01, 15.06, 17, 1e6)
	rows := []Row{{T: 0, H: 0.05, M: 40}, {T: 2, H: 0.05, M: 40}, {T: 7, H: nan, M: 1}, {T: 8, H: 1, M: 1e6}}
	in := Input{At: []float64{0, 1, 1.01, 9}, Value: []float64{1, 2, 0, 5}}
	values := []float64{0, 1e-320, 1e-200, 1e-59, 1e-30, 1e-9, 0.05, 1, 1e9, 1e200, math.MaxFloat64, inf, -1, nan}
	for _, s := range []*Simulator{NewSimulator(times, in), NewSimulator(times[40:41], in), NewBlockSimulator(rows, in)} {
		size := len(s.t)
		for _, st := range Structures() {
			got := columnsFor(st, size)
			free := make([][]float64, st.Order()*(1+st.NumLags()))
			for i := range free {
				free[i] = make([]float64, size)
			}
			for _, a := range values {
				for _, b := range values {
					for _, theta := range []float64{0, 0.07, 1e12, inf, -inf, nan, -0.3} {
						lags := []float64{a, b, a, b}[:st.NumLags()]
						s.Sensitivities(got, st, lags, theta)
						bad := !finite(theta)
						for _, tau := range lags {
							bad = bad || !(tau >= 0)
						}
						for i, column := range got {
							for k, v := range column {
								if bad != math.IsNaN(v) || math.IsInf(v, 0) {
									t.Fatalf("%s %v dead time %v: column %d, row %d is %v", st, lags, theta, i, k, v)
								}
							}
						}
						response := s.Response(nil, st, lags, theta)
						if bad != math.IsNaN(response[0]) {
							t.Fatalf("%s %v dead time %v: response starts with %v", st, lags, theta, response[0])
						}
						s.FreeStates(free, st, lags, theta)
						if st.Order() > 0 && bad != math.IsNaN(free[0][0]) {
							t.Fatalf("%s %v dead time %v: free state starts with %v", st, lags, theta, free[0][0])
						}
						if !bad {
							s.FreeStateSensitivities(free, st, lags, theta)
							for i, column := range free {
								for k, v := range column {
									if !finite(v) {
										t.Fatalf("%s %v: free column %d, row %d is %v", st, lags, i, k, v)
									}
								}
							}
						}
					}
				}
			}
		}
	}
	for _, s := range []*Simulator{NewSimulator(nil, in), NewSimulator([]float64{3}, in), NewSimulator(times, Input{Before: 3}), NewBlockSimulator(nil, in)} {
		for _, st := range Structures() {
			lags := []float64{1, 1, 1, 1}[:st.NumLags()]
			s.Sensitivities(columnsFor(st, len(s.t)), st, lags, 1)
		}
	}
}

// TestNoAllocation holds an evaluation to its work space.
func TestNoAllocation(t *testing.T) {
	times := append(uniformRows(200), 10.1, 10.13, 10.3)
	in := benchInputs["telegraph"](times)
	rows := []Row{{T: 0, H: 0.05, M: 40}, {T: 2, H: 0.05, M: 40}, {T: 4, H: 0.05, M: 7}}
	for _, s := range []*Simulator{NewSimulator(times, in), NewBlockSimulator(rows, in)} {
		for _, st := range Structures() {
			dst, lags := columnsFor(st, len(s.t)), []float64{1, 0.3, 0.1, 0.03}[:st.NumLags()]
			if n := testing.AllocsPerRun(10, func() { s.Sensitivities(dst, st, lags, 0.22) }); n != 0 {
				t.Errorf("%s: %g allocations", st, n)
			}
		}
	}
}

// TestClones run at the same time and agree to the bit.
func TestClones(t *testing.T) {
	times := append(uniformRows(500), 26.01, 26.03)
	s := NewSimulator(times, benchInputs["telegraph"](times))
	st := structure(t, "chain3")
	want := s.Response(nil, st, benchLags["chain3"], 0.22)
	var group sync.WaitGroup
	for range 4 {
		clone := s.Clone()
		group.Go(func() {
			for range 20 {
				clone.Response(nil, st, []float64{1, 2, 3}, 0.1)
				if d := greatestDifference(clone.Response(nil, st, benchLags["chain3"], 0.22), want); d != 0 {
					t.Errorf("a clone differs by %g", d)
				}
			}
		})
	}
	group.Wait()
}
