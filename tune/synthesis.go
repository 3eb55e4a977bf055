package tune

import (
	"context"
	"math"
	"slices"

	"gonum.org/v1/gonum/optimize"

	"lagwright/ident"
)

// Synthesis. For given integral and derivative times the largest gain that
// holds the requirement on the wanted share of the plausible plants gives the
// smallest load IAE, so the gain is searched inside and the times outside. A
// design is the law found and how it did on the plants it was chosen on.
type design struct {
	law   law
	found bool    // the requirement holds on the share
	iae   float64 // median over plants, see loadIAE; +Inf without integral action
	miss  float64 // see ensemble.miss; for designs not found
}

// search is one synthesis.
type search struct {
	ctx       context.Context
	on        *ensemble
	assurance float64
	sign      float64 // of the gain
	kc        float64 // a sensible size of the gain, > 0: bounds what is tried
	from      float64 // the gain to start from, > 0
	ti        [2]float64
	b         float64
	any       bool // the first that holds will do
}

// filterShare is the measurement filter as a part of the derivative time
// (common practice, no source: a tenth).
const filterShare = 0.1

// iaeSample is how many plants the median IAE is taken over during a search.
const iaeSample = 31

// newSearch prepares a synthesis; the search starts around plant p.
func newSearch(ctx context.Context, e *ensemble, p ident.Plant, assurance float64) *search {
	s := &search{ctx: ctx, on: e, assurance: assurance, b: 1}
	s.sign = math.Copysign(1, p.Gain)
	var long, short float64
	long = p.DeadTime + e.scenarios[0].scan
	for _, tau := range p.Elements() {
		long += tau
	}
	short = 0.02 * long
	s.kc = 2 / math.Abs(p.Gain)
	if ku, pu, err := quickUltimate(p); err == nil {
		short = 0.05 * pu
		s.kc = math.Abs(ku) / 2
		long = max(long, pu)
	}
	if p.Structure.Integrating() {
		long *= 40
	}
	if long == 0 {
		long, short = 100, 0.1
	}
	s.ti, s.from = [2]float64{short, 4 * long}, s.kc
	return s
}

// design searches a controller of a kind.
func (s *search) design(kind string) design {
	if kind != "p" && !s.on.reaches(s.assurance) {
		return s.beyondReach(kind)
	}
	switch kind {
	case "p":
		return s.proportional()
	case "pi":
		return s.integral()
	}
	return s.derivative()
}

func (s *search) law(kc, ti, td float64) law {
	return law{kc: s.sign * kc, ti: ti, td: td, tf: filterShare * td, b: s.b}
}

// loopCeiling bounds the gain searched, as a multiple of the starting gain: a
// plant whose model sets no bound at all (one lag, no dead time) gets that.
const loopCeiling = 50

// largest returns the largest gain, to 0.2 %, with which holds is true, going
// down from guess (or up, while it holds); ok is false when there is none
// down to floor. It tries gains apart by ratio and then divides.
func largest(guess, floor, ceiling, ratio float64, holds func(float64) bool) (kc float64, ok bool) {
	hi := min(guess*ratio, ceiling)
	for holds(hi) {
		if hi >= ceiling {
			return ceiling, true
		}
		guess, ok = hi, true
		hi = min(hi*ratio, ceiling)
	}
	lo := guess
	if !ok {
		for lo = hi / ratio; !holds(lo); lo /= ratio {
			if lo < floor {
				return 0, false
			}
			hi = lo
		}
	}
	for hi/lo > 1.002 {
		mid := math.Sqrt(lo * hi)
		if holds(mid) {
			lo = mid
		} else {
			hi = mid
		}
	}
	return lo, true
}

// proportional: the largest gain leaves the smallest offset.
func (s *search) proportional() design {
	try := func(kc float64) law { return s.law(kc, math.Inf(1), 0) }
	largestFrom := func(guess float64) (float64, bool) {
		return largest(guess, s.kc*5e-3, s.kc*loopCeiling, s.fine(), func(kc float64) bool {
			return !cancelled(s.ctx) && s.on.holds(try(kc), s.assurance)
		})
	}
	kc, ok := largestFrom(s.kc)
	if !ok {
		d := s.nearest("p")
		if !d.found {
			return d
		}
		if kc, ok = largestFrom(math.Abs(d.law.kc)); !ok {
			return d
		}
	}
	return design{law: try(kc), found: true, iae: math.Inf(1)}
}

