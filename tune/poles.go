package tune

import (
	"cmp"
	"math"
	"math/cmplx"
	"slices"

	"gonum.org/v1/gonum/mat"
)

// The poles of the closed loop are the zeros of the characteristic function
//
//	f(s) = D(s) + N(s)·e^(−delay·s),  L = N·e^(−delay·s)/D.
//
// There are infinitely many with dead time. First values are the eigenvalues
// of the infinitesimal generator of the delay system, discretised on Chebyshev
// points (pseudospectral; D. Breda, S. Maset, R. Vermiglio, "Pseudospectral
// differencing methods for characteristic roots of delay differential
// equations", SIAM J. Sci. Comput. 27 (2005), citation from memory); Newton's
// method on f takes them to the last digits.

const (
	delayNodes = 24 // Chebyshev points over the dead time
	keptPoles  = 12
)

// poles returns the rightmost poles in rad/s by falling real part, of a
// complex pair the one with positive imaginary part first. It returns nil
// where the loop is not of retarded type (excess 0 with dead time): its poles
// then crowd a vertical line without end.
func (l *openLoop) poles() []complex128 {
	den, num := l.polynomials()
	if len(num) > len(den) || len(num) == len(den) && l.delay > 0 {
		return nil
	}
	scale := l.timeScale()
	starts := startingPoles(scaled(den, scale), scaled(num, scale), l.delay/scale)
	var out []complex128
	for _, s := range starts {
		if p, ok := l.polish(s / complex(scale, 0)); ok {
			out = append(out, p)
		}
	}
	return distinct(out)
}

// polynomials returns the coefficients of D and N, constant first.
func (l *openLoop) polynomials() (den, num []float64) {
	den = make([]float64, l.integrators+1)
	den[l.integrators] = 1
	for _, t := range l.lags {
		if t != 0 {
			den = multiply(den, []float64{1, t})
		}
	}
	num = []float64{l.k}
	for _, z := range l.zeros {
		num = multiply(num, []float64{1, z})
	}
	switch {
	case l.q2 != 0:
		num = multiply(num, []float64{1, l.q1, l.q2})
	case l.q1 != 0:
		num = multiply(num, []float64{1, l.q1})
	}
	return den, num
}

func multiply(a, b []float64) []float64 {
	c := make([]float64, len(a)+len(b)-1)
	for i, x := range a {
		for j, y := range b {
			c[i+j] += x * y
		}
	}
	return c
}

// timeScale is a time of the loop, s, that brings the coefficients of a lag
// chain to a size near one.
func (l *openLoop) timeScale() float64 {
	logs, n := 0.0, 0
	for _, t := range l.lags {
		if t != 0 {
			logs += math.Log(math.Abs(t))
			n++
		}
	}
	switch {
	case n > 0:
		return math.Exp(logs / float64(n))
	case l.delay > 0:
		return l.delay
	}
	return 1
}

// scaled returns the polynomial in s·scale.
func scaled(p []float64, scale float64) []float64 {
	q := slices.Clone(p)
	f := 1.0
	for i := range q {
		q[i] /= f
		f *= scale
	}
	return q
}

// startingPoles returns the eigenvalues of the discretised delay system
// x' = A·x + b·v(t−delay), v = −c·x, in controllable canonical form.
func startingPoles(den, num []float64, delay float64) []complex128 {
	n := len(den) - 1
	if n == 0 {
		return nil
	}
	lead := den[n]
	if delay == 0 {
		sum := make([]float64, n+1)
		copy(sum, den)
		for i, v := range num {
			sum[i] += v
		}
		return polynomialRoots(sum)
	}
	size := n + delayNodes
	a := mat.NewDense(size, size, nil)
	for i := range n - 1 {
		a.Set(i, i+1, 1)
	}
	for j := range n {
		a.Set(n-1, j, -den[j]/lead)
	}
	a.Set(n-1, size-1, 1/lead) // v(t − delay)
	d := chebyshev(delayNodes)
	for i := 1; i <= delayNodes; i++ {
		for j := 1; j <= delayNodes; j++ {
			a.Set(n+i-1, n+j-1, 2/delay*d[i][j])
		}
		for j, v := range num {
			a.Set(n+i-1, j, a.At(n+i-1, j)-2/delay*d[i][0]*v)
		}
	}
	var e mat.Eigen
	if !e.Factorize(a, mat.EigenNone) {
		return nil
	}
	return e.Values(nil)
}

