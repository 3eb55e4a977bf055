package tune

import (
	"math"
	"math/cmplx"

	"lagwright/ident"
)

// LoopFigures are what the frequency response and the poles say of a loop.
// Where the loop is not stable only Stable, Poles and Damping mean anything;
// a margin that does not exist is +Inf.
type LoopFigures struct {
	Stable bool

	Ms          float64 // largest |1/(1+L)|
	MsFrequency float64 // where, rad/s; +Inf for a limit at infinite frequency
	Mt          float64 // largest |L/(1+L)|
	GainMargin  float64 // smallest factor above 1 that makes the loop unstable
	PhaseMargin float64 // degrees
	DelayMargin float64 // s of dead time more
	Crossover   float64 // highest w with |L| = 1, rad/s; 0 when there is none
	PhaseCross  float64 // lowest w with L on the negative real axis, rad/s; +Inf when there is none
	Bandwidth   float64 // lowest w with |1/(1+L)| = 1/√2, rad/s (Skogestad and Postlethwaite's definition, from memory)

	Poles   []complex128 // rightmost poles, rad/s, by falling real part; nil where they cannot be had
	Damping float64      // least damping ratio of the dominant poles, see dominantDamping
}

// Analyse returns the figures of plant p under the controller g: stability
// from the encirclements of −1 first, then peaks and margins by a dense sweep
// with refinement, and the rightmost poles. Those of a scanning controller are
// the poles of the loop with half a scan of dead time more, everything else is
// exact in its sampling. A gains file that cannot be used gives the zero
// LoopFigures.
func Analyse(p ident.Plant, g *Gains) LoopFigures {
	c, err := g.law()
	if err != nil {
		return LoopFigures{}
	}
	l := newOpenLoop(p, c, g.Scan)
	f := analyse(p, c, g.Scan)
	f.Poles = l.poles()
	f.Damping = dominantDamping(f.Poles, f.PhaseCross)
	return f
}

// analyse computes everything but the poles.
func analyse(p ident.Plant, c law, scan float64) LoopFigures {
	if scan > 0 {
		if f, ok := sampledFigures(p, c, scan); ok {
			return f
		}
	}
	l := newOpenLoop(p, c, scan)
	return l.figures()
}

// figures computes everything but the poles.
func (l *openLoop) figures() LoopFigures {
	f := LoopFigures{GainMargin: math.Inf(1), PhaseMargin: math.Inf(1), DelayMargin: math.Inf(1), PhaseCross: math.Inf(1)}
	if l.k == 0 || l.excess() < 0 {
		return f
	}
	grid := l.grid()
	crossings := l.gainCrossings(grid)
	if f.Stable = l.stable(grid[0], crossings); !f.Stable {
		return f
	}
	l.margins(&f, grid, crossings)
	l.peaks(&f, grid)
	f.Bandwidth = l.bandwidth(grid)
	return f
}

// grid returns the frequencies of the sweep, rad/s: 80 a decade from far
// below the lowest corner to far above the highest, and never further apart
// than a twentieth of a turn of the dead time while |L| still matters.
func (l *openLoop) grid() []float64 {
	low, high := l.corners()
	low, high = low*1e-3, high*1e3
	for i := 0; i < 30 && l.integrators > 0 && l.magnitude(low) < 100; i++ {
		low /= 10
	}
	for i := 0; i < 30 && l.excess() > 0 && l.magnitude(high) > 0.01; i++ {
		high *= 10
	}
	const ratio = 1.0292 // 80 a decade
	turn := math.Inf(1)
	if l.delay > 0 {
		turn = 0.3 / l.delay
	}
	var w []float64
	for x := low; x < high && len(w) < 20_000; {
		w = append(w, x)
		if next := x * ratio; next-x > turn && (l.magnitude(x) > 1e-3 || l.excess() == 0) {
			if l.excess() == 0 && x > 50/l.delay && x > high*1e-3 {
				break // the limit circle, see peaks
			}
			x += turn
		} else {
			x = next
		}
	}
	return w
}

// gainCrossings returns every w with |L(jw)| = 1, ascending.
func (l *openLoop) gainCrossings(grid []float64) []float64 {
	return crossings(grid, func(w float64) float64 { return math.Log(l.magnitude(w)) })
}

// crossings returns the zeros of f at its sign changes over the grid.
func crossings(grid []float64, f func(float64) float64) []float64 {
	var out []float64
	a := f(grid[0])
	for i := 1; i < len(grid); i++ {
		b := f(grid[i])
		if (a > 0) != (b > 0) {
			out = append(out, bisect(f, grid[i-1], grid[i]))
		}
		a = b
	}
	return out
}

// bisect returns the point of a sign change of f between lo and hi to the
// last digits.
func bisect(f func(float64) float64, lo, hi float64) float64 {
	positive := f(lo) > 0
	for range 200 {
		mid := lo + (hi-lo)/2
		if mid == lo || mid == hi {
			break
		}
		if (f(mid) > 0) == positive {
			lo = mid
		} else {
			hi = mid
		}
	}
	return lo + (hi-lo)/2
}

