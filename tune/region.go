package tune

import (
	"math"
	"math/cmplx"
	"slices"

	"lagwright/ident"
)

// PoleRegion is where the poles of a loop must lie: left of a line that
// settling asks for, and inside the sector that damping asks for. An envelope
// e^(−sigma·t) falls to Band in Settling seconds when
//
//	sigma = −ln(Band)/Settling          (3.91/Settling for 2 %)
//
// and a damping ratio of Damping is an angle of acos(Damping) off the negative
// real axis. The line holds for every pole, the sector for those with |s| up
// to twice the phase crossover: a loop with dead time has an endless chain of
// faster ones whose damping ratio tends to 0.
type PoleRegion struct {
	Settling float64 `json:"settling_s"` // s; +Inf or 0 asks for nothing
	Band     float64 `json:"band"`       // fraction; 0 means 0.02
	Damping  float64 `json:"damping"`    // 0 asks for nothing
}

// sigma is the real part asked for, 1/s.
func (r PoleRegion) sigma() float64 {
	if r.Settling == 0 || math.IsInf(r.Settling, 1) {
		return 0
	}
	band := r.Band
	if band == 0 {
		band = 0.02
	}
	return -math.Log(band) / r.Settling
}

// GainInterval is a range of gains, input per temperature, its ends by
// rising size.
type GainInterval struct {
	Low  float64 `json:"low"`
	High float64 `json:"high"`
}

// RegionDesign says with which gains a P controller has its poles in a region.
type RegionDesign struct {
	Region    PoleRegion     `json:"region"`
	Nominal   []GainInterval `json:"nominal"`   // on the best fit; none, one or several
	Plausible []GainInterval `json:"plausible"` // on the assurance share of the plausible plants, of every card
	Assurance float64        `json:"assurance"`

	// The gain that misses least on the best fit where Nominal is empty, else
	// one inside; and what it reaches.
	Best         float64 `json:"best_kc"`
	BestSettling float64 `json:"best_settling_s"` // −ln(Band)/|Re| of its slowest pole
	BestDamping  float64 `json:"best_damping"`
	BestShare    float64 `json:"best_share"` // largest share of the plausible plants with all poles inside, at any one gain
}

// DesignPoleRegion finds the gains of a P controller that place the poles of
// nominal, and those of a share of the plausible plants, in a region.
func DesignPoleRegion(nominal ident.Plant, plants []ident.Plant, r PoleRegion, assurance float64) *RegionDesign {
	d := &RegionDesign{Region: r, Assurance: assurance, Nominal: regionGains(nominal, r)}
	sets := make([][]GainInterval, len(plants))
	for i, p := range plants {
		sets[i] = regionGains(p, r)
	}
	d.Plausible, d.BestShare = sharedGains(sets, assurance)
	d.nearest(nominal)
	return d
}

// regionGains returns the gains whose poles lie in the region. The poles move
// continuously with the gain, so they can enter or leave only at gains for
// which one lies on the boundary: with L = Kc·G the pole s belongs to
// Kc = −1/G(s), which must be real. Those gains are found along the boundary;
// between two of them one test, by counting encirclements, decides.
func regionGains(p ident.Plant, r PoleRegion) []GainInterval {
	sign := math.Copysign(1, p.Gain)
	unit := newOpenLoop(p, law{kc: sign, ti: math.Inf(1), b: 1}, 0)
	cross := unit.phaseCross()
	top := 1e4 / math.Abs(p.Gain)
	if !math.IsInf(cross, 1) {
		top = 1 / unit.magnitude(cross)
	}
	inside := func(kc float64) bool {
		l := unit
		l.k *= kc
		return l.leftOf(r.sigma()) && (r.Damping <= 0 || l.dampedEnough(r.Damping, cross))
	}
	var out []GainInterval
	marks := append(boundaryGains(&unit, r, cross, top), top)
	slices.Sort(marks)
	low := 0.0
	for _, high := range marks {
		if high <= low*(1+1e-9) {
			continue
		}
		if inside((low + high) / 2) {
			if n := len(out); n > 0 && out[n-1].High == low {
				out[n-1].High = high
			} else {
				out = append(out, GainInterval{low, high})
			}
		}
		low = high
	}
	if sign < 0 {
		for i := range out {
			out[i].Low, out[i].High = -out[i].Low, -out[i].High
		}
	}
	return out
}

// boundaryGains returns every gain up to top that puts a pole on the line or
// on the edge of the sector; l has unit gain.
func boundaryGains(l *openLoop, r PoleRegion, cross, top float64) []float64 {
	var out []float64
	gain := func(s complex128) complex128 { return -1 / l.at(s) }
	along := func(path func(x float64) complex128, n int) {
		angle := func(x float64) float64 { return cmplx.Phase(gain(path(x))) }
		for i := range n {
			a, b := float64(i)/float64(n), float64(i+1)/float64(n)
			pa, pb := angle(a), angle(b)
			// the gain is real and positive where its angle passes 0
			if (pa > 0) != (pb > 0) && math.Abs(pa-pb) < math.Pi {
				x := bisect(angle, a, b)
				if k := real(gain(path(x))); k > 0 && k < top {
					out = append(out, k)
				}
			}
		}
	}
	reach := l.reach(top, r.sigma())
	if s := r.sigma(); s > 0 {
		if k := real(gain(complex(-s, 0))); k > 0 && k < top {
			out = append(out, k)
		}
		along(func(x float64) complex128 { return complex(-s, reach*(x*x+1e-9)) }, 400)
	}
	if r.Damping > 0 {
		psi := math.Pi - math.Acos(r.Damping)
		radius := min(2*cross, reach)
		along(func(x float64) complex128 { return cmplx.Rect(radius*(x*x+1e-9), psi) }, 400)
		along(func(x float64) complex128 { return cmplx.Rect(radius, psi*(1-x)) }, 100)
	}
	return out
}