// integral: golden sections over log Ti after a coarse scan. A settling time
// leaves only a narrow patch of gains, which the scan can miss: then the
// nearest miss is looked for, and if it misses nothing the search goes on
// around it.
func (s *search) integral() design {
	if d := s.overTimes(s.on, 0, 13, 9); d.found {
		return d
	}
	d := s.nearest("pi")
	if !d.found || s.any {
		return d
	}
	return s.around(d, 0)
}

// around searches on from a design that holds.
func (s *search) around(d design, part float64) design {
	near := *s
	near.from = math.Abs(d.law.kc)
	near.ti = [2]float64{d.law.ti / 1.8, d.law.ti * 1.8}
	if better := near.overTimes(s.on, part, 9, 8); better.found && better.iae < d.iae {
		return better
	}
	return d
}

// fine is the ratio of neighbouring gains tried.
func (s *search) fine() float64 {
	if math.IsInf(s.on.scenarios[0].task.settling, 1) {
		return 1.25
	}
	return 1.1
}

// overTimes searches Ti: scan points on a logarithmic grid, then refine golden
// sections about the best.
func (s *search) overTimes(on *ensemble, part float64, scan, refine int) design {
	best := design{iae: math.Inf(1)}
	guess := s.from
	tried := map[float64]design{}
	try := func(logTi float64) float64 {
		if d, ok := tried[logTi]; ok {
			return d.iae
		}
		d := s.atTimes(on, math.Exp(logTi), part, guess)
		tried[logTi] = d
		if d.found {
			guess = math.Abs(d.law.kc)
		}
		if d.found && d.iae < best.iae {
			best = d
		}
		return d.iae
	}
	lo, hi := math.Log(s.ti[0]), math.Log(s.ti[1])
	grid := make([]float64, scan)
	value := make([]float64, scan)
	for i := range grid { // from long times down: there the gain varies least
		k := scan - 1 - i
		grid[k] = lo + (hi-lo)*float64(k)/float64(scan-1)
		value[k] = try(grid[k])
		if s.any && best.found {
			return best
		}
	}
	if !best.found {
		return best
	}
	at := slices.Index(value, slices.Min(value))
	a, b := grid[max(0, at-1)], grid[min(scan-1, at+1)]
	guess = math.Abs(best.law.kc)
	const g = 0.6180339887498949
	c, d := b-g*(b-a), a+g*(b-a)
	for range refine {
		if cancelled(s.ctx) {
			break
		}
		if try(c) <= try(d) {
			b, d = d, c
			c = b - g*(b-a)
		} else {
			a, c = c, d
			d = a + g*(b-a)
		}
	}
	return best
}

// atTimes finds the gain for given times.
func (s *search) atTimes(on *ensemble, ti, part, guess float64) design {
	try := func(kc float64) law { return s.law(kc, ti, part*ti) }
	kc, ok := largest(guess, s.kc*5e-3, s.kc*loopCeiling, s.fine(), func(kc float64) bool {
		return !cancelled(s.ctx) && on.holds(try(kc), s.assurance)
	})
	if !ok {
		return design{iae: math.Inf(1)}
	}
	c := try(kc)
	return design{law: c, found: true, iae: on.loadIAE(c, iaeSample, searchStep)}
}

// derivative: the part Td/Ti by golden sections on a thinned ensemble, then
// the times again on all plants.
func (s *search) derivative() design {
	few := s.on.thinned(48)
	best, at := math.Inf(1), 0.0
	for _, part := range []float64{0.06, 0.12, 0.2, 0.3, 0.45} {
		if d := s.overTimes(few, part, 9, 5); d.found && d.iae < best {
			best, at = d.iae, part
			s.from = math.Abs(d.law.kc)
			if s.any {
				return d
			}
		}
	}
	if at > 0 {
		if d := s.overTimes(s.on, at, 13, 8); d.found {
			return d
		}
	}
	d := s.nearest("pid")
	if !d.found || s.any {
		return d
	}
	return s.around(d, d.law.td/d.law.ti)
}

