package validate

import (
	"context"
	"fmt"
	"math"

	"gonum.org/v1/gonum/stat/distuv"

	"lagwright/data"
	"lagwright/ident"
	"lagwright/tune"
)

// A back-test asks of a run whether model and controller, as stated, can have
// made it.
//
// Replayed under the gains it was made with, and with the disturbance taken
// from the log itself, any plant returns the log, provided the controller is
// the one that ran: such a replay cannot tell a wrong plant from a
// disturbance. So the two halves are tested apart, each where it can fail:
//
//   - the controller: replayed in closed loop, does it choose the logged input?
//   - the plant: driven by the logged input, does it give the logged
//     temperature within the card's bounds and noise? Where it does not, do
//     the moves of the setpoint (in manual, of the input) speak for another
//     gain, dead time or lags, or is it a load, which a replay takes over?
//
// A recording may begin in the middle of a move: the controller starts as the
// log shows it (beginning.go), the plant in a free state (freestart.go).
//
// A run is reproduced when the controller holds and nothing speaks against
// the plant; then any replay of it is as good as the model.
func (p *plan) backTest(ctx context.Context, run *data.Run, all []*course) (*BackTest, error) {
	b := &BackTest{Stated: p.options.Confidence, Differs: []string{}}
	courses, err := p.automatic(run)
	if err != nil {
		return nil, err
	}
	manual, controller := len(courses) == 0, true
	if manual {
		courses = all
		b.Differs = append(b.Differs, "not in automatic with a logged setpoint: only the plant is tested, not the controller")
	} else {
		if controller, err = p.testController(b, run, courses); err != nil {
			return nil, err
		}
		b.Controller = &controller
	}
	b.Plant = p.testPlant(b, courses, manual)
	b.Reproduced = controller && b.Plant
	if !b.Reproduced {
		b.Differs = append(b.Differs, p.saturation(courses)...)
		b.Differs = append(b.Differs, p.outside(run)...)
	}
	return b, ctx.Err()
}

// automatic prepares the segments in which the controller was in automatic
// for the logged gains; none without a logged setpoint.
func (p *plan) automatic(run *data.Run) ([]*course, error) {
	if !hasValue(run.Setpoint) {
		return nil, nil
	}
	only := *run
	if run.Auto != nil {
		only.Y = append([]float64(nil), run.Y...)
		for i, auto := range run.Auto {
			if !auto {
				only.Y[i] = math.NaN()
			}
		}
	}
	q := *p
	q.gains = p.logged
	parts, _ := segments(&only)
	var out []*course
	for _, s := range parts {
		c, err := newCourse(&only, s, &q)
		if err != nil {
			return nil, err
		}
		if late := c.firstScan(); late > 0 {
			s.lo += late
			if c, err = newCourse(&only, s, &q); err != nil {
				return nil, err
			}
		}
		out = append(out, c)
	}
	return out, nil
}

// inputTolerance is how near the replayed input must come to the logged one,
// as a fraction of the input's own range in the run (common practice, no
// source), besides what the noise of the readings explains.
const inputTolerance = 0.02

// testController replays the run under the logged gains on the best-fit plant
// and compares the inputs.
func (p *plan) testController(b *BackTest, run *data.Run, courses []*course) (ok bool, err error) {
	asked, err := p.nearness(run, courses)
	if err != nil {
		return false, err
	}
	wild := p.wild(courses, asked)
	if wild {
		asked = nearness{row: inputTolerance * inputRange(courses)}
	}
	m, err := p.compareInputs(p.logged, courses, asked)
	if err != nil {
		return false, err
	}
	b.InputInside = &m.near
	b.InputRMSE, b.TempRMSE = finite(m.rmsU), finite(m.rmsY)
	if m.near >= p.options.Confidence {
		return true, nil
	}
	if wild {
		b.Differs = append(b.Differs, p.wildWords(m))
		return false, nil
	}
	within := "within " + quantity(asked.row, p.units.input)
	if m.inMean {
		within = fmt.Sprintf("in the mean of %d rows within %s", asked.rows, quantity(asked.mean, p.units.input))
	}
	text := fmt.Sprintf("the logged gains give another input than was logged: off by up to %s, %s on %.0f%% of the rows",
		quantity(m.worst, p.units.input), within, 100*m.near)
	hint, err := p.controllerHint(courses, asked)
	b.Differs = append(b.Differs, text+"; "+hint)
	return false, err
}

