package fit

import "math"

// differencePrecision is the relative error to expect of central differences, ε^(2/3).
const differencePrecision = 0x1p-35

// differences fills the columns of jacobian (N columns of M numbers) with
// central differences of the residuals at p,
//
//	∂r/∂pᵢ ≈ (r(pᵢ+h) − r(pᵢ−h)) / 2h,  h = ε^(1/3)·size,
//
// the step that balances the error of the formula, of order h², against
// rounding, of order ε/h. The size is |pᵢ|, or where pᵢ is 0 that of the
// start, or 1. Next to a bound it takes the one-sided formula of the same
// order, (−3r(p) + 4r(p±h) − r(p±2h)) / ±2h. at holds r(p); a and b are
// scratch, all of M numbers. It returns the evaluations it took.
func (pr Problem) differences(jacobian [][]float64, p, start, at, a, b []float64) int {
	evaluations := 0
	q := append([]float64(nil), p...)
	evaluate := func(dst []float64, i int, x float64) float64 {
		q[i] = x
		pr.Residuals(dst, q)
		q[i] = p[i]
		evaluations++
		return x - p[i] // the step as it was taken, after rounding
	}
	for i, column := range jacobian {
		lower, upper := pr.bounds(i)
		if lower == upper { // held: the column is not used
			clear(column)
			continue
		}
		h := differenceStep(p[i], start[i])
		if p[i]-h >= lower && p[i]+h <= upper {
			width := evaluate(a, i, p[i]+h) - evaluate(b, i, p[i]-h)
			for k := range column {
				column[k] = (a[k] - b[k]) / width
			}
			continue
		}
		if above, below := upper-p[i], p[i]-lower; above >= below {
			h = min(h, above/2)
		} else {
			h = -min(h, below/2)
		}
		near, far := evaluate(a, i, p[i]+h), evaluate(b, i, p[i]+2*h)
		for k := range column {
			column[k] = oneSided(at[k], a[k], b[k], near, far)
		}
	}
	return evaluations
}

// differenceStep is the step of a central difference at x.
func differenceStep(x, start float64) float64 {
	size := math.Abs(x)
	if size == 0 {
		size = math.Abs(start)
	}
	if size == 0 {
		size = 1
	}
	return math.Cbrt(0x1p-52) * size
}

// oneSided is the slope at 0 of the parabola through (0, f0), (h1, f1), (h2, f2).
func oneSided(f0, f1, f2, h1, h2 float64) float64 {
	return ((f1-f0)*h2/h1 - (f2-f0)*h1/h2) / (h2 - h1)
}
