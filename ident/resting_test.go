package ident

import (
	"math"
	"testing"
)

// TestResting holds a response of which the resting rows are passed as straight lines, and
// its sensitivities, to those written at once.
func TestResting(t *testing.T) {
	const n = 30000
	even := make([]float64, n)
	for k := range even {
		even[k] = 0.1 * float64(k)
	}
	in := Input{Before: 0.5, At: []float64{20, 20.05, 900, 2950}, Value: []float64{1.5, 2, -1, 0.7}}
	for _, c := range []struct {
		structure string
		lags      []float64 // s
		dead      float64   // s
		fewest    int       // rows that must have been passed as lines
	}{
		{"fopdt", []float64{1.7}, 0.33, 25000},
		{"fopdt", []float64{0}, 0.25, 25000},
		{"fopdt", []float64{40}, 0.25, 1000}, // hardly ever at rest
		{"chain3", []float64{4, 1, 0.2}, 0.3, 20000},
		{"chain3", []float64{4, 0, 0.2}, 0.3, 20000},
		{"chain2", []float64{0, 0}, 1.7, 25000},
		{"equal4", []float64{2}, 0, 20000},
		{"ipdt", nil, 0.37, 25000},
		{"ipdt", nil, 0, 25000},
	} {
		st := structure(t, c.structure)
		s := NewSimulator(even, in)
		want := columnsFor(st, n)
		s.Sensitivities(want, st, c.lags, c.dead)
		unit := make([]float64, len(want))
		for i, column := range want {
			unit[i] = max(span(column), 1e-300)
		}
		for _, size := range []int{7, 100, 400} {
			next := s.Pieces(st, c.lags, c.dead, true)
			got := columnsFor(st, size)
			passed := 0
			for lo := 0; lo < n; {
				rows := min(size, n-lo)
				if level, slope, ok := s.Resting(rows); ok {
					s.Rest(rows)
					passed += rows
					last := len(want) - 1
					for k := range rows {
						got[0][k] = level + slope*(even[lo+k]-even[lo])
						for i := 1; i < last; i++ {
							got[i][k] = 0
						}
						got[last][k] = -slope
					}
				} else if n := next(sliceColumns(got, rows)); n != rows {
					t.Fatalf("%s: %d rows written, want %d", c.structure, n, rows)
				}
				for i := range want {
					if d := greatestDifference(got[i][:rows], want[i][lo:lo+rows]); !(d <= 1e-11*unit[i]) {
						t.Fatalf("%s %v, %g s, pieces of %d: column %d is off by %.2g of its span in the rows from %d on", c.structure, c.lags, c.dead, size, i, d/unit[i], lo)
					}
				}
				lo += rows
			}
			if passed < c.fewest {
				t.Errorf("%s %v, pieces of %d: only %d rows passed as lines", c.structure, c.lags, size, passed)
			}
		}
	}
}

func sliceColumns(cols [][]float64, rows int) [][]float64 {
	out := make([][]float64, len(cols))
	for i, c := range cols {
		out[i] = c[:rows]
	}
	return out
}

// Nothing rests where a change falls into the rows, before the first row, behind the last,
// without valid lags, or where rows are uneven or means.
func TestNotResting(t *testing.T) {
	st := structure(t, "fopdt")
	in := Input{At: []float64{3}, Value: []float64{1}}
	skip := func(s *Simulator, lags []float64, rows int) *Simulator {
		s.Pieces(st, lags, 0.5, false)([][]float64{make([]float64, rows)})
		return s
	}
	even := uniformRows(200)
	uneven := append([]float64(nil), even...)
	for k := range uneven {
		uneven[k] += 0.03 * math.Sin(float64(k*k))
	}
	means := NewBlockSimulator([]Row{{T: 0, M: 1}, {T: 1, H: 1, M: 4}, {T: 5, H: 1, M: 4}}, in)
	for name, c := range map[string]struct {
		s    *Simulator
		rows int
		ok   bool
	}{
		"before the change":   {skip(NewSimulator(even, in), []float64{0.1}, 2), 1, true},
		"the change":          {skip(NewSimulator(even, in), []float64{0.1}, 2), 100, false},
		"right after it":      {skip(NewSimulator(even, in), []float64{1}, 75), 10, false},
		"long after it":       {skip(NewSimulator(even, in), []float64{0.01}, 90), 100, true},
		"first row":           {skip(NewSimulator(even, in), []float64{0.01}, 0), 1, false},
		"behind the last row": {skip(NewSimulator(even, in), []float64{0.01}, 90), 120, false},
		"no rows":             {skip(NewSimulator(even, in), []float64{0.01}, 90), 0, false},
		"no lag":              {skip(NewSimulator(even, in), []float64{math.NaN()}, 90), 10, false},
		"uneven":              {skip(NewSimulator(uneven, in), []float64{0.01}, 90), 10, false},
		"means":               {skip(means, []float64{0.01}, 2), 1, false},
	} {
		if _, _, ok := c.s.Resting(c.rows); ok != c.ok {
			t.Errorf("%s: resting is %v", name, ok)
		}
	}
}
