package tune

import (
	"math"
	"math/cmplx"

	"lagwright/ident"
)

// A scanning controller sees the temperature at its scans only and holds its
// output in between, which makes the loop one of samples. Plant and hold
// together have the pulse transfer function
//
//	(z·I − Φ)·x = (new + old/z)·z^(−whole),   y = gain·x[n−1]
//
// with the matrices of [PlantStepper] over one scan, exact in lags and dead
// time; the controller's is that of [Controller.Next], z meaning one scan.
// Stability and margins follow along z = e^(jwh), 0 < w ≤ π/h (K. J. Åström and
// B. Wittenmark, Computer-Controlled Systems, 3rd ed. 1997, from memory).
type sampledLoop struct {
	plant   *PlantStepper
	control Controller
	h       float64 // scan time, s
}

func newSampledLoop(p *PlantStepper, c law, scan float64) *sampledLoop {
	return &sampledLoop{plant: p, control: newController(c, scan), h: scan}
}

// at returns L at z = e^(s·h).
func (l *sampledLoop) at(s complex128) complex128 {
	q := cmplx.Exp(-s * complex(l.h, 0))
	return l.plant.pulse(s, l.h) * l.control.pulse(q)
}

// pulse returns the pulse transfer function at z = e^(s·h), h being the step.
func (s *PlantStepper) pulse(at complex128, h float64) complex128 {
	z := cmplx.Exp(at * complex(h, 0))
	var room [8]complex128 // no structure has more lags
	x := room[:s.n]
	for i := range x {
		sum := complex(s.new[i], 0) + complex(s.old[i], 0)/z
		for j := range i {
			sum += complex(s.phi[i*s.n+j], 0) * x[j]
		}
		x[i] = sum / (z - complex(s.phi[i*s.n+i], 0))
	}
	whole := float64(len(s.past) - 2)
	return complex(s.gain, 0) * x[s.n-1] * cmplx.Exp(-at*complex(h*whole, 0))
}

// pulse returns the controller's pulse transfer function at q = 1/z: filter
// F = ((1−a−m)·q + m)/(1 − a·q), derivative (1−F)/Tf or (1−q)/h, integral
// half·(1+q)/(1−q).
func (c *Controller) pulse(q complex128) complex128 {
	filter, slope := complex(1, 0), complex(0, 0)
	if c.tf > 0 {
		filter = (complex(1-c.decay-c.mean, 0)*q + complex(c.mean, 0)) / (1 - complex(c.decay, 0)*q)
		slope = (1 - filter) / complex(c.tf, 0)
	} else if c.td > 0 {
		slope = (1 - q) / complex(c.step, 0)
	}
	out := complex(c.kc, 0) * (filter + complex(c.td, 0)*slope)
	if c.half != 0 {
		out += complex(c.half, 0) * (1 + q) / (1 - q) * filter
	}
	return out
}

// A sampledGrid is where a plant is looked at under scanning controllers.
type sampledGrid struct {
	plant *PlantStepper
	h     float64
	w     []float64    // rad/s, ascending, the last is π/h
	g     []complex128 // pulse transfer function of the plant
	q     []complex128 // e^(−jwh)
	dense int          // from here on the points are further apart than a turn of the dead time
	delay float64      // s
}

// newSampledGrid lays perDecade points a decade from low to high, made denser
// where the dead time turns the phase by more than 0.4 rad from point to point,
// and sparse ones beyond.
func newSampledGrid(p ident.Plant, scan, low, high, perDecade float64) (*sampledGrid, error) {
	stepper, err := NewPlantStepper(p, scan)
	if err != nil {
		return nil, err
	}
	g := &sampledGrid{plant: stepper, h: scan, delay: p.DeadTime + scan}
	ratio, turn := math.Pow(10, 1/perDecade), 0.4/g.delay
	end := math.Pi / scan
	for w := min(low, end/100); w < end; {
		g.add(w)
		if w < high {
			g.dense = len(g.w)
			w = min(w*ratio, w+turn)
		} else {
			w *= sparse
		}
	}
	g.add(end)
	return g, nil
}

// sparse is the ratio of neighbouring points beyond the dense ones.
const sparse = 1.08

func (g *sampledGrid) add(w float64) {
	s := complex(0, w)
	g.w = append(g.w, w)
	g.g = append(g.g, g.plant.pulse(s, g.h))
	g.q = append(g.q, cmplx.Exp(-s*complex(g.h, 0)))
}