// nearest looks for the gains that miss the requirement least: the coarse
// scan's best point, then the simplex method (Nelder and Mead 1965) on the
// logarithms of gain and times, first on some of the plants, then, where what
// holds on those fails on all, on all.
func (s *search) nearest(kind string) design {
	few := s.on.thinned(60)
	d := s.nearestTo(kind, few, s.coarse(few, kind))
	if d.found || s.on.scenarios[0].task.curve.straight() {
		return d
	}
	// the curve is not far from its tangent, and what holds there is a good start
	line := *s
	line.on = s.on.straightened()
	if l := line.design(kind); l.found {
		if near := s.nearestTo(kind, few, s.point(kind, l.law)); near.found || near.miss < d.miss {
			return near
		}
	}
	return d
}

// nearestTo is nearest from a point on.
func (s *search) nearestTo(kind string, few *ensemble, at []float64) design {
	at = s.simplex(few, kind, at, 0.3, 80)
	c := s.build(kind, at)
	miss := s.on.miss(c, s.assurance)
	if miss > hair {
		c = s.build(kind, s.simplex(s.on, kind, at, 0.08, 50))
		miss = s.on.miss(c, s.assurance)
	}
	d := design{law: c, iae: math.Inf(1), miss: miss, found: miss <= hair}
	if c.integral() {
		d.iae = s.on.loadIAE(c, iaeSample, searchStep)
	}
	return d
}

// build is the law at a point of the nearest search: the logarithms of gain,
// integral time and Td/Ti.
func (s *search) build(kind string, x []float64) law {
	ti, td := math.Inf(1), 0.0
	if kind != "p" {
		ti = math.Exp(x[1])
	}
	if kind == "pid" {
		td = ti * math.Exp(x[2])
	}
	return s.law(math.Exp(x[0]), ti, td)
}

// point is where build finds a law.
func (s *search) point(kind string, c law) []float64 {
	x := []float64{math.Log(math.Abs(c.kc))}
	if kind != "p" {
		x = append(x, math.Log(c.ti))
	}
	if kind == "pid" {
		x = append(x, math.Log(c.td/c.ti))
	}
	return x
}

// coarse returns the point of a grid of gains and times that misses least.
func (s *search) coarse(on *ensemble, kind string) []float64 {
	const gains, times, part = 11, 12, 0.2
	point := func(logKc, logTi float64) []float64 {
		return []float64{logKc, logTi, math.Log(part)}[:len(kind)] // one number a letter
	}
	lo, hi := math.Log(s.ti[0]), math.Log(s.ti[1])
	best, at := math.Inf(1), point(math.Log(s.kc), hi) // where nothing is stable
	for k := range times {
		if kind == "p" && k > 0 {
			break
		}
		for i := range gains {
			x := point(math.Log(s.kc)+math.Log(3)-5.5*float64(i)/(gains-1), lo+(hi-lo)*float64(k)/(times-1))
			if cancelled(s.ctx) {
				return at
			}
			if m := on.missBelow(s.build(kind, x), s.assurance, best); m < best {
				best, at = m, x
			}
		}
	}
	return at
}

// simplex goes on from a point to one that misses no more.
func (s *search) simplex(on *ensemble, kind string, from []float64, size float64, evaluations int) []float64 {
	best, at := math.Inf(1), from
	problem := optimize.Problem{Func: func(x []float64) float64 {
		if cancelled(s.ctx) {
			return math.MaxFloat64
		}
		m := on.miss(s.build(kind, x), s.assurance)
		if m < best {
			best, at = m, slices.Clone(x)
		}
		return m
	}}
	_, _ = optimize.Minimize(problem, from, &optimize.Settings{FuncEvaluations: evaluations}, &optimize.NelderMead{SimplexSize: size})
	return at // whatever ended the search
}
