package fit

import (
	"fmt"
	"math"

	"lagwright/ident"
)

// misfit looks for what a linear plant cannot follow in the logs it was
// fitted to. Each departure adds one column to the model; its coefficient is
// estimated by generalised least squares beside everything else that the fit
// was free to move, and is reported when it is both clear and large.
type misfit struct {
	plant ident.Plant
	noise Noise
	start initial
	drift bool
	law   ident.Law
	held  []bool // gain, lags, dead time that were known
}

const (
	misfitRows  = 4000  // of a longer log, rows close after the bumps are looked at
	misfitLevel = 0.001 // p below which a departure is clear
	misfitSize  = 0.03  // relative difference from which it is worth a word; common practice, no source
)

// departure is a way in which a plant may differ from a linear one: the change
// of the output at the times t for one unit of it; nil where the input cannot
// tell.
type departure func(in ident.Input, t []float64) []float64

// scene is one log with what the fitted model leaves of it.
type scene struct {
	in     ident.Input
	t      []float64
	out    *modelOutput
	left   []float64   // whitened, free of basis
	basis  [][]float64 // whitened directions in which the fit was free to move
	bumps  []ident.Bump
	misfit []float64 // log less model, as logged
}

// scenes prepares the logs.
func (m misfit) scenes(recs []*record) []*scene {
	var all []*scene
	for _, r := range recs {
		run := r.run
		s := &scene{in: r.input, bumps: ident.FindBumps(run.T, run.U, run.Y)}
		var y []float64
		for _, k := range closeRows(run, s.bumps, misfitRows) {
			if !math.IsNaN(run.Y[k]) {
				s.t, y = append(s.t, run.T[k]), append(y, run.Y[k])
			}
		}
		s.out = newModelOutput(s.t, y, s.in, m.start, m.drift, m.noise.shape(spanOf(s.t)))
		s.misfit = s.out.of(m.plant)
		for k := range s.misfit {
			s.misfit[k] = y[k] - s.misfit[k]
		}
		for _, c := range m.directions(s.out) {
			s.out.filter.apply(c, c)
			addToBasis(&s.basis, c)
		}
		s.left = make([]float64, len(s.t))
		s.out.filter.apply(s.left, s.misfit)
		project(s.left, s.basis)
		all = append(all, s)
	}
	return all
}

// estimateDeparture is a departure's coefficient with its standard error, over all logs;
// ok is false where no log can tell.
func estimateDeparture(scenes []*scene, of departure) (value, se float64, ok bool) {
	var top, bottom float64
	for _, s := range scenes {
		a, b := s.score(of)
		top += a
		bottom += b
	}
	if !(bottom > 0) {
		return 0, 0, false
	}
	return top / bottom, 1 / math.Sqrt(bottom), true
}

// score returns the information b of the log on the departure's coefficient,
// and a, b times the estimate.
func (s *scene) score(of departure) (a, b float64) {
	extra := of(s.in, s.t)
	dof := len(s.t) - len(s.basis) - 1
	if extra == nil || dof < 12 {
		return 0, 0
	}
	s.out.filter.apply(extra, extra)
	before := dot(extra, extra)
	project(extra, s.basis)
	project(extra, s.basis)
	after := dot(extra, extra)
	if !(after > 1e-8*before) {
		return 0, 0
	}
	c := dot(extra, s.left)
	s2 := (dot(s.left, s.left) - c*c/after) / float64(dof)
	return c / s2, after / s2
}

// directions are the columns in which the fit was free to move.
func (m misfit) directions(out *modelOutput) [][]float64 {
	st := m.plant.Structure
	sens := columns(st.NumLags()+2, len(out.t))
	out.sim.Sensitivities(sens, st, m.plant.Lags, m.plant.DeadTime)
	var cols [][]float64
	for _, c := range out.linearOf(m.plant) {
		cols = append(cols, append([]float64(nil), c...))
	}
	for i, c := range sens {
		if i >= len(m.held) || !m.held[i] {
			cols = append(cols, c)
		}
	}
	return cols
}

// rises is the input with its changes upward only.
func rises(in ident.Input) (up ident.Input, both bool) {
	level, last := in.Before, in.Before
	down := false
	up.Before = in.Before
	for i, v := range in.Value {
		if v > last {
			level += v - last
			up.At = append(up.At, in.At[i])
			up.Value = append(up.Value, level)
		} else {
			down = true
		}
		last = v
	}
	return up, down && len(up.At) > 0
}

// gainUpDown is the difference of the gain between steps up and steps down.
func (m misfit) gainUpDown(in ident.Input, t []float64) []float64 {
	up, both := rises(in)
	if !both {
		return nil
	}
	return ident.NewSimulator(t, up).Response(nil, m.plant.Structure, m.plant.Lags, m.plant.DeadTime)
}

// lagsUpDown is the relative difference of all lags between steps up and steps
// down.
func (m misfit) lagsUpDown(in ident.Input, t []float64) []float64 {
	up, both := rises(in)
	st := m.plant.Structure
	if !both || st.NumLags() == 0 {
		return nil
	}
	sens := columns(st.NumLags()+2, len(t))
	ident.NewSimulator(t, up).Sensitivities(sens, st, m.plant.Lags, m.plant.DeadTime)
	out := make([]float64, len(t))
	for i, tau := range m.plant.Lags {
		for k, v := range sens[i+1] {
			out[k] += m.plant.Gain * tau * v
		}
	}
	return out
}

