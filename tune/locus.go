package tune

import (
	"math"
	"slices"

	"lagwright/ident"
)

// LocusPoint is the rightmost poles of the loop at one gain.
type LocusPoint struct {
	Kc    float64
	Poles []complex128 // rad/s, by falling real part
}

// RootLocus returns the rightmost poles for each of the gains kc; the other
// settings are those of g.
func RootLocus(p ident.Plant, g *Gains, kc []float64) ([]LocusPoint, error) {
	c, err := g.law()
	if err != nil {
		return nil, err
	}
	out := make([]LocusPoint, len(kc))
	for i, k := range kc {
		c.kc = k
		l := newOpenLoop(p, c, g.Scan)
		out[i] = LocusPoint{Kc: k, Poles: l.poles()}
	}
	return out, nil
}

// Breakaway is a point of the real axis where poles meet and part, and the
// gain at which they do.
type Breakaway struct {
	Pole float64 // 1/s
	Kc   float64 // input per temperature
}

// BreakawayPoints returns the breakaway points of the locus in Kc, by falling
// pole. With L = Kc·N(s)·e^(−theta·s)/D(s) the gain of a pole s is
// −D·e^(theta·s)/N, stationary where
//
//	(D' + theta·D)·N − D·N' = 0;
//
// real roots with a gain of the controller's sign are the points.
func BreakawayPoints(p ident.Plant, g *Gains) ([]Breakaway, error) {
	c, err := g.law()
	if err != nil {
		return nil, err
	}
	sign := math.Copysign(1, c.kc)
	c.kc = sign
	l := newOpenLoop(p, c, g.Scan)
	den, num := l.polynomials()
	scale := l.timeScale()
	den, num = scaled(den, scale), scaled(num, scale)
	theta := l.delay / scale
	left := derivative(den)
	left = append(left, make([]float64, len(den)-len(left))...)
	for i, v := range den {
		left[i] += theta * v
	}
	slope := multiply(left, num)
	for i, v := range multiply(den, derivative(num)) {
		slope[i] -= v
	}
	var out []Breakaway
	for _, s := range polynomialRoots(trimmed(slope)) {
		if math.Abs(imag(s)) > 1e-7*(1+math.Abs(real(s))) {
			continue
		}
		x := real(s)
		k := -value(den, x) * math.Exp(theta*x) / value(num, x)
		if k > 0 && isFinite(k) {
			out = append(out, Breakaway{Pole: x / scale, Kc: sign * k})
		}
	}
	slices.SortFunc(out, func(a, b Breakaway) int {
		if a.Pole > b.Pole {
			return -1
		}
		return 1
	})
	return out, nil
}

// derivative returns the coefficients of a polynomial's derivative, constant
// first; that of a constant is 0.
func derivative(p []float64) []float64 {
	if len(p) < 2 {
		return []float64{0}
	}
	d := make([]float64, len(p)-1)
	for i := range d {
		d[i] = float64(i+1) * p[i+1]
	}
	return d
}

func value(p []float64, x float64) float64 {
	v := 0.0
	for i := len(p) - 1; i >= 0; i-- {
		v = v*x + p[i]
	}
	return v
}

// trimmed drops leading coefficients that are nothing but rounding.
func trimmed(p []float64) []float64 {
	size := 0.0
	for _, v := range p {
		size = max(size, math.Abs(v))
	}
	for len(p) > 1 && math.Abs(p[len(p)-1]) < 1e-14*size {
		p = p[:len(p)-1]
	}
	return p
}
