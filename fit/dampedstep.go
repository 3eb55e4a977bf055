package fit

import (
	"math"

	"gonum.org/v1/gonum/floats"
)

// linearised is the least-squares problem seen from one point: the residuals
// r(p+d) ≈ r + J·d after the rotation of a QR decomposition, so that a step
// costs nothing that grows with the number of residuals.
type linearised struct {
	r      [][]float64 // upper triangle R by columns: N columns of N numbers, zeros below
	c      []float64   // the part of Qᵀr in the range of J, N numbers
	rest   float64     // squared length of the rest of Qᵀr, which no step changes
	length []float64   // lengths of the columns of J, N numbers

	dependent float64 // share of a column's length below which what others leave of it is rounding

	mirrors [][]float64 // J as triangularise leaves it; shares the memory it was decomposed in
	heads   []float64
}

// linearise decomposes the jacobian (N columns of M numbers, overwritten) and
// the residuals (M numbers, overwritten). precision is the relative error of
// the jacobian.
func linearise(jacobian [][]float64, residuals []float64, precision float64) linearised {
	n := len(jacobian)
	heads := triangularise(jacobian)
	rotate(residuals, jacobian, heads)
	l := linearised{
		r:       make([][]float64, n),
		c:       append([]float64(nil), residuals[:n]...),
		rest:    floats.Dot(residuals[n:], residuals[n:]),
		length:  make([]float64, n),
		mirrors: jacobian, heads: heads,
		dependent: 64 * precision, // six bits, as for resolved
	}
	for j, column := range jacobian {
		l.r[j] = make([]float64, n)
		copy(l.r[j][:j+1], column)
		l.length[j] = floats.Norm(l.r[j], 2)
	}
	return l
}

// finite says whether the linearisation can be used.
func (l linearised) finite() bool {
	for j := range l.c {
		if !isFinite(l.length[j]) || !isFinite(l.c[j]) {
			return false
		}
	}
	return isFinite(l.rest)
}

// gradient returns half the gradient of the sum of squares, Jᵀr = Rᵀc.
func (l linearised) gradient() []float64 {
	g := make([]float64, len(l.c))
	for j, column := range l.r {
		g[j] = floats.Dot(column, l.c)
	}
	return g
}

// along returns R·d, the change of the rotated residuals along the step d.
func (l linearised) along(d []float64) []float64 {
	change := make([]float64, len(d))
	for j, column := range l.r {
		floats.AddScaled(change, d[j], column)
	}
	return change
}

// reduction returns by how much the step d lowers the sum of squares of the
// linearised residuals: −2·cᵀRd − ‖R·d‖².
func (l linearised) reduction(d []float64) float64 {
	change := l.along(d)
	return -2*floats.Dot(l.c, change) - floats.Dot(change, change)
}

// rotated returns the first N numbers of Qᵀ·x for x of M numbers, which it
// overwrites.
func (l linearised) rotated(x []float64) []float64 {
	rotate(x, l.mirrors, l.heads)
	return append([]float64(nil), x[:len(l.c)]...)
}

// reach returns the length of the part of the residuals that a linear step in
// the free parameters would remove. Columns that depend on others add nothing.
func (l linearised) reach(free []bool) float64 {
	columns, c := l.subset(free, 0, nil)
	sum := 0.0
	for _, direction := range orthonormal(columns, l.dependent) {
		part := floats.Dot(direction, c)
		sum += part * part
	}
	return math.Sqrt(sum)
}

// offset returns the relative offset of Bates and Watts (Technometrics 23
// (1981) 179–183, from memory): the length of the residuals in reach of a step
// in the free parameters, per parameter, over the length of those out of
// reach, per degree of freedom. It measures the distance from the minimum in
// units of the parameters' own uncertainty. m is the number of residuals; where
// no degree of freedom is left, or nothing is out of reach, the offset is
// infinite until nothing is in reach.
func (l linearised) offset(free []bool, m int) float64 {
	n := 0
	for _, f := range free {
		if f {
			n++
		}
	}
	reach := l.reach(free)
	switch {
	case reach == 0:
		return 0
	case m == n:
		return math.Inf(1)
	}
	out := l.rest + floats.Dot(l.c, l.c) - reach*reach
	return reach / math.Sqrt(max(out, 0)) * math.Sqrt(float64(m-n)/float64(n))
}

// step returns the damped step d that minimises
//
//	‖R·d + c‖² + λ·‖D·d‖²,  D = diag(scale), low ≤ d ≤ high,
//
// (Levenberg 1944; Marquardt 1963; with the scaling of Moré 1978), by QR of
// the stacked matrix [R; √λ·D]. Columns that are not free stay at 0. A
// component that would leave its limits is put on the limit and the others
// are solved for again; for a large λ the step so found is the projected
// scaled gradient, which goes downhill.
func (l linearised) step(lambda float64, scale []float64, free []bool, low, high []float64) []float64 {
	d := make([]float64, len(l.c))
	free = append([]bool(nil), free...)
	for {
		columns, rhs := l.subset(free, lambda, scale)
		if len(columns) == 0 {
			return d
		}
		for j := range d {
			if !free[j] && d[j] != 0 {
				floats.AddScaled(rhs[:len(d)], d[j], l.r[j])
			}
		}
		rotate(rhs, columns, triangularise(columns))
		backSubstitute(columns, rhs)
		again, k := false, 0
		for j := range d {
			if !free[j] {
				continue
			}
			d[j] = -rhs[k]
			k++
			if d[j] < low[j] || d[j] > high[j] {
				d[j] = max(low[j], min(high[j], d[j]))
				free[j], again = false, true
			}
		}
		if !again {
			return d
		}
	}
}

// subset copies the free columns of R over √lambda times those of the
// diagonal scale, and c over zeros.
func (l linearised) subset(free []bool, lambda float64, scale []float64) (columns [][]float64, rhs []float64) {
	n := len(l.c)
	for j := range l.r {
		if !free[j] {
			continue
		}
		column := make([]float64, 2*n)
		copy(column, l.r[j])
		if lambda > 0 {
			column[n+j] = math.Sqrt(lambda) * scale[j]
		}
		columns = append(columns, column)
	}
	rhs = make([]float64, 2*n)
	copy(rhs, l.c)
	return columns, rhs
}

// covariance returns (JᵀJ)⁻¹ = R⁻¹R⁻ᵀ over the free columns, N×N with zeros in
// the rows and columns of the others, or nil where the free columns are
// linearly dependent to working precision.
func (l linearised) covariance(free []bool) [][]float64 {
	columns, _ := l.subset(free, 0, nil)
	triangularise(columns)
	inverse, ok := invertTriangle(columns, l.dependent)
	if !ok {
		return nil
	}
	covariance := make([][]float64, len(free))
	at := make([]int, 0, len(columns))
	for i := range free {
		covariance[i] = make([]float64, len(free))
		if free[i] {
			at = append(at, i)
		}
	}
	for a, i := range at {
		for b, j := range at[:a+1] {
			sum := 0.0
			for _, column := range inverse {
				sum += column[a] * column[b]
			}
			covariance[i][j], covariance[j][i] = sum, sum
		}
	}
	return covariance
}

func isFinite(x float64) bool { return x-x == 0 }
