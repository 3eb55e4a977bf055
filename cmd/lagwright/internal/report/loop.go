package report

import (
	"fmt"
	"math"
	"math/cmplx"
	"slices"

	"lagwright/fit"
	"lagwright/ident"
	"lagwright/tune"
)

// LoopOf gathers the curves of gains on a card's plants for the figures: step
// and load response from tune's running controller and plant stepper, |S| from
// the frequency response, poles and locus from tune's analysis. The verdicts
// on the page are tune's own figures; nothing is judged from these curves.
func LoopOf(c *fit.Card, g *tune.Gains) (*Loop, error) {
	l, err := newLooped(c, g)
	if err != nil {
		return nil, fmt.Errorf("curves of the loop: %w", err)
	}
	if !tune.Analyse(l.plants[0], g).Stable {
		return &Loop{Poles: l.poles()}, nil
	}
	out := &Loop{Sensitivity: l.sensitivity(), Poles: l.poles()}
	if out.Step, err = l.response(l.stepSize(), 0, l.horizon()); err != nil {
		return nil, fmt.Errorf("step response: %w", err)
	}
	if out.Load, err = l.response(0, loadSize, l.loadHorizon()); err != nil {
		return nil, fmt.Errorf("load response: %w", err)
	}
	return out, nil
}

// looped are the plants of a card under gains, at the operating input.
type looped struct {
	plants     []ident.Plant // the best fit first, then the plausible ones
	gains      *tune.Gains   // as given
	ideal      *tune.Gains   // the same in the ideal form
	law        ident.Law
	input      float64 // operating input
	confidence float64
}

const (
	loadSize   = 1.0 // of the load step, input units: that of the IAE in the gains file
	mostLooped = 100 // plausible plants drawn
	drawnSteps = 400 // points of a response
	subSteps   = 8   // scans of a continuous controller between points
)

func newLooped(c *fit.Card, g *tune.Gains) (*looped, error) {
	l := &looped{gains: g, confidence: c.Confidence, law: c.Law(), input: (c.Range.Input[0] + c.Range.Input[1]) / 2}
	if c.Law() == ident.Power {
		l.input = math.Max(math.Abs(c.Range.Input[0]), math.Abs(c.Range.Input[1]))
	}
	if g.OperatingInput != nil {
		l.input = *g.OperatingInput
	}
	best, err := c.Plant()
	if err != nil {
		return nil, err
	}
	plausible, err := c.PlausiblePlants()
	if err != nil {
		return nil, err
	}
	l.plants = append(l.plants, best)
	l.plants = append(l.plants, plausible[:min(len(plausible), mostLooped)]...)
	for i := range l.plants {
		l.plants[i].Gain *= c.Law().Slope(l.input)
	}
	l.ideal, err = tune.Convert(g, tune.Ideal, tune.Spelling{})
	return l, err
}

// stepSize is that of the requirement; tune judges a step of 1 without one.
func (l *looped) stepSize() float64 {
	if s := l.gains.Requirement.SetpointStep; s != nil && *s != 0 {
		return *s
	}
	return 1
}

// horizon is the time drawn: half as long again as the slowest settling known
// or asked, else a few times the plant's own times.
func (l *looped) horizon() float64 {
	p := l.plants[0]
	own := 2 * p.DeadTime
	for _, tau := range p.Elements() {
		own += 3 * tau
	}
	h := 0.0
	for _, m := range []*tune.Metrics{l.gains.Nominal, l.gains.Worst} {
		if m != nil && m.Settling != nil {
			h = math.Max(h, 1.5**m.Settling)
		}
	}
	if q := l.gains.Requirement.Settling; q != nil {
		h = math.Max(h, 1.5**q)
	}
	if h == 0 {
		h = 2 * own
	}
	return math.Max(h, own)
}

// loadHorizon leaves the integral time to work a load off.
func (l *looped) loadHorizon() float64 {
	if l.ideal.Ti == nil {
		return l.horizon()
	}
	return l.horizon() + 3**l.ideal.Ti
}

// response runs a step of setpoint (temperature units) or of load at the
// plant's input (input units) on every plant.
func (l *looped) response(setpoint, load, horizon float64) (*Response, error) {
	r := &Response{Size: setpoint + load}
	step := horizon / drawnSteps / subSteps
	every := subSteps
	if l.gains.Scan > step {
		step = l.gains.Scan
		every = max(1, int(horizon/drawnSteps/step))
	}
	n := int(horizon/step/float64(every)) + 1
	r.T = make([]float64, n)
	for k := range r.T {
		r.T[k] = float64(k*every) * step
	}
	y, u := make([][]float64, len(l.plants)), make([][]float64, len(l.plants))
	for i, p := range l.plants {
		var err error
		if y[i], u[i], err = l.run(p, setpoint, load, step, every, n); err != nil {
			return nil, err
		}
	}
	r.Temperature, r.Input = l.ensemble(y), l.ensemble(u)
	return r, nil
}

