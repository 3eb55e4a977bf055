package validate

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distuv"

	"lagwright/ident"
	"lagwright/tune"
)

// A plantShift is by how much a run speaks for another plant than the card's
// best fit: gain and lags (all in one proportion) as fractions, dead time in
// s, with the covariance of these estimates.
type plantShift struct {
	by         [3]float64 // gain, dead time, lags
	covariance *mat.SymDense
}

// shift estimates the plant shift from the rows that follow the moves of the
// setpoint, each move for itself, and puts the estimates together by their
// covariances; so a move into which a load falls counts for little.
//
// In a log made in closed loop the input answers the disturbance, so least
// squares would take a load for another plant. Instead the sensitivities to
// the logged input are weighed by those to an input that owes nothing to the
// disturbance: the one that the controller, on the card's plant, would have
// given for the setpoint moves alone (instrumental variables: T. Söderström,
// P. Stoica, Instrumental Variable Methods for System Identification, 1983,
// from memory). In manual the moves are those of the input, which is its own
// instrument. ok is false when nothing shows the plant.
func (p *plan) shift(courses []*course, manual bool) (s plantShift, ok bool) {
	var all pool
	for _, c := range courses {
		columns, left := p.shiftColumns(c, c.u)
		instruments, driver := columns, c.u
		if !manual {
			u, err := p.setpointInput(c)
			if err != nil {
				continue
			}
			instruments, _ = p.shiftColumns(c, u)
			driver = c.r
		}
		for _, w := range p.windows(c, driver) {
			if by, cov, tells := p.shiftIn(w, c, left, columns, instruments); tells {
				all.add(by, cov)
			}
		}
	}
	if s, ok = all.mean(); !ok {
		return s, false
	}
	return s, s.covariance.At(0, 0) < 0.25*0.25 // a gain known to worse than a quarter shows nothing
}

// A pool puts independent estimates together, each weighed by the inverse of
// its covariance.
type pool struct {
	precision *mat.SymDense
	weighted  *mat.VecDense
}

// add leaves out an estimate whose covariance is singular.
func (a *pool) add(by *mat.VecDense, cov *mat.SymDense) {
	var factor mat.Cholesky
	var inverse mat.SymDense
	if !factor.Factorize(cov) || factor.InverseTo(&inverse) != nil {
		return
	}
	if a.precision == nil {
		a.precision, a.weighted = mat.NewSymDense(by.Len(), nil), mat.NewVecDense(by.Len(), nil)
	}
	var part mat.VecDense
	part.MulVec(&inverse, by)
	a.precision.AddSym(a.precision, &inverse)
	a.weighted.AddVec(a.weighted, &part)
}

func (a *pool) mean() (s plantShift, ok bool) {
	if a.precision == nil {
		return s, false
	}
	var factor mat.Cholesky
	s.covariance = mat.NewSymDense(a.weighted.Len(), nil)
	if !factor.Factorize(a.precision) || factor.InverseTo(s.covariance) != nil {
		return s, false
	}
	var by mat.VecDense
	by.MulVec(s.covariance, a.weighted)
	for i := range by.Len() {
		s.by[i] = by.AtVec(i)
	}
	return s, true
}

// A window is the rows lo ≤ i < hi about one move.
type window struct{ lo, hi int }

// windows lists the rows from one response time before each move of the
// driver to eight after it, or to the next move.
func (p *plan) windows(c *course, driver []float64) []window {
	span := response(p.best)
	s := signal{t: c.t, r: driver, r0: driver[0]}
	var out []window
	for _, mv := range moves(s, yardstick{response: span}) {
		w := window{mv.from, mv.to}
		for w.lo > 0 && c.t[mv.from]-c.t[w.lo] < span {
			w.lo--
		}
		for w.hi > w.lo && c.t[w.hi-1]-c.t[mv.from] > 8*span {
			w.hi--
		}
		out = append(out, w)
	}
	return out
}

// shiftIn estimates the shift in one window; a level and a start off rest are
// fitted along, and what is left is whitened by its own first-order
// correlation.
func (p *plan) shiftIn(w window, c *course, left []float64, columns, instruments [][]float64) (by *mat.VecDense, cov *mat.SymDense, ok bool) {
	t := c.t[w.lo:w.hi]
	cut := func(all [][]float64) [][]float64 {
		ones, fading := p.startColumns(t)
		out := [][]float64{ones, fading}
		for _, x := range all {
			out = append(out, x[w.lo:w.hi])
		}
		return out
	}
	y, x, z := left[w.lo:w.hi], cut(columns), cut(instruments)
	step := medianInterval(c.t)
	beta, _, ok := instrumental(t, step, p.cardCorrelation(step), y, x, z)
	if !ok {
		return nil, nil, false
	}
	beta, all, ok := instrumental(t, step, lagOneCorrelation(y, x, beta), y, x, z)
	if !ok {
		return nil, nil, false
	}
	n := len(columns)
	by, cov = mat.NewVecDense(n, append([]float64(nil), beta[2:]...)), mat.NewSymDense(n, nil)
	for i := range n {
		for j := i; j < n; j++ {
			cov.SetSym(i, j, all.At(2+i, 2+j))
		}
	}
	return by, cov, true
}

