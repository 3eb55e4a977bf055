package fit

import (
	"math"

	"gonum.org/v1/gonum/floats"

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

// residual sets left to what x leaves of a part of the full log.
func (r *record) residual(left []float64, x explained, p part) {
	walk := r.leaving(x, p)
	for len(left) > 0 {
		n := min(pieceRows, len(left))
		walk.next(left[:n])
		left = left[n:]
	}
}

// leaving walks over the rows of a part of the full log and finds what x leaves of them.
type leaving struct {
	r  *record
	x  explained
	lo int // the next row

	responses
	base, slope float64
	response    func(dst [][]float64) int
	dst         [1][]float64

	// Of the initial state: its coefficients, the response to the change at the first row,
	// or the columns of free states.
	state       []float64
	startedRows func(dst [][]float64) int
	column      []float64
	free        [][]float64
}

func (r *record) leaving(x explained, p part) *leaving {
	l := &leaving{r: r, x: x, lo: p.lo, base: x.beta[0], state: x.beta[1:]}
	l.sim = p.sim
	l.response = p.sim.Pieces(x.st, x.lags, x.dead, false)
	if r.drift {
		l.slope, l.state = x.beta[1], x.beta[2:]
	}
	switch r.rest {
	case earlier:
		l.started = p.sim.WithInput(r.fromFirstRow())
		l.startedRows = l.started.Pieces(x.st, x.lags, x.dead, false)
	case free: // from the first row of the log, whatever the part
		l.free = columns(max(x.st.Order(), 1), len(r.root.t))
		r.root.sim.Clone().FreeStates(l.free, x.st, x.lags, x.dead)
	}
	return l
}

// next sets rows to what is left of the next ones.
func (l *leaving) next(rows []float64) {
	l.dst[0] = rows
	l.response(l.dst[:])
	lo, root := l.lo, l.r.root
	logged := root.y[lo : lo+len(rows)]
	if l.slope == 0 {
		for k, v := range rows {
			rows[k] = logged[k] - l.x.gain*v - l.base
		}
	} else {
		t := root.t[lo : lo+len(rows)]
		for k, v := range rows {
			rows[k] = logged[k] - l.x.gain*v - l.base - l.slope*t[k]
		}
	}
	switch l.r.rest {
	case earlier:
		l.column = resize(l.column, len(rows))
		l.startedRows([][]float64{l.column})
		floats.AddScaled(rows, -l.state[0], l.column)
	case free:
		for i, b := range l.state {
			floats.AddScaled(rows, -b, l.free[i][lo:lo+len(rows)])
		}
	}
	l.lo += len(rows)
}

// line passes the next n rows where x is a straight line over them.
func (l *leaving) line(n int) (model line, ok bool) {
	step := l.r.root.step
	response, started, ok := l.lines(n, step)
	if !ok || l.r.rest == free {
		return line{}, false
	}
	model = line{l.base + l.slope*l.r.root.t[l.lo], l.slope * step}.plus(l.x.gain, response)
	if l.started != nil {
		model = model.plus(l.state[0], started)
	}
	l.rest(n)
	l.lo += n
	return model, true
}

// responses walk over the rows of a log: that to its input and, where an earlier input is
// unknown, that to the change at the first row, else nil.
type responses struct{ sim, started *ident.Simulator }

// lines are the responses over the next n rows, step s apart, where both are straight lines.
func (s responses) lines(n int, step float64) (response, started line, ok bool) {
	level, slope, ok := s.sim.Resting(n)
	response = line{level, slope * step}
	if ok && s.started != nil {
		level, slope, ok = s.started.Resting(n)
		started = line{level, slope * step}
	}
	return response, started, ok
}

// rest passes these rows.
func (s responses) rest(n int) {
	s.sim.Rest(n)
	if s.started != nil {
		s.started.Rest(n)
	}
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