// wrongWay tells gains that would heat where they should not.
func (p *plan) wrongWay(g *tune.Gains) bool {
	return (g.Kc > 0) != (p.best.Gain*p.law.Slope(p.operatingInput()) > 0)
}

// wild tells logged gains under which the loop swings up on the best-fit plant.
// Noise then grows with it, and as a tolerance it would let everything pass; a
// loop that its limits keep within twice the logged range is told by them.
func (p *plan) wild(courses []*course, asked nearness) bool {
	if p.wrongWay(p.logged) {
		return true
	}
	plant := p.best
	plant.Gain *= p.law.Slope(p.operatingInput())
	return asked.row > 2*inputRange(courses) && !tune.Analyse(plant, p.logged).Stable
}

// wildWords say that logged gains cannot be those of the run. How far off they
// are says nothing: they drive the input as far as its limits let them.
func (p *plan) wildWords(m match) string {
	share := fmt.Sprintf("on %.0f%% of the rows the input is not the logged one", 100*(1-m.near))
	if p.wrongWay(p.logged) {
		return "these logged gains act the wrong way for this heater, " + share + "; look at their sign and at the controller's action"
	}
	return "under these logged gains the loop is unstable on this model, " + share + "; look at the gain and its units, and at the integral time"
}

// A match says how near the inputs of a replay come to those logged.
type match struct {
	near       float64 // share of the rows near enough, the lesser of rows and means
	inMean     bool    // it is that of the means
	worst      float64 // largest difference of the inputs
	rmsU, rmsY float64 // replayed less logged
}

// compareInputs closes the loop under the gains on the best-fit plant.
func (p *plan) compareInputs(gains *tune.Gains, courses []*course, asked nearness) (match, error) {
	r := newRunner(p.law, gains, []ident.Plant{p.best})
	m := match{worst: math.NaN()}
	var rows, near, means, nearMeans int
	var sumU, sumY float64
	for _, c := range courses {
		y, u := r.buffers(len(c.t))
		var err error
		if r.begin, err = p.beginningOf(gains, c); err != nil {
			return m, err
		}
		if err := r.replay(c, 0, y, u); err != nil {
			return m, err
		}
		off := make([]float64, len(u))
		for i := range u {
			du := u[i] - c.u[i]
			off[i] = du
			rows++
			if math.Abs(du) <= asked.row+1e-9 {
				near++
			}
			m.worst = larger(m.worst, math.Abs(du))
			sumU += du * du
			sumY += (y[i] - c.y[i]) * (y[i] - c.y[i])
		}
		if asked.rows > 0 {
			for _, v := range runningMeans(off, asked.rows) {
				means++
				if math.Abs(v) <= asked.mean+1e-9 {
					nearMeans++
				}
			}
		}
	}
	m.near = float64(near) / float64(rows)
	if share := float64(nearMeans) / float64(means); means > 0 && share < m.near {
		m.near, m.inMean = share, true
	}
	m.rmsU, m.rmsY = math.Sqrt(sumU/float64(rows)), math.Sqrt(sumY/float64(rows))
	return m, nil
}

// controllerHint says what to look at when the controller is not reproduced.
func (p *plan) controllerHint(courses []*course, asked nearness) (string, error) {
	if hint, err := p.limitHint(courses, asked); hint != "" || err != nil {
		return hint, err
	}
	ratio, se, err := p.moveRatio(courses)
	if err != nil {
		return "", err
	}
	known := se < ratioKnown*math.Abs(ratio)
	if known && math.Abs(ratio-1) > 0.1+2*se {
		return fmt.Sprintf("the logged moves of the input are about %s times those the gains ask for: look at the gain and its units", number(ratio)), nil
	}
	if !known {
		return "look at gain, integral time, scan time, limits and moves by hand", nil
	}
	return "look at integral time, scan time, limits and moves by hand", nil
}

func inputRange(courses []*course) float64 {
	lo, hi := math.Inf(1), math.Inf(-1)
	for _, c := range courses {
		lo, hi = min(lo, least(c.u)), max(hi, greatest(c.u))
	}
	return hi - lo
}