// curvature is the coefficient of the square of the input's distance from the
// middle of its range, on top of the straight line.
func (m misfit) curvature(middle float64) departure {
	return func(in ident.Input, t []float64) []float64 {
		bent := ident.Input{Before: (in.Before - middle) * (in.Before - middle)}
		for i, v := range in.Value {
			bent.At = append(bent.At, in.At[i])
			bent.Value = append(bent.Value, (v-middle)*(v-middle))
		}
		return ident.NewSimulator(t, bent).Response(nil, m.plant.Structure, m.plant.Lags, m.plant.DeadTime)
	}
}

// clearOf tells whether a coefficient is told from zero.
func clearOf(value, se float64) bool {
	return math.Abs(value)/se > normalQuantile(1-misfitLevel/2)
}

// upDown warns of a gain or lags that differ between steps up and down,
// whichever is clearer: a difference of one shows in the other, too.
func (m misfit) upDown(scenes []*scene, add warn) {
	gain, gainSE, ok := estimateDeparture(scenes, m.gainUpDown)
	if !ok {
		return
	}
	parameter, what, words := "gain", "the gain of steps up is %s %s than that of steps down", [2]string{"larger", "smaller"}
	d, se := gain/m.plant.Gain, gainSE/math.Abs(m.plant.Gain)
	if lag, lagSE, ok := estimateDeparture(scenes, m.lagsUpDown); ok && math.Abs(lag)/lagSE > math.Abs(d)/se {
		parameter, what, words = "lag1", "the lags of steps up are %s %s than those of steps down", [2]string{"longer", "shorter"}
		d, se = lag, lagSE
	}
	if !clearOf(d, se) || math.Abs(d) < misfitSize {
		return
	}
	word := words[0]
	if d < 0 {
		word = words[1]
	}
	add("up-down-differ", parameter, what+" (±%s %%): heating and cooling differ, or something sets between the bumps; hold the model for an average of both: bump both ways about the working point, or fit the bumps one by one with --from and --to",
		figure(100*math.Abs(d), 2)+" %", word, figure(200*se, 2))
}

// curved warns of a gain that changes over the range e of the input.
func (m misfit) curved(scenes []*scene, e [2]float64, units CardUnits, add warn) {
	low, high := m.law.Apply(e[0]), m.law.Apply(e[1])
	c, se, ok := estimateDeparture(scenes, m.curvature((low+high)/2))
	if !ok {
		return
	}
	// The gain of the lower half of the range is K - c·(high-low)/2, that of the upper K + c·(high-low)/2.
	change, seChange := c*(high-low)/m.plant.Gain, se*math.Abs((high-low)/m.plant.Gain)
	if !clearOf(change, seChange) || math.Abs(change) < 2*misfitSize {
		return
	}
	if math.Abs(change) >= 2 {
		return // half the range would cool: it was read from flicker of the logged input, not from bumps
	}
	lower, upper := m.plant.Gain*(1-change/2), m.plant.Gain*(1+change/2)
	hint := "bump about the working point only, and tune for the larger gain"
	if squared := (e[0] + 3*e[1]) / (3*e[0] + e[1]); m.law == ident.Linear && e[0] >= 0 && math.Abs(math.Log(upper/lower/squared)) < 0.5*math.Log(squared) {
		hint = "it grows with the input as a resistive element's does: fit with --input-law power"
	}
	add("curvature", "gain", "the gain changes over the range, from about %s in the lower half of the input (%s to %s) to %s in the upper: one straight line does not hold everywhere; %s",
		figure(lower, 3), figure(e[0], 3), quantity(e[1], units.Input, 3), figure(upper, 3), hint)
}

// looks says in words where, after the bumps, the log and the model part most:
// the mean misfit in the direction of the bump, in windows of the plant's
// residence time (dead time and lags together). Empty where there are no bumps.
func (m misfit) looks(scenes []*scene, unit string) string {
	residence := m.plant.DeadTime + total(m.plant.Elements())
	windows := [][2]float64{{0, 1}, {1, 3}, {3, math.Inf(1)}} // in residence times after the bump
	sum, weight := make([]float64, len(windows)), make([]float64, len(windows))
	for _, s := range scenes {
		i := -1 // the last bump begun
		for k, t := range s.t {
			for i+1 < len(s.bumps) && s.bumps[i+1].Time <= t {
				i++
			}
			if i < 0 {
				continue
			}
			b := s.bumps[i]
			direction := math.Copysign(1, (m.law.Apply(b.To)-m.law.Apply(b.From))*m.plant.Gain)
			since := (t - b.Time) / residence
			for w, window := range windows {
				if since >= window[0] && since < window[1] {
					sum[w] += direction * s.misfit[k]
					weight[w]++
				}
			}
		}
	}
	worst, most := -1, 0.0
	for i := range windows {
		if weight[i] > 0 && math.Abs(sum[i]/weight[i]) > math.Abs(most) {
			worst, most = i, sum[i]/weight[i]
		}
	}
	if worst < 0 {
		return ""
	}
	where := [...]string{
		fmt.Sprintf("in the first %s after a bump", duration(residence)),
		fmt.Sprintf("from %s to %s after a bump", duration(residence), duration(3*residence)),
		fmt.Sprintf("from %s after a bump on", duration(3*residence)),
	}[worst]
	side := "ahead of"
	if most < 0 {
		side = "behind"
	}
	return fmt.Sprintf("%s the log runs %s %s the model", where, quantity(math.Abs(most), unit, 2), side)
}