// figures returns stability and margins of the loop that c makes. The zeros of
// 1+L outside the unit circle are counted by the turns of 1+L from the real
// axis to z = −1, half a turn each.
func (g *sampledGrid) figures(c law) LoopFigures {
	f := LoopFigures{GainMargin: math.Inf(1), PhaseMargin: math.Inf(1), DelayMargin: math.Inf(1), PhaseCross: math.Inf(1), Bandwidth: math.Inf(1)}
	l := newSampledLoop(g.plant, c, g.h)
	turns := startWinding(l, g.w[0], math.Pi/2)
	if real(turns.start) <= 0 {
		return f
	}
	least, at := math.Inf(1), 0
	var before complex128
	for i, w := range g.w {
		r := g.g[i] * l.control.pulse(g.q[i])
		fast := i > g.dense && g.delay*w*(sparse-1) > 0.5
		if m := cmplx.Abs(r); fast {
			if m >= 1 {
				return f // over whole turns of the dead time: −1 is encircled
			}
			f.Ms = max(f.Ms, 1/(1-m))
		} else {
			turns.by(complex(0, w), 1+r)
			if d := norm(1 + r); d < least {
				least, at = d, i
			}
		}
		if i > 0 && !fast {
			g.between(&f, l, i, before, r)
		}
		f.Mt = max(f.Mt, cmplx.Abs(r/(1+r)))
		before = r
	}
	if f.Stable = math.Round(turns.angle/math.Pi) == 0 && real(before) > -1; !f.Stable {
		return LoopFigures{GainMargin: math.Inf(1), PhaseMargin: math.Inf(1), DelayMargin: math.Inf(1), PhaseCross: math.Inf(1)}
	}
	peak, w := g.peak(l, at)
	f.Ms, f.MsFrequency = max(f.Ms, peak, 1), w
	return f
}

// between notes what L crosses between grid point i−1, where it is a, and i,
// where it is b.
func (g *sampledGrid) between(f *LoopFigures, l *sampledLoop, i int, a, b complex128) {
	find := func(of func(r complex128) float64) float64 {
		return bisectSome(func(w float64) float64 { return of(l.at(complex(0, w))) }, g.w[i-1], g.w[i])
	}
	if size := func(r complex128) float64 { return norm(r) - 1 }; (size(a) > 0) != (size(b) > 0) {
		w := find(size)
		f.Crossover = w
		above := cmplx.Phase(l.at(complex(0, w))) + math.Pi
		f.PhaseMargin = min(f.PhaseMargin, min(above, 2*math.Pi-above)*180/math.Pi)
		f.DelayMargin = min(f.DelayMargin, above/w)
	}
	if real(b) < 0 && (imag(a) > 0) != (imag(b) > 0) {
		w := find(func(r complex128) float64 { return imag(r) })
		f.PhaseCross = min(f.PhaseCross, w)
		if m := -real(l.at(complex(0, w))); m > 0 && m < 1 {
			f.GainMargin = min(f.GainMargin, 1/m)
		}
	}
	if quiet := func(r complex128) float64 { return norm(1+r) - 2 }; math.IsInf(f.Bandwidth, 1) && quiet(a) > 0 && quiet(b) <= 0 {
		f.Bandwidth = find(quiet)
	}
}

// bisectSome is bisect to less than 1e-4 of the bracket.
func bisectSome(f func(float64) float64, lo, hi float64) float64 {
	positive := f(lo) > 0
	for range 14 {
		if mid := (lo + hi) / 2; (f(mid) > 0) == positive {
			lo = mid
		} else {
			hi = mid
		}
	}
	return (lo + hi) / 2
}

// peakSections narrow the place of a peak to 0.3 % of two grid steps, and its height,
// flat there, to far less.
const peakSections = 12

// peak refines the sensitivity peak about grid point i.
func (g *sampledGrid) peak(l *sampledLoop, i int) (ms, w float64) {
	sensitivity := func(w float64) float64 { return 1 / cmplx.Abs(1+l.at(complex(0, w))) }
	a, b := g.w[max(0, i-1)], g.w[min(len(g.w)-1, i+1)]
	ms, w = sensitivity(g.w[i]), g.w[i]
	if x, y := goldenSections(sensitivity, a, b, peakSections); y > ms {
		ms, w = y, x
	}
	return ms, w
}

// damped tells whether the dominant poles of the scenario's loop, l but for its
// sampling, have a damping ratio of zeta or more.
func (s *scenario) damped(c law, l *openLoop, zeta, phaseCross float64) bool {
	if s.sampled == nil {
		return l.dampedEnough(zeta, phaseCross)
	}
	within := 0.999 * math.Pi / s.scan // the poles of samples repeat beyond
	return l.sectorEmpty(newSampledLoop(s.sampled.plant, c, s.scan), zeta, min(2*phaseCross, within))
}

// sampledFigures is figures of a scanning controller, by a dense sweep; ok is
// false where the scan is too fast for the plant to be sampled.
func sampledFigures(p ident.Plant, c law, scan float64) (f LoopFigures, ok bool) {
	analysed := p
	analysed.DeadTime += scan / 2
	low, high := span(analysed)
	g, err := newSampledGrid(p, scan, low/100, high, 160)
	if err != nil {
		return f, false
	}
	return g.figures(c), true
}
