package fit

import "math"

// damped solves systems of a few unknowns in memory of its own; the zero value is
// ready to use.
type damped struct {
	l [][]float64 // Cholesky factor
	x []float64

	// Of a matrix to be inverted.
	idx    []int
	scaled [][]float64
	unit   []float64
}

// factor factors (A + lambda·diag A) over the indices in free; ok is false when
// the matrix is not positive definite.
func (d *damped) factor(a [][]float64, free []int, lambda float64) (ok bool) {
	m := len(free)
	if len(d.l) < m {
		d.l, d.x = columns(m, m), make([]float64, m)
	}
	for i := range m {
		row := d.l[i]
		for j := 0; j <= i; j++ {
			s := a[free[i]][free[j]]
			if i == j {
				s *= 1 + lambda
			}
			for k := range j {
				s -= row[k] * d.l[j][k]
			}
			if i == j {
				if !(s > 1e-14*a[free[i]][free[i]]) {
					return false
				}
				row[i] = math.Sqrt(s)
			} else {
				row[j] = s / d.l[j][j]
			}
		}
	}
	return true
}

// solve returns the solution for the right-hand side b, of which it takes the
// indices in free. It is valid until the next call.
func (d *damped) solve(b []float64, free []int) []float64 {
	m, l := len(free), d.l
	x := d.x[:m]
	for i := range m {
		s := b[free[i]]
		for k := range i {
			s -= l[i][k] * x[k]
		}
		x[i] = s / l[i][i]
	}
	for i := m - 1; i >= 0; i-- {
		s := x[i]
		for k := i + 1; k < m; k++ {
			s -= l[k][i] * x[k]
		}
		x[i] = s / l[i][i]
	}
	return x
}

// invert inverts one matrix, see [damped.invert].
func invert(a [][]float64) [][]float64 { return new(damped).invert(a) }

// invert inverts a symmetric matrix scaled to a unit diagonal; rows of
// parameters that the records say nothing about stay zero. A matrix that is
// singular in double precision is helped by a ridge that grows until it
// factors.
func (d *damped) invert(a [][]float64) [][]float64 {
	idx := d.idx[:0]
	for i := range a {
		if a[i][i] > 0 {
			idx = append(idx, i)
		}
	}
	d.idx = idx
	d.unit = resize(d.unit, len(a))
	out, scaled, unit := columns(len(a), len(a)), columnsIn(&d.scaled, len(a), len(a)), d.unit
	for _, i := range idx {
		for _, j := range idx {
			scaled[i][j] = a[i][j] / math.Sqrt(a[i][i]*a[j][j])
		}
	}
	for ridge := 0.0; !d.factor(scaled, idx, ridge); ridge = math.Max(10*ridge, 1e-12) {
		if ridge > 1 {
			return out
		}
	}
	for _, j := range idx {
		unit[j] = 1
		for k, x := range d.solve(unit, idx) {
			i := idx[k]
			out[i][j] = x / math.Sqrt(a[i][i]*a[j][j])
		}
		unit[j] = 0
	}
	return out
}
