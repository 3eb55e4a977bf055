package validate

import (
	"context"
	"fmt"
	"math"

	"gonum.org/v1/gonum/stat/distuv"

	"lagwright/data"
	"lagwright/ident"
)

// A back-test asks of a run logged in closed loop under known gains whether
// model and controller as stated reproduce it.
//
// Replayed under the same gains with the disturbance taken from the log
// itself, any plant returns the log, provided the controller is the one that
// ran: the loop cannot tell a wrong plant from a disturbance. So the two
// halves are tested apart, each where it can fail:
//
//   - the controller: replayed in closed loop, does it choose the logged input?
//   - the plant: driven by the logged input, does it give the logged
//     temperature within the card's bounds and noise?
//
// A run is reproduced when both hold; then so does any replay of it.
func (p *plan) backTest(ctx context.Context, run *data.Run, all []*course) (*BackTest, error) {
	b := &BackTest{Stated: p.options.Confidence, Differs: []string{}}
	if !hasValue(run.Setpoint) {
		b.Differs = []string{"the log has no setpoint: name its column to test the controller"}
		return b, nil
	}
	courses, err := p.automatic(run)
	if err != nil {
		return nil, err
	}
	if len(courses) == 0 {
		b.Differs = []string{fmt.Sprintf("no part of %d rows in automatic", minSegment)}
		return b, nil
	}
	controllerOK, err := p.testController(b, courses)
	if err != nil {
		return nil, err
	}
	plantOK := p.testPlant(b, all)
	b.Reproduced = controllerOK && plantOK
	if !b.Reproduced {
		b.Differs = append(b.Differs, p.saturation(courses)...)
		b.Differs = append(b.Differs, p.outside(run)...)
	}
	return b, ctx.Err()
}

// automatic prepares the segments in which the controller was in automatic
// for the logged gains.
func (p *plan) automatic(run *data.Run) ([]*course, error) {
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
	q.options.Setpoint, q.options.Requirement.SetpointStep = nil, nil
	parts, _ := segments(&only)
	var out []*course
	for _, s := range parts {
		c, err := newCourse(&only, s, &q)
		if err != nil {
			return nil, err
		}
		out = append(out, c)
	}
	return out, nil
}

// inputTolerance is how near the replayed input must come to the logged one,
// as a fraction of the input's own range in the run (common practice, no source).
const inputTolerance = 0.02

// testController replays the run under the logged gains on the best-fit plant
// and compares the inputs.
func (p *plan) testController(b *BackTest, courses []*course) (ok bool, err error) {
	r := newRunner(p.law, p.logged, []ident.Plant{p.best})
	var rows, near int
	var sumU, sumY, worst, product, square float64
	tolerance := inputTolerance * inputRange(courses)
	for _, c := range courses {
		y, u := r.buffers(len(c.t))
		if err := r.replay(c, 0, y, u); err != nil {
			return false, err
		}
		for i := range u {
			du := u[i] - c.u[i]
			rows++
			if math.Abs(du) <= tolerance+1e-9 {
				near++
			}
			worst = larger(worst, math.Abs(du))
			sumU += du * du
			sumY += (y[i] - c.y[i]) * (y[i] - c.y[i])
		}
	}
	for _, c := range courses {
		follow, asked, err := p.moveRatio(c)
		if err != nil {
			return false, err
		}
		product += follow
		square += asked
	}
	b.InputInside = float64(near) / float64(rows)
	b.InputRMSE, b.TempRMSE = finite(math.Sqrt(sumU/float64(rows))), finite(math.Sqrt(sumY/float64(rows)))
	if b.InputInside >= p.options.Confidence {
		return true, nil
	}
	text := fmt.Sprintf("the logged gains give another input than was logged: off by up to %s, within %s on %.0f%% of the rows",
		quantity(worst, p.units.input), quantity(tolerance, p.units.input), 100*b.InputInside)
	if ratio := product / square; square > 0 && math.Abs(ratio-1) > 0.1 {
		text += fmt.Sprintf("; the logged moves of the input are about %s times those the gains ask for: look at the gain and its units", number(ratio))
	} else {
		text += "; look at integral time, scan time, limits and moves by hand"
	}
	b.Differs = append(b.Differs, text)
	return false, nil
}

