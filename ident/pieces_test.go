package ident

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// piecesInput changes between rows, on rows, twice within one interval, before
// the first row and after the last, for rows from 0 to end.
func piecesInput(end float64) Input {
	return Input{
		Before: 0.5,
		At:     []float64{-0.3 * end, 0, 0.101 * end, 0.1011 * end, 0.4 * end, 0.73 * end, 2 * end},
		Value:  []float64{0.2, 1.2, -1, 2, 0.5, 1.5, 7},
	}
}

// piecesLog is a kind of rows and the input they answer to.
type piecesLog struct {
	name string
	sim  *Simulator
	rows int
}

func piecesLogs() []piecesLog {
	rng := rand.New(rand.NewPCG(11, 4))
	var out []piecesLog
	samples := func(name string, t []float64) {
		out = append(out, piecesLog{name, NewSimulator(t, piecesInput(t[len(t)-1])), len(t)})
	}
	blocks := func(name string, rows []Row) {
		out = append(out, piecesLog{name, NewBlockSimulator(rows, piecesInput(rows[len(rows)-1].last())), len(rows)})
	}
	even := func(n int) []float64 {
		t := make([]float64, n)
		for k := range t {
			t[k] = 0.1 * float64(k)
		}
		return t
	}
	samples("one row", even(1))
	samples("two rows", even(2))
	samples("even", even(700))
	samples("even, long enough to leap", even(2*longStretch+300))
	ragged, gaps := even(600), even(600)
	for k := range ragged {
		ragged[k] += 0.09 * (rng.Float64() - 0.5)
		gaps[k] += 40 * float64(k/200) // uniform stretches with gaps between
	}
	samples("ragged", ragged)
	samples("gaps", gaps)

	widening := []Row{{T: 0, M: 1}}
	for m := 1; len(widening) < 400; {
		last := widening[len(widening)-1]
		widening = append(widening, Row{T: last.last() + 0.1, H: 0.1, M: m})
		if len(widening)%50 == 0 {
			m *= 2
		}
	}
	blocks("blocks of powers of two", widening)
	var odd, jittered, singles []Row
	for k := range 300 {
		odd = append(odd, Row{T: 0.5 * float64(k), H: 0.1, M: 5 - 2*(k/150)})
		jittered = append(jittered, Row{T: 0.9*float64(k) + 0.09*rng.Float64(), H: 0.1, M: 8})
		singles = append(singles, Row{T: 0.1 * float64(k), H: math.NaN(), M: 1})
	}
	blocks("blocks of five and three", odd)
	blocks("blocks off the series", jittered)
	blocks("blocks of one sample", singles)
	return out
}

// TestPieces holds a response and its sensitivities written in pieces of every
// size to those written at once, and asks for each row exactly once. The pieces
// carry the state in other strides than the whole, so they may differ by what
// rounding builds up: 1e-11 of the span, as in TestLongRecord.
func TestPieces(t *testing.T) {
	for _, log := range piecesLogs() {
		for _, c := range []struct {
			structure string
			lags      []float64 // s
			dead      float64   // s
		}{
			{"fopdt", []float64{1.7}, 0.33},
			{"fopdt", []float64{0.004}, 0},
			{"fopdt", []float64{0}, 0.25},
			{"chain2", []float64{3, 0.4}, 0.3},
			{"chain2", []float64{0.4, 3}, 0.3}, // any order
			{"chain2", []float64{2, 2}, 0},
			{"chain2", []float64{2, 0}, 0.7},
			{"chain2", []float64{0, 0}, 0.7},
			{"chain3", []float64{9, 1, 0.02}, 0.05},
			{"chain3", []float64{9, 0, 0.02}, 1e3}, // later than the log
			{"chain4", []float64{5, 4, 1, 0.3}, 1.234},
			{"equal3", []float64{0.8}, 0.4},
			{"equal4", []float64{0}, 0.4},
			{"ipdt", nil, 0.37},
		} {
			for _, size := range []int{1, 2, 7, 256, 4096, log.rows - 1, log.rows, log.rows + 5} {
				if size < 1 || size == 1 && log.rows > 1000 {
					continue
				}
				name := fmt.Sprintf("%s, %s %v %g s, pieces of %d", log.name, c.structure, c.lags, c.dead, size)
				comparePieces(t, name, log, structure(t, c.structure), c.lags, c.dead, size)
			}
		}
	}
}

