package validate

import (
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/gonum/mat"

	"lagwright/ident"
)

// unexplained returns what plant g, of unit response unit, leaves of the
// logged temperature after a starting level and a start off rest that fades
// with the longest lag have been fitted.
func (p *plan) unexplained(c *course, g ident.Plant, unit []float64) []float64 {
	left := make([]float64, len(unit))
	for i := range left {
		left[i] = c.y[i] - g.Gain*unit[i]
	}
	ones, fading := p.startColumns(c, g)
	fitted, _, ok := p.leastSquares(c, left, ones, fading)
	if !ok {
		return left
	}
	for i := range left {
		left[i] -= fitted[0] + fitted[1]*fading[i]
	}
	return left
}

// startColumns returns a constant and what is left of a start off rest.
func (p *plan) startColumns(c *course, g ident.Plant) (ones, fading []float64) {
	ones, fading = make([]float64, len(c.t)), make([]float64, len(c.t))
	longest := response(g)
	if len(g.Lags) > 0 {
		longest = g.Lags[0]
	}
	for i := range ones {
		ones[i] = 1
		fading[i] = math.Exp(-(c.t[i] - c.t[0]) / longest)
	}
	return ones, fading
}

// leastSquares fits y by the columns, all rows whitened for the card's
// correlated noise by y[i] − ρ·y[i−1], ρ = exp(−Δt/correlation time). It
// returns coefficients and standard errors; ok is false when the columns
// cannot be told apart.
func (p *plan) leastSquares(c *course, y []float64, columns ...[]float64) (beta, se []float64, ok bool) {
	n, m := len(y)-1, len(columns)
	if n <= m {
		return nil, nil, false
	}
	a, b := mat.NewDense(n, m, nil), mat.NewVecDense(n, nil)
	for i := range n {
		rho := 0.0
		if p.noise.CorrelationTime > 0 {
			rho = math.Exp(-(c.t[i+1] - c.t[i]) / p.noise.CorrelationTime)
		}
		for j, x := range columns {
			a.Set(i, j, x[i+1]-rho*x[i])
		}
		b.SetVec(i, y[i+1]-rho*y[i])
	}
	var qr mat.QR
	qr.Factorize(a)
	if !(qr.Cond() < 1e10) {
		return nil, nil, false
	}
	var x, left mat.VecDense
	if qr.SolveVecTo(&x, false, b) != nil {
		return nil, nil, false
	}
	left.MulVec(a, &x)
	left.SubVec(b, &left)
	var r, inverse mat.Dense
	qr.RTo(&r)
	if inverse.Inverse(r.Slice(0, m, 0, m)) != nil {
		return nil, nil, false
	}
	sd := mat.Norm(&left, 2) / math.Sqrt(float64(n-m))
	for j := range m {
		beta = append(beta, x.AtVec(j))
		se = append(se, sd*mat.Norm(inverse.RowView(j), 2))
	}
	return beta, se, true
}

// explain says which changes of the best-fit plant would bring it nearer to
// the log: gain, dead time, lags (all in one proportion), by one linearised
// step; or, when none would, where the largest difference lies.
func (p *plan) explain(courses []*course) []string {
	longest := slices.MaxFunc(courses, func(a, b *course) int { return len(a.t) - len(b.t) })
	if out := p.shifts(longest); len(out) > 0 {
		return out
	}
	var worst, at float64
	for _, c := range courses {
		unit := ident.NewSimulator(c.t, ident.HeldInput(c.t, c.u, p.law)).Response(nil, p.best.Structure, p.best.Lags, p.best.DeadTime)
		for i, v := range p.unexplained(c, p.best, unit) {
			if math.Abs(v) > math.Abs(worst) {
				worst, at = v, c.t[i]
			}
		}
	}
	return []string{fmt.Sprintf("no other gain, dead time or lag explains it: %s at %s s that the input did not cause, such as a load", quantity(worst, p.units.temperature), number(at))}
}