// chebyshev returns the differentiation matrix on the points
// cos(i·π/n), i = 0 … n (L. N. Trefethen, Spectral Methods in MATLAB, 2000,
// citation from memory).
func chebyshev(n int) [][]float64 {
	x := make([]float64, n+1)
	for i := range x {
		x[i] = math.Cos(float64(i) * math.Pi / float64(n))
	}
	weight := func(i int) float64 {
		w := 1.0
		if i == 0 || i == n {
			w = 2
		}
		if i%2 == 1 {
			w = -w
		}
		return w
	}
	d := make([][]float64, n+1)
	for i := range d {
		d[i] = make([]float64, n+1)
		for j := range d[i] {
			if i != j {
				d[i][j] = weight(i) / weight(j) / (x[i] - x[j])
				d[i][i] -= d[i][j]
			}
		}
	}
	return d
}

// polynomialRoots returns the roots of a polynomial, constant first, as the
// eigenvalues of its companion matrix.
func polynomialRoots(p []float64) []complex128 {
	n := len(p) - 1
	for n > 0 && p[n] == 0 {
		n--
	}
	if n == 0 {
		return nil
	}
	a := mat.NewDense(n, n, nil)
	for i := range n - 1 {
		a.Set(i, i+1, 1)
	}
	for j := range n {
		a.Set(n-1, j, -p[j]/p[n])
	}
	var e mat.Eigen
	if !e.Factorize(a, mat.EigenNone) {
		return nil
	}
	return e.Values(nil)
}

// characteristic returns f and f' at s.
func (l *openLoop) characteristic(s complex128) (f, slope complex128) {
	// D and N are products, so D'/D and N'/N are sums of one term a factor
	den, denSlope := complex(1, 0), complex(0, 0)
	factor := func(value, derivative complex128) {
		denSlope = denSlope*value + den*derivative
		den *= value
	}
	for range l.integrators {
		factor(s, 1)
	}
	for _, t := range l.lags {
		factor(1+s*complex(t, 0), complex(t, 0))
	}
	num := complex(l.k, 0) * (1 + s*complex(l.q1, 0) + s*s*complex(l.q2, 0))
	numSlope := complex(l.k, 0) * (complex(l.q1, 0) + 2*s*complex(l.q2, 0))
	for _, z := range l.zeros {
		value := 1 + s*complex(z, 0)
		numSlope = numSlope*value + num*complex(z, 0)
		num *= value
	}
	e := cmplx.Exp(-s * complex(l.delay, 0))
	return den + num*e, denSlope + (numSlope-num*complex(l.delay, 0))*e
}

// polish improves a pole by Newton's method; ok is false where it runs away
// or does not settle.
func (l *openLoop) polish(s complex128) (pole complex128, ok bool) {
	start, size := s, math.Inf(1)
	for range 60 {
		f, slope := l.characteristic(s)
		if f == 0 {
			return s, true
		}
		move := f / slope
		next := s - move
		if cmplx.IsNaN(next) || cmplx.IsInf(next) {
			return 0, false
		}
		last := size
		size = cmplx.Abs(move)
		s = next
		if size <= 4e-16*cmplx.Abs(s) || size <= 1e-11*cmplx.Abs(s) && size >= last {
			break
		}
	}
	moved := cmplx.Abs(s-start) <= 0.1*cmplx.Abs(start)+1e-9
	return s, moved && size <= 1e-6*cmplx.Abs(s)
}

// distinct sorts poles by falling real part, keeps the rightmost, and takes
// those that Newton's method brought to one place as one unless they came as
// a double pole.
func distinct(p []complex128) []complex128 {
	for i, s := range p {
		if math.Abs(imag(s)) < 1e-9*cmplx.Abs(s) {
			p[i] = complex(real(s), 0)
		}
	}
	slices.SortFunc(p, func(a, b complex128) int {
		if math.Abs(real(a)-real(b)) > 1e-9*(cmplx.Abs(a)+cmplx.Abs(b)) {
			return cmp.Compare(real(b), real(a))
		}
		if d := cmp.Compare(math.Abs(imag(a)), math.Abs(imag(b))); math.Abs(math.Abs(imag(a))-math.Abs(imag(b))) > 1e-9*(cmplx.Abs(a)+cmplx.Abs(b)) {
			return d
		}
		return cmp.Compare(imag(b), imag(a))
	})
	var out []complex128
	for _, s := range p {
		if len(out) == 0 || cmplx.Abs(s-out[len(out)-1]) > 1e-7*cmplx.Abs(s) {
			out = append(out, s)
		}
	}
	if len(out) > keptPoles {
		out = out[:keptPoles]
	}
	return out
}

// dominantDamping returns the least damping ratio −Re s/|s| of the dominant
// poles: those with |s| up to twice the phase crossover (rad/s, +Inf when
// there is none). Faster ones belong to the endless chain of the dead time,
// which every delay loop has and whose damping ratio always tends to 0. It is
// 1 when no pole swings.
func dominantDamping(poles []complex128, phaseCross float64) float64 {
	least := 1.0
	for _, s := range poles {
		if s != 0 && cmplx.Abs(s) <= 2*phaseCross {
			least = min(least, -real(s)/cmplx.Abs(s))
		}
	}
	return least
}