func comparePieces(t *testing.T, name string, log piecesLog, st Structure, lags []float64, dead float64, size int) {
	t.Helper()
	whole := columnsFor(st, log.rows)
	log.sim.Sensitivities(whole, st, lags, dead)
	response := log.sim.Response(nil, st, lags, dead)
	for _, sensitivities := range []bool{false, true} {
		want := [][]float64{response}
		if sensitivities {
			want = whole
		}
		got := gatherPieces(t, name, log, st, lags, dead, size, sensitivities, len(want))
		for i, column := range want {
			unit := max(span(column), 1e-300)
			if d := greatestDifference(got[i], column); !(d <= 1e-11*unit) {
				t.Errorf("%s, sensitivities %v: column %d is off by %.2g of its span", name, sensitivities, i, d/unit)
			}
		}
	}
}

// gatherPieces joins the pieces. What lies behind the last row of a piece must
// stay as it was.
func gatherPieces(t *testing.T, name string, log piecesLog, st Structure, lags []float64, dead float64, size int, sensitivities bool, count int) [][]float64 {
	t.Helper()
	const untouched = 12345.0
	next := log.sim.Pieces(st, lags, dead, sensitivities)
	got := make([][]float64, count)
	piece := make([][]float64, count)
	for i := range piece {
		piece[i] = make([]float64, size)
	}
	for done := 0; done < log.rows; {
		for _, column := range piece {
			for k := range column {
				column[k] = untouched
			}
		}
		n := next(piece)
		if n != min(size, log.rows-done) {
			t.Fatalf("%s: %d rows written after %d of %d", name, n, done, log.rows)
		}
		for i, column := range piece {
			got[i] = append(got[i], column[:n]...)
			for _, v := range column[n:] {
				if v != untouched {
					t.Fatalf("%s: written behind the last row", name)
				}
			}
		}
		done += n
	}
	if n := next(piece); n != 0 {
		t.Errorf("%s: %d rows written after the last", name, n)
	}
	return got
}

// TestPiecesOfNothing: what no chain can have gives NaN in every row, and an end.
func TestPiecesOfNothing(t *testing.T) {
	st := structure(t, "chain2")
	for _, c := range []struct {
		lags []float64
		dead float64
	}{{[]float64{1, -1}, 0}, {[]float64{1, math.NaN()}, 0}, {[]float64{1, 1}, math.Inf(1)}} {
		for _, sensitivities := range []bool{false, true} {
			s := NewSimulator(uniformRows(10), Input{At: []float64{1}, Value: []float64{1}})
			next := s.Pieces(st, c.lags, c.dead, sensitivities)
			dst := columnsFor(st, 4)
			if !sensitivities {
				dst = dst[:1]
			}
			for _, want := range []int{4, 4, 2, 0} {
				if n := next(dst); n != want {
					t.Fatalf("lags %v, dead time %g: %d rows written, want %d", c.lags, c.dead, n, want)
				}
				for i, column := range dst {
					for k, v := range column[:want] {
						if !math.IsNaN(v) {
							t.Errorf("lags %v, dead time %g: column %d, row %d is %g", c.lags, c.dead, i, k, v)
						}
					}
				}
			}
		}
	}
}

// TestPiecesLeaveClonesAlone: other simulators of the same rows may be at work
// between two pieces.
func TestPiecesLeaveClonesAlone(t *testing.T) {
	st := structure(t, "chain3")
	for _, log := range piecesLogs() {
		want := columnsFor(st, log.rows)
		log.sim.Sensitivities(want, st, []float64{4, 1, 0.2}, 0.3)
		clone := log.sim.Clone()
		other := log.sim.WithInput(Input{At: []float64{0}, Value: []float64{3}})
		next := log.sim.Pieces(st, []float64{4, 1, 0.2}, 0.3, true)
		piece := columnsFor(st, 50)
		for done := 0; done < log.rows; {
			n := next(piece)
			for i := range piece {
				unit := max(span(want[i]), 1e-300)
				if d := greatestDifference(piece[i][:n], want[i][done:done+n]); !(d <= 1e-11*unit) {
					t.Errorf("%s: column %d from row %d is off by %.2g of its span", log.name, i, done, d/unit)
				}
			}
			done += n
			clone.Response(nil, structure(t, "chain2"), []float64{2, 0.1}, 1)
			other.Response(nil, structure(t, "ipdt"), nil, 0)
		}
	}
}
