package tune

import (
	"math"
	"math/cmplx"

	"lagwright/ident"
)

// A scenario is one plausible plant made ready to be tried under many
// controllers: its frequency response on a grid of its own and steppers kept
// from run to run. A scenario serves one goroutine at a time.
type scenario struct {
	p    ident.Plant
	task *task
	scan float64
	card int // which of several cards it comes from

	w       []float64    // rad/s, ascending
	g       []complex128 // G(jw) with half a scan of dead time more
	sampled *sampledGrid // nil under a continuous controller
	loops   map[int]*loopSim
}

// perDecade is the density of a scenario's grid, made denser where the dead
// time turns the phase by more than 0.4 rad from point to point; the peak is
// refined between its points.
const perDecade = 32

func newScenario(p ident.Plant, t *task, card int) *scenario {
	s := &scenario{p: p, task: t, scan: t.scan, card: card, loops: map[int]*loopSim{}}
	analysed := p
	analysed.DeadTime += s.scan / 2
	low, high := span(analysed)
	turn := math.Inf(1)
	if analysed.DeadTime > 0 {
		turn = 0.4 / analysed.DeadTime
	}
	ratio := math.Pow(10, 1.0/perDecade)
	for w := low; w < high*ratio; w = min(w*ratio, w+turn) {
		s.w = append(s.w, w)
		s.g = append(s.g, analysed.Response(w))
	}
	if s.scan > 0 {
		// a dead time of too many scans is left to half a scan of dead time more
		s.sampled, _ = newSampledGrid(p, s.scan, low, high, perDecade)
	}
	return s
}

// span returns the frequencies between which a sensible loop on the plant has
// its sensitivity peak.
func span(p ident.Plant) (low, high float64) {
	sum, shortest := p.DeadTime, p.DeadTime
	for _, tau := range p.Elements() {
		sum += tau
		if tau > 0 && (shortest == 0 || tau < shortest) {
			shortest = tau
		}
	}
	if sum == 0 {
		return 1e-3, 1e3 // an integrator without dead time has no time of its own
	}
	low, high = 0.02/sum, 30/shortest
	if p.Structure.Integrating() {
		low /= 100
	}
	if _, pu, err := quickUltimate(p); err == nil {
		high = min(high, 5*2*math.Pi/pu)
	} else {
		high *= 100 // nothing bounds the gain, so a crossover may lie far out
	}
	return low, max(high, 100*low)
}

// quickUltimate is ultimate without the sweep: the phase of a lag chain with
// dead time falls all the way, so there is one place where it is −180°.
func quickUltimate(p ident.Plant) (ku, pu float64, err error) {
	l := newOpenLoop(p, law{kc: 1, ti: math.Inf(1)}, 0)
	l.k = math.Abs(l.k)
	if l.delay == 0 && len(felt(l.lags, l.spread()))+l.integrators < 3 {
		return ultimate(p)
	}
	lo, hi := 1e-9/l.spread(), 1/l.spread()
	for range 200 {
		if l.phase(hi) < -math.Pi {
			break
		}
		hi *= 2
	}
	if l.phase(hi) >= -math.Pi {
		return ultimate(p)
	}
	w := bisect(func(w float64) float64 { return l.phase(w) + math.Pi }, lo, hi)
	return 1 / (l.magnitude(w) * p.Gain), 2 * math.Pi / w, nil
}

// response returns C(jw).
func (c law) response(w float64) complex128 {
	num := complex(1, c.td*w)
	if c.integral() {
		num -= complex(0, 1/(c.ti*w))
	}
	num *= complex(c.kc, 0)
	if c.tf > 0 {
		num /= complex(1, c.tf*w)
	}
	return num
}

// quickFigures are the figures of a loop found on a scenario's grid. Ms and
// the margins are exact to about 1e-4.
type quickFigures struct {
	stable      bool
	ms          float64
	crossover   float64 // rad/s, 0 when |L| < 1 throughout
	phaseMargin float64 // degrees, +Inf when there is no crossover
	delayMargin float64 // s
	gainMargin  float64
}

// quick judges stability and Ms.
func (s *scenario) quick(c law) quickFigures {
	if s.sampled != nil {
		return s.sampled.figures(c).quick()
	}
	f := quickFigures{phaseMargin: math.Inf(1), delayMargin: math.Inf(1), gainMargin: math.Inf(1)}
	l := newOpenLoop(s.p, c, s.scan)
	if l.excess() == 0 || l.k < 0 { // limits at infinity: the sweep knows them
		return s.slow(&l)
	}
	least, at := math.Inf(1), 0
	above, branch := true, 0 // a loop with an integrator starts above 1
	if l.integrators == 0 {
		above = l.k > 1
	}
	sum := 0
	var last complex128
	for i, w := range s.w {
		r := s.g[i] * c.response(w)
		if d := norm(1 + r); d < least {
			least, at = d, i
		}
		if now := norm(r) > 1; now != above {
			at := l.crossAbout(w)
			b := l.branch(at)
			if above {
				sum += b - branch
				f.note(&l, at)
			} else {
				branch = b
			}
			above = now
		}
		if i > 0 && real(r) < 0 && imag(last)*imag(r) < 0 && norm(r) < 1 {
			t := imag(last) / (imag(last) - imag(r))
			f.gainMargin = min(f.gainMargin, 1/math.Abs(real(last)+t*(real(r)-real(last))))
		}
		last = r
	}
	f.ms = s.peak(c, at, least)
	f.stable = sum == 0
	if far, ok := s.beyond(&l, c, above); ok {
		f.ms = max(f.ms, far)
		f.stable = f.stable && !math.IsInf(far, 1)
		return f
	}
	return s.slow(&l)
}