// stable counts the crossings of the negative real axis beyond −1 (Nyquist).
// The plants have no pole in the right half plane, so the loop is stable
// exactly when they cancel. The branch k(angle) = floor((angle+π)/2π) steps
// down at every crossing; following it over the stretches with |L| > 1 counts
// them. A loop with integrators comes in from angle 0 at s = +0.
func (l *openLoop) stable(low float64, gain []float64) bool {
	if l.k < 0 {
		return l.integrators == 0 && len(gain) == 0 && math.Abs(l.k) < 1
	}
	if l.excess() == 0 {
		far := l.atInfinity()
		if math.Abs(far) >= 1 && (l.delay > 0 || far <= -1) {
			return false
		}
	}
	above := l.magnitude(low) > 1
	from, sum := 0, 0
	for _, w := range gain {
		if above {
			sum += l.branch(w) - from
		} else {
			from = l.branch(w)
		}
		above = !above
	}
	if above { // |L| stays above 1: excess 0 without dead time
		sum += l.branch(1e12*low) - from
	}
	return sum == 0
}

// margins sets the gain, phase and delay margin and the crossovers.
func (l *openLoop) margins(f *LoopFigures, grid, gain []float64) {
	for _, w := range gain {
		f.Crossover = w
		above := math.Mod(l.phase(w)+math.Pi, 2*math.Pi)
		if above < 0 {
			above += 2 * math.Pi
		}
		f.PhaseMargin = min(f.PhaseMargin, min(above, 2*math.Pi-above)*180/math.Pi)
		f.DelayMargin = min(f.DelayMargin, above/w)
	}
	turn := func(w float64) float64 { return math.Sin(l.phase(w)) }
	for _, w := range crossings(grid, turn) {
		if math.Cos(l.phase(w)) > 0 {
			continue // the positive real axis
		}
		f.PhaseCross = min(f.PhaseCross, w)
		if m := l.magnitude(w); m < 1 {
			f.GainMargin = min(f.GainMargin, 1/m)
		}
	}
	if l.excess() == 0 {
		if far := l.atInfinity(); far < 0 || l.delay > 0 {
			f.GainMargin = min(f.GainMargin, 1/math.Abs(far))
		}
	}
}

// peaks sets Ms and Mt: every local maximum on the grid is refined.
func (l *openLoop) peaks(f *LoopFigures, grid []float64) {
	sensitivity := func(w float64) float64 { return 1 / cmplx.Abs(1+l.response(w)) }
	complementary := func(w float64) float64 {
		r := l.response(w)
		return cmplx.Abs(r / (1 + r))
	}
	f.Ms, f.MsFrequency = highest(grid, sensitivity)
	f.Mt, _ = highest(grid, complementary)
	if l.integrators > 0 {
		f.Mt = max(f.Mt, 1) // its limit at w = 0
	} else {
		f.Mt = max(f.Mt, l.k/(1+l.k))
	}
	if l.excess() == 0 {
		far := l.atInfinity()
		if l.delay > 0 {
			far = -math.Abs(far)
		}
		if s := 1 / (1 + far); s > f.Ms {
			f.Ms, f.MsFrequency = s, math.Inf(1)
		}
		f.Mt = max(f.Mt, math.Abs(far/(1+far)))
	}
	if f.Ms < 1 {
		f.Ms = 1 // |1/(1+L)| tends to 1 where L tends to 0
	}
}

// highest returns the largest value of f over the grid, refined between grid
// points, and where it is.
func highest(grid []float64, f func(float64) float64) (best, at float64) {
	v := make([]float64, len(grid))
	for i, w := range grid {
		v[i] = f(w)
		if v[i] > best {
			best, at = v[i], w
		}
	}
	floor := 0.97 * best
	for i := 1; i < len(grid)-1; i++ {
		if v[i] < floor || v[i] < v[i-1] || v[i] < v[i+1] {
			continue
		}
		if x, y := goldenMax(f, grid[i-1], grid[i+1]); y > best {
			best, at = y, x
		}
	}
	return best, at
}

// goldenMax returns the maximum of a function with one peak between a and b
// by golden sections.
func goldenMax(f func(float64) float64, a, b float64) (x, y float64) {
	return goldenSections(f, a, b, 60)
}

// goldenSections is goldenMax with at most so many sections.
func goldenSections(f func(float64) float64, a, b float64, sections int) (x, y float64) {
	const g = 0.6180339887498949
	c, d := b-g*(b-a), a+g*(b-a)
	fc, fd := f(c), f(d)
	for range sections {
		if b-a <= 1e-10*b {
			break
		}
		if fc > fd {
			b, d, fd = d, c, fc
			c = b - g*(b-a)
			fc = f(c)
		} else {
			a, c, fc = c, d, fd
			d = a + g*(b-a)
			fd = f(d)
		}
	}
	if fc > fd {
		return c, fc
	}
	return d, fd
}

// bandwidth returns the lowest w at which |1/(1+L)| rises through 1/√2, +Inf
// when it never does.
func (l *openLoop) bandwidth(grid []float64) float64 {
	f := func(w float64) float64 { return 1/cmplx.Abs(1+l.response(w)) - math.Sqrt2/2 }
	if f(grid[0]) > 0 {
		return 0 // no control at all at low frequency
	}
	for i := 1; i < len(grid); i++ {
		if f(grid[i]) > 0 {
			return bisect(f, grid[i-1], grid[i])
		}
	}
	return math.Inf(1)
}