// moveRatio runs the controller on the logged temperature and returns the
// sums Σ(logged move × asked move) and Σ(asked move²) of the input.
func (p *plan) moveRatio(c *course) (product, square float64, err error) {
	r := newRunner(p.law, p.logged, []ident.Plant{p.best})
	if !c.even || c.lattice.scan > 1 {
		return 0, 0, nil // moves row by row are not the controller's
	}
	_, control, err := r.ready(c, 0)
	if err != nil {
		return 0, 0, err
	}
	control.Start(c.before, c.y[0], c.u[0])
	last := c.u[0]
	for i := 1; i < len(c.t); i++ {
		var u float64
		for k := (i-1)*c.lattice.row + 1; k <= i*c.lattice.row; k++ {
			sp := c.r[i-1]
			if k == i*c.lattice.row {
				sp = c.r[i]
			}
			u = control.Next(sp, c.log[k])
		}
		product += (u - last) * (c.u[i] - c.u[i-1])
		square += (u - last) * (u - last)
		last = u
	}
	return product, square, nil
}

func inputRange(courses []*course) float64 {
	lo, hi := math.Inf(1), math.Inf(-1)
	for _, c := range courses {
		lo, hi = min(lo, least(c.u)), max(hi, greatest(c.u))
	}
	return hi - lo
}

// maxTested bounds the rows on which the plant is tested.
const maxTested = 5000

// testPlant drives every plausible plant with the logged input, its starting
// level and starting slope free, and counts the rows at which the logged
// temperature lies within the band of plants and noise.
func (p *plan) testPlant(b *BackTest, courses []*course) bool {
	var rows, inside int
	var span float64
	for _, c := range courses {
		n, in := p.insideBand(c)
		rows, inside = rows+n, inside+in
		span += c.t[len(c.t)-1] - c.t[0]
	}
	b.ShareInside = float64(inside) / float64(rows)
	// the noise is correlated: so many of the rows are independent
	independent := min(float64(rows), max(1, span/max(1e-12, 2*p.noise.CorrelationTime)))
	least := b.Stated - 2*math.Sqrt(b.Stated*(1-b.Stated)/independent)
	if b.ShareInside >= least {
		return true
	}
	b.Differs = append(b.Differs, fmt.Sprintf("driven by the logged input the model holds %.0f%% of the temperatures in its %.0f%% band", 100*b.ShareInside, 100*b.Stated))
	b.Differs = append(b.Differs, p.explain(courses)...)
	return false
}

// insideBand counts rows whose temperature lies in the middle share of the
// distribution that plants and noise give it.
func (p *plan) insideBand(c *course) (rows, inside int) {
	stride := 1 + len(c.t)/maxTested
	simulator := ident.NewSimulator(c.t, ident.HeldInput(c.t, c.u, p.law))
	below := make([]float64, len(c.t))
	sd := math.Hypot(p.noise.SD, 1e-9*max(1, math.Abs(c.y[0])))
	unit := make([]float64, len(c.t))
	for _, g := range p.plants {
		simulator.Response(unit, g.Structure, g.Lags, g.DeadTime)
		left := p.unexplained(c, g, unit)
		for i := 0; i < len(left); i += stride {
			below[i] += distuv.UnitNormal.CDF(left[i] / sd)
		}
	}
	tail := (1 - p.options.Confidence) / 2
	for i := 0; i < len(below); i += stride {
		rows++
		if f := below[i] / float64(len(p.plants)); f >= tail && f <= 1-tail {
			inside++
		}
	}
	return rows, inside
}