func norm(z complex128) float64 { return real(z)*real(z) + imag(z)*imag(z) }

// crossAbout returns the place of |L| = 1 next to w, by the secant rule on
// logarithmic scales.
func (l *openLoop) crossAbout(w float64) float64 {
	x0, y0 := math.Log(w), math.Log(l.magnitude(w))
	x1 := x0 + 0.03
	for range 12 {
		y1 := math.Log(l.magnitude(math.Exp(x1)))
		if math.Abs(y1) < 1e-7 || y1 == y0 {
			break
		}
		x0, x1, y0 = x1, x1-y1*(x1-x0)/(y1-y0), y1
	}
	return math.Exp(x1)
}

func (f *quickFigures) note(l *openLoop, w float64) {
	f.crossover = max(f.crossover, w)
	above := math.Mod(l.phase(w)+math.Pi, 2*math.Pi)
	if above < 0 {
		above += 2 * math.Pi
	}
	f.phaseMargin = min(f.phaseMargin, min(above, 2*math.Pi-above)*180/math.Pi)
	f.delayMargin = min(f.delayMargin, above/w)
}

// branch counts the turns of the phase at w, see stable.
func (l *openLoop) branch(w float64) int {
	return int(math.Floor((l.phase(w) + math.Pi) / (2 * math.Pi)))
}

// beyond returns the sensitivity peak above the grid, where a derivative can
// lift |L| again and a loop of little but dead time stays up: +Inf where the
// loop is unstable for it; ok is false where only the full sweep can tell.
// Where the dead time turns the phase fast against the change of |L|, the peak
// is 1/(1−|L|), and with |L| > 1 over a turn and a half −1 is encircled.
func (s *scenario) beyond(l *openLoop, c law, above bool) (peak float64, ok bool) {
	const ratio, little = 1.08, 0.05
	end := s.w[len(s.w)-1]
	limit := end
	if c.tf > 0 {
		limit = max(limit, 10/c.tf)
	}
	if above || l.magnitude(end) > 1 {
		far := end + 3*math.Pi/l.delay
		return math.Inf(1), l.delay > 0 && l.magnitude(far) > 1
	}
	peak = 1
	for w := end; ; w *= ratio {
		m := l.magnitude(w)
		switch turning := l.delay*w*(ratio-1) > 0.5; {
		case m > 1:
			far := w + 3*math.Pi/max(l.delay, 1e-300)
			return math.Inf(1), turning && l.magnitude(far) > 1
		case turning:
			peak = max(peak, 1/(1-m))
		default:
			peak = max(peak, 1/cmplx.Abs(1+l.response(w)))
		}
		if w > limit && m < little || w > 1e6*end {
			return peak, true
		}
	}
}

// slow is quick by the full sweep.
func (s *scenario) slow(l *openLoop) quickFigures {
	return l.figures().quick()
}

func (f LoopFigures) quick() quickFigures {
	return quickFigures{f.Stable, f.Ms, f.Crossover, f.PhaseMargin, f.DelayMargin, f.GainMargin}
}

// peak refines Ms about grid point i by the parabola through three points of
// log|1+L| and one exact value.
func (s *scenario) peak(c law, i int, least float64) float64 {
	if i == 0 || i == len(s.w)-1 {
		return max(1, 1/math.Sqrt(least))
	}
	at := func(j int) float64 { return math.Log(norm(1 + s.g[j]*c.response(s.w[j]))) }
	a, b, d := at(i-1), at(i), at(i+1)
	if bend := a - 2*b + d; bend > 0 {
		t := (a - d) / (2 * bend)
		next := i + 1
		if t < 0 {
			next = i - 1
		}
		w := s.w[i] * math.Pow(s.w[next]/s.w[i], math.Abs(t))
		l := s.p.Response(w) * c.response(w)
		if s.scan > 0 {
			l *= cmplx.Exp(complex(0, -w*s.scan/2))
		}
		least = min(least, norm(1+l))
	}
	return max(1, 1/math.Sqrt(least))
}

// loop returns a simulation of the plant under c with about the given step;
// steps are powers of two, so that simulations can be kept. Scans that are
// much shorter than the step are not run one by one: a continuous controller
// with half a scan of dead time more differs by (w·scan)²/24 at most, see
// simulate.go, unless it is the scans that make the derivative's filter.
func (s *scenario) loop(c law, step float64) (*loopSim, error) {
	p, scan := s.p, s.scan
	octave := int(math.Floor(math.Log2(step)))
	key := octave
	if shortScan*scan < step && (c.td == 0 || shortScan*scan < c.tf) {
		p.DeadTime += scan / 2
		scan = 0
		key += continuous
	}
	if l := s.loops[key]; l != nil {
		return l, nil
	}
	l, err := newLoopSim(p, scan, math.Ldexp(1, octave))
	if err != nil {
		return nil, err
	}
	s.loops[key] = l
	return l, nil
}

const (
	shortScan  = 4       // scans in a step or in a filter's lag that need not be told apart
	continuous = 1 << 20 // sets apart the keys of loops run without scans
)