// testPlant drives every plausible plant with the logged input and counts the
// temperatures within the band of plants and noise; where they are too few it
// asks whether another plant or a load is the reason.
func (p *plan) testPlant(b *BackTest, courses []*course, manual bool) (ok bool) {
	var rows, inside int
	var span float64
	worst := departure{}
	for _, c := range courses {
		n, in, far := p.insideBand(c)
		rows, inside = rows+n, inside+in
		span += c.t[len(c.t)-1] - c.t[0]
		if math.Abs(far.size) > math.Abs(worst.size) {
			worst = far
		}
	}
	b.ShareInside = float64(inside) / float64(rows)
	// the noise is correlated: so many of the rows are independent
	independent := min(float64(rows), max(1, span/max(1e-12, 2*p.noise.CorrelationTime)))
	if b.ShareInside >= b.Stated-2*math.Sqrt(b.Stated*(1-b.Stated)/independent) {
		return true
	}
	b.Differs = append(b.Differs, fmt.Sprintf("driven by the logged input the model holds %.0f%% of the temperatures in its %.0f%% band", 100*b.ShareInside, 100*b.Stated))
	s, shown := p.shift(courses, manual)
	if shown && p.contradicts(s) {
		b.Differs = append(b.Differs, p.words(s)...)
		return false
	}
	load := fmt.Sprintf("%s at %s that the input did not cause, such as a load: the replay takes it over", quantity(worst.size, p.units.difference), quantity(worst.at, "s"))
	if !shown {
		load += "; no setpoint move shows the plant, so this run does not test it"
	}
	b.Differs = append(b.Differs, load)
	return true
}

// A departure of the log from the best-fit plant, and when.
type departure struct{ size, at float64 }

// maxTested bounds the rows of a course on which the plant is tested.
const maxTested = 5000

// insideBand counts rows whose temperature lies in the middle share of the
// distribution that plants and noise give it, each plant starting in whatever
// state the log speaks for.
func (p *plan) insideBand(c *course) (rows, inside int, far departure) {
	stride := 1 + len(c.t)/maxTested
	simulator := ident.NewSimulator(c.t, ident.HeldInput(c.t, c.u, p.law))
	_, far = p.unexplained(c, p.best, simulator)
	below, seen := make([]float64, len(c.t)), make([]int, len(c.t)) // by how many plants
	sd := math.Hypot(p.noise.SD, 1e-9*max(1, math.Abs(c.y[0])))
	for _, g := range p.plants {
		left, _ := p.unexplained(c, g, simulator)
		for i := 0; i < len(c.t); i += stride {
			if !math.IsNaN(left[i]) {
				below[i] += distuv.UnitNormal.CDF(left[i] / sd)
				seen[i]++
			}
		}
	}
	tail := (1 - p.options.Confidence) / 2
	for i := 0; i < len(below); i += stride {
		if seen[i] == 0 {
			continue
		}
		rows++
		if f := below[i] / float64(seen[i]); f >= tail && f <= 1-tail {
			inside++
		}
	}
	return rows, inside, far
}

// unexplained returns what plant g leaves of the logged temperature after a
// level and a free start are fitted along, NaN in the rows of the first dead
// time, whose input came before the log; and where the log goes farthest from
// the plant, seen from how it stood in the first rows. The level is set by the
// median in the end, so that a load in a part of the run does not shift the
// rest.
func (p *plan) unexplained(c *course, g ident.Plant, simulator *ident.Simulator) (left []float64, far departure) {
	left = simulator.Response(nil, g.Structure, g.Lags, g.DeadTime)
	for i := range left {
		left[i] = c.y[i] - g.Gain*left[i]
	}
	first := p.firstKnown(c.t, g)
	p.takeStart(c.t[first:], left[first:], g)
	level := startLevel(left[first:])
	for i := first; i < len(left); i++ {
		if v := left[i] - level; math.Abs(v) > math.Abs(far.size) {
			far = departure{v, c.t[i]}
		}
	}
	level = median(left[first:])
	for i := range left {
		left[i] -= level
	}
	fill(left[:first], math.NaN())
	return left, far
}