// run returns every so-manieth sample of temperature and input, as changes
// from rest. A continuous controller is run with a scan that is short against
// the loop; half of it is taken off the dead time, which is what holding the
// output adds.
func (l *looped) run(p ident.Plant, setpoint, load, step float64, every, n int) (y, u []float64, err error) {
	if l.gains.Scan < step {
		p.DeadTime = math.Max(0, p.DeadTime-step/2)
	}
	plant, err := tune.NewPlantStepper(p, step)
	if err != nil {
		return nil, nil, err
	}
	control, err := tune.NewController(l.gains, step)
	if err != nil {
		return nil, nil, err
	}
	rest := l.input
	if l.gains.Ti == nil {
		rest = l.gains.Bias
	}
	control.Start(0, 0, rest)
	for k := range n * every {
		out := control.Next(setpoint, plant.Output()) - rest
		if k%every == 0 {
			y, u = append(y, plant.Output()), append(u, out)
		}
		// The plants have the gain at the operating input: what enters them is the
		// output through the law's curve, by its slope there.
		plant.Step((l.law.Apply(l.input+out)-l.law.Apply(l.input))/l.law.Slope(l.input) + load)
	}
	return y, u, nil
}

// sensitivity is |1/(1 + G·C)| over the decades around the loop's own times.
func (l *looped) sensitivity() *Sensitivity {
	const points = 200
	s := &Sensitivity{W: make([]float64, points)}
	centre := 2 * math.Pi / l.horizon()
	if peak := tune.Analyse(l.plants[0], l.gains).MsFrequency; finite(peak) && peak > 0 {
		centre = peak / 5
	}
	for i := range s.W {
		s.W[i] = centre * math.Pow(10, -1.5+3*float64(i)/(points-1))
	}
	all := make([][]float64, len(l.plants))
	for i, p := range l.plants {
		all[i] = make([]float64, points)
		for k, w := range s.W {
			all[i][k] = 1 / cmplx.Abs(1+p.Response(w)*l.control(w))
		}
	}
	s.S = l.ensemble(all)
	return s
}

// control is the controller's frequency response in the ideal form, with half
// a scan of dead time for a scanning one:
//
//	C(jw) = Kc·(1 + 1/(Ti·jw) + Td·jw)/(Tf·jw + 1)·e^(−jw·scan/2)
func (l *looped) control(w float64) complex128 {
	g, s := l.ideal, complex(0, w)
	c := complex(1, 0)
	if g.Ti != nil {
		c += 1 / (s * complex(*g.Ti, 0))
	}
	if g.Td != nil {
		c += s * complex(*g.Td, 0)
	}
	return complex(g.Kc, 0) * c / (s*complex(g.Filter, 0) + 1) * cmplx.Exp(-s*complex(g.Scan/2, 0))
}

// poles are the dominant ones: up to twice the phase crossover, for which
// tune asks for damping. Settling places poles under P control only; PI and
// PID are judged by their step.
func (l *looped) poles() *Poles {
	out := &Poles{}
	for i, p := range l.plants {
		found := dominant(tune.Analyse(p, l.gains))
		if i == 0 {
			out.Best = found
		} else {
			out.Plausible = append(out.Plausible, found...)
		}
	}
	q := l.gains.Requirement
	if q.Damping != nil {
		out.Damping = *q.Damping
	}
	if l.gains.Ti == nil && l.gains.Td == nil {
		if q.Settling != nil && *q.Settling > 0 {
			out.Decay = -math.Log(settlingBand(q)) / *q.Settling
		}
		out.Locus = l.locus()
	}
	if len(out.Best) == 0 {
		return nil
	}
	return out
}

// dominant keeps the rightmost pole and up to two more that decay at most four
// times as fast.
func dominant(f tune.LoopFigures) []complex128 {
	const most = 3
	var out []complex128
	for _, z := range f.Poles {
		if imag(z) < 0 || len(out) > 0 && (cmplx.Abs(z) > 2*f.PhaseCross || real(z) < 4*real(out[0])) {
			continue
		}
		if out = append(out, z); len(out) == most {
			break
		}
	}
	return out
}

// locus follows the rightmost pole of the best fit from a tenth to three times
// the gain.
func (l *looped) locus() []complex128 {
	var kc []float64
	for i := range 60 {
		kc = append(kc, l.gains.Kc*0.1*math.Pow(30, float64(i)/59))
	}
	points, err := tune.RootLocus(l.plants[0], l.gains, kc)
	if err != nil {
		return nil
	}
	var out []complex128
	for _, p := range points {
		for _, z := range p.Poles {
			if imag(z) >= 0 {
				out = append(out, z)
				break
			}
		}
	}
	return out
}

// ensemble takes the first of many curves as the best and the confidence
// range of the others as the band.
func (l *looped) ensemble(curves [][]float64) Ensemble {
	e := Ensemble{Best: curves[0]}
	others := curves[1:]
	if len(others) < 2 {
		return e
	}
	n := len(e.Best)
	e.Low, e.High = make([]float64, n), make([]float64, n)
	column := make([]float64, len(others))
	cut := int((1 - l.confidence) / 2 * float64(len(others)))
	for k := range n {
		for i, c := range others {
			column[i] = c[k]
		}
		slices.Sort(column)
		e.Low[k], e.High[k] = column[cut], column[len(column)-1-cut]
	}
	return e
}
