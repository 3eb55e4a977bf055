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

// part is a range of rows of a full log.
type part struct {
	lo, hi int
	sim    *ident.Simulator // of these rows
}

// everyRow visits what x leaves of the full log, piece by piece: row lo and
// those after it. The slice may be written to.
func (r *record) everyRow(x explained, visit func(lo int, left []float64)) {
	n := len(r.root.t)
	next := r.leaving(x, part{0, n, r.root.sim.Clone()})
	left := make([]float64, min(pieceRows, n))
	for lo := 0; lo < n; {
		rows := left[:min(len(left), n-lo)]
		next(rows)
		visit(lo, rows)
		lo += len(rows)
	}
}

// residual sets left to what x leaves of a part of the full log.
func (r *record) residual(left []float64, x explained, p part) {
	next := r.leaving(x, p)
	for len(left) > 0 {
		n := min(pieceRows, len(left))
		next(left[:n])
		left = left[n:]
	}
}

// leaving returns a function that sets rows, at most pieceRows of them, to what x
// leaves of the next rows of a part of the full log.
func (r *record) leaving(x explained, p part) func(rows []float64) {
	takeInitial := r.initialRows(x, p)
	response := p.sim.Pieces(x.st, x.lags, x.dead, false)
	base, slope := x.beta[0], 0.0
	if r.drift {
		slope = x.beta[1]
	}
	lo := p.lo
	var dst [1][]float64
	return func(rows []float64) {
		dst[0] = rows
		response(dst[:])
		t, logged := r.root.t[lo:lo+len(rows)], r.root.y[lo:lo+len(rows)]
		for k, v := range rows {
			rows[k] = logged[k] - x.gain*v - base - slope*t[k]
		}
		takeInitial(rows)
		lo += len(rows)
	}
}

// initialRows returns a function that takes what the initial state adds out of
// the next rows of a part.
func (r *record) initialRows(x explained, p part) func(rows []float64) {
	beta := x.beta[1:]
	if r.drift {
		beta = beta[1:]
	}
	take := func(rows, column []float64, times float64) {
		for k, v := range column[:len(rows)] {
			rows[k] -= times * v
		}
	}
	switch r.rest {
	case earlier:
		next := p.sim.WithInput(r.fromFirstRow()).Pieces(x.st, x.lags, x.dead, false)
		buf := make([]float64, min(pieceRows, p.hi-p.lo))
		return func(rows []float64) {
			next([][]float64{buf[:len(rows)]})
			take(rows, buf, beta[0])
		}
	case free: // from the first row of the log, whatever the part
		cols := columns(max(x.st.Order(), 1), len(r.root.t))
		r.root.sim.Clone().FreeStates(cols, x.st, x.lags, x.dead)
		lo := p.lo
		return func(rows []float64) {
			for i, b := range beta {
				take(rows, cols[i][lo:], b)
			}
			lo += len(rows)
		}
	}
	return func([]float64) {}
}

// fromFirstRow is an input that changes by one at the first row.
func (r *record) fromFirstRow() ident.Input {
	return ident.Input{At: []float64{r.root.t[0]}, Value: []float64{1}}
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