// reach is a frequency beyond which no pole of gain up to top lies on the line
// Re s = −sigma.
func (l *openLoop) reach(top, sigma float64) float64 {
	_, w := l.corners()
	w = max(w, sigma)
	for range 200 {
		if cmplx.Abs(l.at(complex(-sigma, w)))*top < 0.5 {
			return w
		}
		w *= 1.3
	}
	return w
}

// leftOf tells whether every pole of the closed loop lies left of −sigma, by
// the encirclements of 0 by 1+L along that line: poles right of it are the
// open loop's there less the turns.
func (l *openLoop) leftOf(sigma float64) bool {
	open := 0
	if sigma > 0 {
		open = l.integrators
	}
	for _, tau := range l.lags {
		if tau*sigma > 1 {
			open++
		}
	}
	if sigma == 0 {
		return l.stableByFigures()
	}
	start := complex(-sigma, 0)
	w := winding{l: l, at: start, value: 1 + l.at(start)}
	_, high := l.corners()
	end := max(high, sigma)
	for range 200 {
		if cmplx.Abs(l.at(complex(-sigma, end))) < 0.05 {
			break
		}
		end *= 1.3
	}
	const n = 200
	for i := range n {
		x := float64(i+1) / n
		w.to(complex(-sigma, end*x*x), 0)
	}
	// w.angle runs from that of a real number to nearly that of 1
	right := open - int(math.Round(w.angle/math.Pi))
	return right == 0
}

func (l *openLoop) stableByFigures() bool {
	grid := l.grid()
	return l.stable(grid[0], l.gainCrossings(grid))
}

// sharedGains returns the gains that lie in the sets of at least a share of
// the plants, and the largest share reached at any gain.
func sharedGains(sets [][]GainInterval, share float64) ([]GainInterval, float64) {
	type edge struct {
		at   float64
		step int
	}
	var edges []edge
	for _, set := range sets {
		for _, g := range set {
			lo, hi := min(g.Low, g.High), max(g.Low, g.High)
			edges = append(edges, edge{lo, 1}, edge{hi, -1})
		}
	}
	slices.SortFunc(edges, func(a, b edge) int {
		switch {
		case a.at < b.at:
			return -1
		case a.at > b.at:
			return 1
		}
		return b.step - a.step
	})
	need := needed(len(sets), share)
	var out []GainInterval
	count, most, from := 0, 0, 0.0
	for _, e := range edges {
		before := count
		count += e.step
		most = max(most, count)
		if before < need && count >= need {
			from = e.at
		}
		if before >= need && count < need && e.at > from {
			out = append(out, GainInterval{from, e.at})
		}
	}
	if len(sets) == 0 {
		return out, 0
	}
	return out, float64(most) / float64(len(sets))
}

// inBoth returns the gains that lie in both of two sets.
func inBoth(a, b []GainInterval) []GainInterval {
	var out []GainInterval
	for _, x := range a {
		for _, y := range b {
			lo := max(min(x.Low, x.High), min(y.Low, y.High))
			hi := min(max(x.Low, x.High), max(y.Low, y.High))
			if lo < hi {
				out = append(out, GainInterval{lo, hi})
			}
		}
	}
	return out
}

// nearest sets the gain that misses the region least on the nominal plant and
// what it reaches.
func (d *RegionDesign) nearest(p ident.Plant) {
	sign := math.Copysign(1, p.Gain)
	unit := newOpenLoop(p, law{kc: sign, ti: math.Inf(1), b: 1}, 0)
	cross := unit.phaseCross()
	top := 100 / math.Abs(p.Gain)
	if !math.IsInf(cross, 1) {
		top = 1 / unit.magnitude(cross)
	}
	reached := func(kc float64) (slowest, damping float64) {
		l := unit
		l.k *= kc
		poles := l.poles()
		if len(poles) == 0 {
			return 0, 0
		}
		return -real(poles[0]), dominantDamping(poles, cross)
	}
	miss := func(kc float64) float64 {
		slowest, damping := reached(kc)
		worst := math.Inf(-1)
		if s := d.Region.sigma(); s > 0 {
			worst = max(worst, (s-slowest)/s)
		}
		if d.Region.Damping > 0 {
			worst = max(worst, (d.Region.Damping-damping)/d.Region.Damping)
		}
		return worst
	}
	const n = 80
	best, at := math.Inf(1), top/2
	for i := range n {
		kc := top * math.Pow(1e-3, 1-(float64(i)+0.5)/n)
		if m := miss(kc); m < best {
			best, at = m, kc
		}
	}
	ratio := math.Pow(1e3, 1.0/n)
	x, neg := goldenMax(func(kc float64) float64 { return -miss(kc) }, at/ratio, min(at*ratio, top))
	if -neg < best {
		at = x
	}
	slowest, damping := reached(at)
	d.Best, d.BestDamping = sign*at, damping
	band := d.Region.Band
	if band == 0 {
		band = 0.02
	}
	d.BestSettling = -math.Log(band) / slowest
}