// cardCorrelation is the card's correlation of the noise over a step.
func (p *plan) cardCorrelation(step float64) float64 {
	if p.noise.CorrelationTime <= 0 {
		return 0
	}
	return math.Exp(-step / p.noise.CorrelationTime)
}

// shiftColumns returns the sensitivities to gain, dead time and lags for the
// input u, and what the best-fit plant leaves of the log.
func (p *plan) shiftColumns(c *course, u []float64) (columns [][]float64, left []float64) {
	g := p.best
	n, lagCount := len(c.t), g.Structure.NumLags()
	sens := make([][]float64, lagCount+2)
	for i := range sens {
		sens[i] = make([]float64, n)
	}
	ident.NewSimulator(c.t, ident.HeldInput(c.t, u, p.law)).Sensitivities(sens, g.Structure, g.Lags, g.DeadTime)
	gain, dead, lags := make([]float64, n), make([]float64, n), make([]float64, n)
	left = make([]float64, n)
	for i := range left {
		gain[i], dead[i] = g.Gain*sens[0][i], g.Gain*sens[lagCount+1][i]
		for j, tau := range g.Lags {
			lags[i] += g.Gain * tau * sens[1+j][i]
		}
		left[i] = c.y[i] - gain[i]
	}
	columns = [][]float64{gain, dead, lags}
	if lagCount == 0 {
		columns = columns[:2]
	}
	return columns, left
}

// startColumns returns a constant and what is left of a start off rest, which
// fades with the longest lag.
func (p *plan) startColumns(t []float64) (ones, fading []float64) {
	ones, fading = make([]float64, len(t)), make([]float64, len(t))
	longest := p.longest()
	for i := range ones {
		ones[i] = 1
		fading[i] = math.Exp(-(t[i] - t[0]) / longest)
	}
	return ones, fading
}

// longest is the best fit's longest lag, in s.
func (p *plan) longest() float64 {
	if len(p.best.Lags) > 0 {
		return p.best.Lags[0]
	}
	return response(p.best)
}

// setpointInput returns the input that the logged controller would have given
// on the card's plant for the setpoint alone, starting at rest.
func (p *plan) setpointInput(c *course) ([]float64, error) {
	gains := *p.logged
	gains.Limits = tune.Limits{} // the linear loop: at a limit the logged input shows it
	y, u := make([]float64, len(c.t)), make([]float64, len(c.t))
	return u, newRunner(p.law, &gains, []ident.Plant{p.best}).replay(c.atRest(c.before, c.u[0], c.phi[0]), 0, y, u)
}

// instrumental solves Zᵀ(y − X·beta) = 0 with rows whitened by
// y[i] − ρ^(Δt/step)·y[i−1], the first by √(1−ρ²)·y[0] (S. J. Prais,
// C. B. Winsten, Cowles Commission Discussion Paper 383, 1954, from memory):
// without it what fades like the noise would be lost. It returns the covariance
// s²·(ZᵀX)⁻¹·ZᵀZ·(ZᵀX)⁻ᵀ. ok is false when the instruments cannot tell the
// columns apart.
func instrumental(t []float64, step, rho float64, y []float64, x, z [][]float64) (beta []float64, cov *mat.Dense, ok bool) {
	n, m := len(t), len(x)
	if n <= m {
		return nil, nil, false
	}
	a, b := mat.NewDense(n, m, nil), mat.NewDense(n, m, nil)
	v := mat.NewVecDense(n, nil)
	first := math.Sqrt(1 - rho*rho)
	for j := range m {
		a.Set(0, j, first*x[j][0])
		b.Set(0, j, first*z[j][0])
	}
	v.SetVec(0, first*y[0])
	for i := 1; i < n; i++ {
		r := math.Pow(rho, (t[i]-t[i-1])/step)
		for j := range m {
			a.Set(i, j, x[j][i]-r*x[j][i-1])
			b.Set(i, j, z[j][i]-r*z[j][i-1])
		}
		v.SetVec(i, y[i]-r*y[i-1])
	}
	scale := make([]float64, m) // so that the condition means something
	for j := range m {
		scale[j] = mat.Norm(b.ColView(j), 2)
		if scale[j] == 0 {
			return nil, nil, false
		}
	}
	var zx, zz, inverse mat.Dense
	zx.Mul(b.T(), a)
	zz.Mul(b.T(), b)
	for _, d := range []*mat.Dense{&zx, &zz} {
		d.Apply(func(i, j int, v float64) float64 { return v / scale[i] / scale[j] }, d)
	}
	if !(mat.Cond(&zx, 2) < 1e8) || inverse.Inverse(&zx) != nil {
		return nil, nil, false
	}
	var zy, solved mat.VecDense
	zy.MulVec(b.T(), v)
	for j := range m {
		zy.SetVec(j, zy.AtVec(j)/scale[j])
	}
	solved.MulVec(&inverse, &zy)
	for j := range m {
		solved.SetVec(j, solved.AtVec(j)/scale[j])
	}
	var left mat.VecDense
	left.MulVec(a, &solved)
	left.SubVec(v, &left)
	variance := mat.Dot(&left, &left) / float64(n-m)
	cov = new(mat.Dense)
	cov.Product(&inverse, &zz, inverse.T())
	cov.Apply(func(i, j int, v float64) float64 { return v * variance / scale[i] / scale[j] }, cov)
	for j := range m {
		beta = append(beta, solved.AtVec(j))
	}
	return beta, cov, true
}

