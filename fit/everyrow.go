package fit

import (
	"math"

	"lagwright/ident"
)

// What needs every row of a log takes them in pieces that stay in the cache:
// memory does not grow with the log, and a long log is read at the speed of the
// sums alone.

// pieceRows is how many rows are taken at a time.
const pieceRows = 4096

// explained is a plant with the coefficients of a record's linear columns.
type explained struct {
	st   ident.Structure
	gain float64
	lags []float64
	dead float64
	beta []float64 // baseline, drift, initial state
}

// everyRow visits what x leaves of the full log, piece by piece: row lo and
// those after it. The slice may be written to.
func (r *record) everyRow(x explained, visit func(lo int, left []float64)) {
	root := r.root
	response := root.sim.Clone().Pieces(x.st, x.lags, x.dead, false)
	size := min(pieceRows, len(root.t))
	y, state := make([]float64, size), make([]float64, size)
	initial := r.initialRows(x)
	for lo := 0; lo < len(root.t); {
		n := response([][]float64{y})
		out := y[:n]
		t, logged := root.t[lo:lo+n], root.y[lo:lo+n]
		base, slope := x.beta[0], 0.0
		if r.drift {
			slope = x.beta[1]
		}
		for k, v := range out {
			out[k] = logged[k] - x.gain*v - base - slope*t[k]
		}
		if initial != nil {
			initial(state[:n])
			for k, v := range state[:n] {
				out[k] -= v
			}
		}
		visit(lo, out)
		lo += n
	}
}

// initialRows returns a function that writes what the initial state adds to
// the next rows of the full log; nil at rest.
func (r *record) initialRows(x explained) func(dst []float64) {
	root, beta := r.root, x.beta[1:]
	if r.drift {
		beta = beta[1:]
	}
	switch r.rest {
	case earlier:
		next := root.sim.WithInput(r.fromFirstRow()).Pieces(x.st, x.lags, x.dead, false)
		return func(dst []float64) {
			next([][]float64{dst})
			for k := range dst {
				dst[k] *= beta[0]
			}
		}
	case free:
		cols := columns(max(x.st.Order(), 1), len(root.t))
		root.sim.Clone().FreeStates(cols, x.st, x.lags, x.dead)
		lo := 0
		return func(dst []float64) {
			clear(dst)
			for i, b := range beta {
				for k := range dst {
					dst[k] += b * cols[i][lo+k]
				}
			}
			lo += len(dst)
		}
	}
	return nil
}

// fromFirstRow is an input that changes by one at the first row.
func (r *record) fromFirstRow() ident.Input {
	return ident.Input{At: []float64{r.root.t[0]}, Value: []float64{1}}
}

// part is a range of rows of a full log on which its noise is judged.
type part struct {
	lo, hi int
	sim    *ident.Simulator // of these rows
}

// residual returns what x leaves of a part of the full log.
func (r *record) residual(x explained, p part) []float64 {
	t, y := r.root.t[p.lo:p.hi], r.root.y[p.lo:p.hi]
	out := p.sim.Response(nil, x.st, x.lags, x.dead)
	for k, v := range out {
		out[k] = y[k] - x.gain*v - x.beta[0]
	}
	j := 1
	if r.drift {
		for k, v := range t {
			out[k] -= x.beta[1] * v
		}
		j = 2
	}
	switch r.rest {
	case earlier:
		s := p.sim.WithInput(r.fromFirstRow()).Response(nil, x.st, x.lags, x.dead)
		for k, v := range s {
			out[k] -= x.beta[j] * v
		}
	case free:
		cols := columns(max(x.st.Order(), 1), len(r.root.t))
		r.root.sim.Clone().FreeStates(cols, x.st, x.lags, x.dead)
		for i, b := range x.beta[j:] {
			for k := range out {
				out[k] -= b * cols[i][p.lo+k]
			}
		}
	}
	return out
}

// isEven reports whether all rows lie at the step from one another, apart
// from the rounding of their times.
func isEven(t []float64, step float64) bool {
	for k := 1; k < len(t); k++ {
		if math.Abs(t[k]-t[k-1]-step) > 1e-7*step {
			return false
		}
	}
	return true
}
