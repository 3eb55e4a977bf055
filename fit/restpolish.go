package fit

import "math"

// restWalk passes the pieces of a full log in which the normal equations of an optimum need
// no rows: at rest every column is a straight line, or nothing, and what is left is
// known by its sums.
type restWalk struct {
	f    *fitted
	r    *record
	gain float64
	beta []float64

	responses
	left restRows
}

// pass adds the products of the piece that begins at row lo to the upper triangle and
// returns its rows; ok is false where its rows must be passed one by one.
func (s *restWalk) pass(lo int, w *whitener, carry []carried, upper [][]float64) (n int, ok bool) {
	root, k := s.r.root, &w.k
	n = min(root.sums.pieceLength(), len(root.t)-lo)
	reach, ok := root.sums.serve(w, lo, n)
	if !ok {
		return 0, false
	}
	cols, model, ok := s.columns(lo, n)
	if !ok {
		return 0, false
	}
	last, rows, white := len(cols), float64(n), k.s.unfiltered()
	if !white {
		// What the filter still remembers of the rows before must not show in the products.
		for j, c := range cols {
			if math.Abs(carry[j].a-c.carriedBy(k).at) > 1e-12*math.Sqrt(upper[j][j]) {
				return 0, false
			}
		}
		for j, c := range cols {
			carry[j].a = c.carriedBy(k).over(rows)
			cols[j] = c.whitened(k)
		}
	}
	s.left.under(model, root.sums, lo, n, reach)
	z := s.left.whiten(k, &carry[last])
	for j, c := range cols {
		for i := range j + 1 {
			upper[i][j] += cols[i].product(c, rows)
		}
		upper[j][last] += c.at*z.sum + c.slope*z.tilt
	}
	upper[last][last] += z.squares
	w.skip(s.left.times())
	s.rest(n)
	return n, true
}

// columns are those of [fitted.directions] over the n rows from lo on, without what is left,
// and the model; ok is false where they are no lines.
func (s *restWalk) columns(lo, n int) (cols []line, model line, ok bool) {
	root := s.r.root
	response, started, ok := s.lines(n, root.step)
	if !ok {
		return nil, line{}, false
	}
	dead := s.f.direction(s.f.e.nl + 1)
	cols = make([]line, dead+1, dead+1+s.r.linearColumns())
	cols[0] = response
	cols[dead].at = -s.gain * response.slope / root.step
	cols = append(cols, line{at: 1})
	if s.r.drift {
		cols = append(cols, line{root.t[lo], root.step})
	}
	if s.started != nil {
		cols[dead].at -= s.beta[len(s.beta)-1] * started.slope / root.step
		cols = append(cols, started)
	}
	model = model.plus(s.gain, response)
	for i, c := range cols[dead+1:] {
		model = model.plus(s.beta[i], c)
	}
	return cols, model, true
}