// lagOneCorrelation of what the columns leave of y, between 0 and 0.999.
func lagOneCorrelation(y []float64, x [][]float64, beta []float64) float64 {
	var last, product, square float64
	for i := range y {
		e := y[i]
		for j := range x {
			e -= beta[j] * x[j][i]
		}
		if i > 0 {
			product += last * e
		}
		square += e * e
		last = e
	}
	if square == 0 {
		return 0
	}
	return min(0.999, max(0, product/square))
}

// material is how much of a shift makes a difference: a twentieth of the gain
// and of the response time, a tenth of the lags (common practice, no source).
func (p *plan) material() [3]float64 { return [3]float64{0.05, 0.05 * response(p.best), 0.1} }

// contradicts tells whether the shift is larger than its own and the card's
// uncertainty together explain in 99% of runs, and large enough to matter.
func (p *plan) contradicts(s plantShift) bool {
	n := s.covariance.SymmetricDim()
	both := p.cardCovariance(n)
	both.AddSym(both, s.covariance)
	var factor mat.Cholesky
	if !factor.Factorize(both) {
		return false
	}
	by := mat.NewVecDense(n, append([]float64(nil), s.by[:n]...))
	var solved mat.VecDense
	if factor.SolveVecTo(&solved, by) != nil {
		return false
	}
	matters := false
	for i, least := range p.material() {
		matters = matters || math.Abs(s.by[i]) > least
	}
	return matters && mat.Dot(by, &solved) > distuv.ChiSquared{K: float64(n)}.Quantile(0.99)
}

// cardCovariance is that of gain, dead time and lags over the plausible
// plants about the best fit, as shifts.
func (p *plan) cardCovariance(n int) *mat.SymDense {
	out := mat.NewSymDense(n, nil)
	lags := response(p.best) - p.best.DeadTime
	for _, g := range p.plants {
		by := [3]float64{g.Gain/p.best.Gain - 1, g.DeadTime - p.best.DeadTime, 0}
		if n > 2 {
			by[2] = (response(g)-g.DeadTime)/lags - 1
		}
		for i := range n {
			for j := i; j < n; j++ {
				out.SetSym(i, j, out.At(i, j)+by[i]*by[j]/float64(len(p.plants)))
			}
		}
	}
	return out
}

// words names the parts of a shift that stand out: more than twice their
// uncertainty, or the largest when none does.
func (p *plan) words(s plantShift) []string {
	n := s.covariance.SymmetricDim()
	card := p.cardCovariance(n)
	say := []func(float64) string{
		func(x float64) string { return "the gain here is " + against(x, "higher", "lower") },
		func(x float64) string {
			return fmt.Sprintf("the dead time here is about %s %s than the card's", quantity(math.Abs(x), "s"), side(x, "longer", "shorter"))
		},
		func(x float64) string { return "the lags here are " + against(x, "longer", "shorter") },
	}
	var out []string
	largest, most := 0, 0.0
	for i := range n {
		ratio := math.Abs(s.by[i]) / math.Sqrt(s.covariance.At(i, i)+card.At(i, i))
		if ratio > most {
			largest, most = i, ratio
		}
		if ratio > 2 {
			out = append(out, say[i](s.by[i]))
		}
	}
	if len(out) == 0 {
		out = append(out, say[largest](s.by[largest]))
	}
	return out
}

// against compares with the card: in percent, or beyond that as a multiple. A
// linear estimate of a shift may pass zero, which says no more than far less.
func against(x float64, more, less string) string {
	switch {
	case x > 1:
		return "about " + number(1+x) + " times the card's"
	case x <= -1:
		return "far " + less + " than the card's"
	}
	return fmt.Sprintf("about %.0f%% %s than the card's", 100*math.Abs(x), side(x, more, less))
}

func side(x float64, more, less string) string {
	if x > 0 {
		return more
	}
	return less
}