// shifts returns a sentence for each of gain, dead time and lags that differs
// from the card's by more than both its own and the card's uncertainty.
func (p *plan) shifts(c *course) []string {
	g := p.best
	lagCount := g.Structure.NumLags()
	sens := make([][]float64, lagCount+2)
	for i := range sens {
		sens[i] = make([]float64, len(c.t))
	}
	ident.NewSimulator(c.t, ident.HeldInput(c.t, c.u, p.law)).Sensitivities(sens, g.Structure, g.Lags, g.DeadTime)
	gain, dead, lags := make([]float64, len(c.t)), make([]float64, len(c.t)), make([]float64, len(c.t))
	left := make([]float64, len(c.t))
	for i := range left {
		gain[i], dead[i] = g.Gain*sens[0][i], g.Gain*sens[lagCount+1][i]
		for j, tau := range g.Lags {
			lags[i] += g.Gain * tau * sens[1+j][i]
		}
		left[i] = c.y[i] - gain[i]
	}
	ones, fading := p.startColumns(c, g)
	columns := [][]float64{ones, fading, gain, dead, lags}
	if lagCount == 0 {
		columns = columns[:4]
	}
	beta, se, ok := p.leastSquares(c, left, columns...)
	if !ok {
		return nil
	}
	if !p.explains(left, beta, columns) {
		return nil
	}
	var out []string
	apart := func(k int, known float64) bool { return math.Abs(beta[k]) > 2.5*math.Hypot(se[k], known) }
	known := p.knownSpread()
	if apart(2, known.gain) {
		out = append(out, fmt.Sprintf("the gain here is about %.0f%% %s than the card's", 100*math.Abs(beta[2]), side(beta[2], "higher", "lower")))
	}
	if apart(3, known.dead) {
		out = append(out, fmt.Sprintf("the dead time here is about %s %s than the card's", quantity(math.Abs(beta[3]), "s"), side(beta[3], "longer", "shorter")))
	}
	if lagCount > 0 && apart(4, known.lags) {
		out = append(out, fmt.Sprintf("the lags here are about %.0f%% %s than the card's", 100*math.Abs(beta[4]), side(beta[4], "longer", "shorter")))
	}
	return out
}

// explains tells whether the changes take away at least half of what the
// difference left holds beyond the card's noise, after the start (the first
// two columns) is taken off it. Without that a load passes for a slower plant.
func (p *plan) explains(left, beta []float64, columns [][]float64) bool {
	var before, after float64
	for i, v := range left {
		v -= beta[0]*columns[0][i] + beta[1]*columns[1][i]
		before += v * v
		for k := 2; k < len(columns); k++ {
			v -= beta[k] * columns[k][i]
		}
		after += v * v
	}
	noise := float64(len(left)) * p.noise.SD * p.noise.SD
	return after-noise <= (before-noise)/2
}

func side(x float64, more, less string) string {
	if x > 0 {
		return more
	}
	return less
}

// known is the card's own spread: of the gain and the sum of lags as
// fractions, of the dead time in s.
type known struct{ gain, dead, lags float64 }

func (p *plan) knownSpread() known {
	n := float64(len(p.plants))
	var k known
	lagSum := response(p.best) - p.best.DeadTime
	for _, g := range p.plants {
		k.gain += math.Pow(g.Gain/p.best.Gain-1, 2) / n
		k.dead += math.Pow(g.DeadTime-p.best.DeadTime, 2) / n
		if lagSum > 0 {
			k.lags += math.Pow((response(g)-g.DeadTime)/lagSum-1, 2) / n
		}
	}
	return known{math.Sqrt(k.gain), math.Sqrt(k.dead), math.Sqrt(k.lags)}
}

// saturation says when the input sat at a limit of the logged gains.
func (p *plan) saturation(courses []*course) []string {
	var rows, high, low int
	limits := p.logged.Limits
	for _, c := range courses {
		for _, u := range c.u {
			rows++
			if limits.Max != nil && u >= *limits.Max-slack {
				high++
			}
			if limits.Min != nil && u <= *limits.Min+slack {
				low++
			}
		}
	}
	var out []string
	for _, s := range []struct {
		n    int
		name string
	}{{high, "upper"}, {low, "lower"}} {
		if share := float64(s.n) / float64(rows); share > 0.05 {
			out = append(out, fmt.Sprintf("the input sits at its %s limit on %.0f%% of the rows, where the loop is open", s.name, 100*share))
		}
	}
	return out
}
