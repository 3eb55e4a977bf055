package fit

import (
	"math"
	"sort"

	"lagwright/ident"
)

// fitted is one structure at its optimum, with the noise shapes it was
// fitted under.
type fitted struct {
	st     ident.Structure
	e      *engine
	p      point // in the engine's full lags
	groups []int // lags that coincide at the optimum
	shapes []shape
	weight []float64
	sigma2 []float64

	figures []*residualFigures // of every record
	full    *polished          // optimum on every row, when the records are excerpts

	mean   int // parameters of the mean: gain, lags, dead time, linear columns
	params int // mean and noise parameters
	loglik float64
	aicc   float64
	bic    float64
}

// activate puts the noise shapes of f in force.
func (f *fitted) activate() {
	for i, r := range f.e.recs {
		r.weight, r.sigma2 = f.weight[i], f.sigma2[i]
		if r.shape != f.shapes[i] {
			r.setShape(f.shapes[i])
		}
	}
}

// s2 is the variance of the whitened residuals.
func (f *fitted) s2() float64 { return f.e.recs[0].sigma2 }

// study fits structures to a set of records.
type study struct {
	recs  []*record
	white bool // plain least squares on the simulated output

	unscored bool // only the place of the optimum is wanted
	fix      map[string]float64

	// refuted says that the log speaks clearly for another structure: the
	// intervals are then Wald intervals at the best noise shape, which is all
	// that a wrong model deserves.
	refuted bool

	tau  float64 // of the best single lag, for starts
	dead float64
	// coarse are the starts of a single lag, when they are known already.
	coarse [][]float64
	// walks are the noise shapes with a walk, per record, that the chain of two
	// lags does not rule out.
	walks []*walkNodes
	// rival is the AICc of the chain of two lags, infinite while there is none.
	rival float64
}

// clone returns a study on records of its own.
func (s *study) clone() *study {
	c := *s
	c.recs = make([]*record, len(s.recs))
	for i, r := range s.recs {
		c.recs[i] = r.clone()
	}
	return &c
}

// fit finds the optimum of one structure. shorter is the fit of the chain with
// one lag fewer, nil when there is none.
func (s *study) fit(st ident.Structure, shorter *fitted) *fitted {
	e := newEngine(st, s.recs)
	s.applyFix(e)
	if st.Order() <= 1 {
		if s.coarse == nil || st.Integrating() {
			s.coarse = e.coarse()
		}
		return s.fitFrom(e, s.coarse)
	}
	var from []float64
	if shorter != nil {
		from = shorter.p.eta
	}
	return s.fitFrom(e, e.starts(s.tau, s.dead, from))
}

// take makes a fit of the same log, found before under the noise shapes in force, one of
// the study's. The dead time may have left its interval with the last change of the shape.
func (s *study) take(f *fitted) *fitted {
	s.recs = f.e.recs
	if q := f.e.intervals(f.p); q.s < f.p.s {
		f.p = f.e.descend(q.eta, finalTol)
		s.coincide(f)
		s.complete(f)
		s.score(f)
	}
	return f
}

// survey averages the records for the search among structures: the single lag
// has the longest dead time of all, being late for all the lags it lacks.
func (s *study) survey() {
	for i, r := range s.recs {
		s.recs[i] = r.survey(1.2*s.dead+2*r.step, 3*r.step)
	}
}

// fitFrom finds the optimum of the engine's structure from the starts.
func (s *study) fitFrom(e *engine, starts [][]float64) *fitted {
	st := e.st
	f := &fitted{st: st, e: e}
	f.p = e.search(starts)
	s.focus(f)
	s.coincide(f)
	switch {
	case s.unscored:
	case s.white:
		s.measure(f)
		s.complete(f)
		s.score(f)
	default:
		s.alternate(f)
	}
	if st.Order() == 1 {
		s.tau, s.dead = f.p.eta[0], f.p.eta[1]
	}
	f.e.release()
	return f
}

// focus averages the records for the plant found and puts them in place of
// those of the search.
func (s *study) focus(f *fitted) {
	e := f.e
	dead := f.p.eta[e.ng]
	searched := true // on every row
	for _, r := range s.recs {
		searched = searched && !r.averagesRows()
	}
	zone := f.zone()
	for i, r := range s.recs {
		s.recs[i] = r.focus(dead, zone)
	}
	fresh := newEngine(f.st, s.recs)
	s.applyFix(fresh)
	f.e = fresh
	f.p = fresh.descend(f.p.eta, finalTol)
	if searched || !s.white { // alternate does it under the noise found
		return
	}
	if q := fresh.intervals(f.p); q.s < f.p.s {
		f.p = fresh.descend(q.eta, finalTol)
	}
}

// zone is how long after an onset every row is kept.
func (f *fitted) zone() float64 {
	step, eta := f.e.recs[0].step, f.p.eta
	if len(eta) < 2 {
		return 3 * step
	}
	return math.Max(3*step, math.Min(0.02*(eta[len(eta)-1]+eta[0]), 50*step))
}

// measure sets the variance of every record from its residuals under the
// shape in force, and the weights from the variances.
func (s *study) measure(f *fitted) {
	for i, t := range f.tangents() {
		s.recs[i].sigma2 = t.judge(s.recs[i].shape).s2
	}
	for _, r := range s.recs {
		r.weight = s.recs[0].sigma2 / r.sigma2
	}
}

// applyFix holds the parameters that the user knows.
func (s *study) applyFix(e *engine) {
	for name, v := range s.fix {
		switch {
		case name == "gain":
			e.gainFix, e.gain = true, v
		case name == "dead_time":
			e.lower[e.ng], e.upper[e.ng], e.held[e.ng] = v, v, true
		default:
			if i := lagIndex(name); i < e.ng {
				e.lower[i], e.upper[i], e.held[i] = v, v, true
			}
		}
	}
}

// lagIndex turns "lag2" into 1; -1 for anything else.
func lagIndex(name string) int {
	if len(name) == 4 && name[:3] == "lag" && name[3] >= '1' && name[3] <= '9' {
		return int(name[3] - '1')
	}
	return -1
}

// coincide tries the ways in which lags of a chain can coincide. The sum of
// squares depends on two near lags through their sum and the square of their
// difference, so its optimum can lie exactly on the edge where they are equal;
// a descent in the lags creeps towards it, a descent along the edge lands on it.
func (s *study) coincide(f *fitted) {
	e := f.e
	f.groups = append([]int(nil), e.groups...)
	s.order(f)
	if e.st.Equal() || e.st.Order() < 2 || len(s.fix) > 0 {
		return
	}
	identity := append([]int(nil), e.groups...)
	best, full := f.p, f.p
	dead := full.eta[e.nl]
	for _, g := range patterns(e.st.Order()) {
		e.setGroups(g)
		start := make([]float64, e.ng+1)
		count := make([]float64, e.ng)
		for i, k := range g {
			start[k] += full.eta[i]
			count[k]++
		}
		for k := range count {
			start[k] /= count[k]
		}
		start[e.ng] = dead
		q := e.descend(start, searchTol)
		if q.s < best.s*(1+1e-5) {
			q = e.descend(q.eta, finalTol)
		}
		if q.s < best.s*(1-1e-12) {
			if full.s > q.s*(1+1e-9) {
				if r := e.intervals(q); r.s < q.s {
					q = e.descend(r.eta, finalTol)
				}
			}
			best, f.groups = q, append([]int(nil), g...)
		}
	}
	if len(best.eta) < e.nl+1 || !equalInts(f.groups, identity) {
		e.setGroups(f.groups)
		eta := append(e.lags(best.eta), best.eta[e.ng])
		e.setGroups(identity)
		f.p = e.eval(eta, true)
	} else {
		e.setGroups(identity)
	}
	// An optimum inside can still be a little better than the edge.
	if q := e.descend(f.p.eta, searchTol); q.s < f.p.s*(1-1e-8) {
		f.p, f.groups = e.descend(q.eta, finalTol), identity
	}
	s.order(f)
}

// nearEdge reports whether lags coincide or come close to it.
func (f *fitted) nearEdge() bool {
	for i := range f.e.nl - 1 {
		if f.p.eta[i] < 1.5*f.p.eta[i+1] {
			return true
		}
	}
	return false
}

func equalInts(a, b []int) bool {
	for i := range a {
		if a[i] != b[i] {
			return false
		}
	}
	return true
}

// order sorts the lags, longest first, groups along with them.
func (s *study) order(f *fitted) {
	if len(s.fix) > 0 || f.e.nl < 2 {
		return
	}
	lags := f.p.eta[:f.e.nl]
	idx := make([]int, len(lags))
	for i := range idx {
		idx[i] = i
	}
	sort.SliceStable(idx, func(i, j int) bool { return lags[idx[i]] > lags[idx[j]] })
	eta := append([]float64(nil), f.p.eta...)
	groups := make([]int, len(idx))
	names := map[int]int{}
	for i, k := range idx {
		eta[i] = lags[k]
		g := f.groups[k]
		if _, ok := names[g]; !ok {
			names[g] = len(names)
		}
		groups[i] = names[g]
	}
	f.groups = groups
	f.p = f.e.eval(eta, true)
}

// alternate fits noise and plant in turn: the noise shape by restricted
// likelihood given the plant, the plant by generalised least squares given the
// noise, until the shape settles. It ends early where the structure is hopeless.
func (s *study) alternate(f *fitted) {
	for round := range 4 {
		before := make([]shape, len(s.recs))
		for i, r := range s.recs {
			before[i] = r.shape
		}
		s.whiten(f)
		f.p = f.e.descend(f.p.eta, finalTol)
		if round == 0 {
			if s.hopeless(f) {
				return
			}
			if q := f.e.intervals(f.p); q.s < f.p.s {
				f.p = f.e.descend(q.eta, finalTol)
			}
		}
		if round == 0 || f.nearEdge() {
			s.coincide(f)
		}
		settled := round > 0
		for i, r := range s.recs {
			if !alike(before[i], r.shape) {
				settled = false
			}
		}
		if settled {
			break
		}
	}
	s.measure(f)
	s.complete(f)
	s.score(f)
}

// whiten puts the noise shape of greatest restricted likelihood in force, given
// the plant.
func (s *study) whiten(f *fitted) {
	for i, t := range f.tangents() {
		var from *shape
		if s.recs[i].shape.white < 1 {
			from = &s.recs[i].shape
		}
		var n node
		if from != nil && from.walk > 0 {
			n = t.bestWalk(*from)
		} else {
			n = t.bestShape(from)
		}
		s.recs[i].setShape(n.shape)
		s.recs[i].sigma2 = n.s2
	}
	for _, r := range s.recs {
		r.weight = s.recs[0].sigma2 / r.sigma2
	}
}

// hopelessBy is the difference in AICc from the chain of two lags beyond which
// what is left to be found, other dead times and a better noise shape, is not
// looked for: far beyond refutedBy, because both can still lower it.
const hopelessBy = 100

// hopeless scores f as it stands and reports whether it is beyond hope.
func (s *study) hopeless(f *fitted) bool {
	if math.IsInf(s.rival, 1) || f.rows() > polishAll {
		return false
	}
	s.measure(f)
	s.complete(f)
	s.score(f)
	return f.aicc > s.rival+hopelessBy
}

func alike(a, b shape) bool {
	if (a.walk > 0) != (b.walk > 0) {
		return false
	}
	if a.walk > 0 && math.Abs(math.Log(a.walk/b.walk)) > 0.1 {
		return false
	}
	if a.white >= 1 && b.white >= 1 {
		return true
	}
	return math.Abs(math.Log(a.tc/b.tc)) < 0.02 && math.Abs(a.white-b.white) < 0.01
}

// tangents linearises f at its optimum, coinciding lags as one.
func (f *fitted) tangents() []*tangent {
	e := f.e
	identity := e.groups
	lower, upper, held := e.lower, e.upper, e.held
	if !equalInts(f.groups, identity) {
		e.setGroups(f.groups)
		defer func() { e.setGroups(identity); e.lower, e.upper, e.held = lower, upper, held }()
	}
	return e.tangents(point{eta: f.reducedEta()})
}

// reducedEta is the optimum with coinciding lags as one.
func (f *fitted) reducedEta() []float64 {
	ng := 0
	for _, g := range f.groups {
		ng = max(ng, g+1)
	}
	out := make([]float64, ng+1)
	for i, g := range f.groups {
		out[g] = f.p.eta[i]
	}
	out[ng] = f.p.eta[len(f.p.eta)-1]
	return out
}

// score fills the likelihood figures and stores the noise shapes in force.
func (s *study) score(f *fitted) {
	n := 0
	f.mean = f.e.nl + 2
	f.params = 0
	f.shapes, f.weight, f.sigma2 = nil, nil, nil
	if f.figures == nil {
		f.figures = make([]*residualFigures, len(s.recs))
	}
	ts := f.tangents()
	if f.e.gainFix {
		f.mean--
	}
	for _, h := range f.e.held {
		if h {
			f.mean--
		}
	}
	f.loglik = 0
	for i, r := range s.recs {
		f.shapes = append(f.shapes, r.shape)
		f.weight = append(f.weight, r.weight)
		f.mean += len(r.basis)
		switch r.rest {
		case earlier:
			f.mean++
		case free:
			f.mean += f.st.Order()
		}
		n += len(r.root.t)
		f.loglik += f.likelihood(i, ts[i])
		f.sigma2 = append(f.sigma2, r.sigma2)
		f.params++ // variance
		if !s.white {
			f.params += 2
		}
		if r.shape.walk > 0 {
			f.params++
		}
	}
	f.params += f.mean
	k, m := float64(f.params), float64(n)
	f.aicc = -2*f.loglik + 2*k
	if m-k-1 > 0 {
		f.aicc += 2 * k * (k + 1) / (m - k - 1)
	}
	f.bic = -2*f.loglik + k*math.Log(m)
}

// rows is the number of rows of the full logs.
func (f *fitted) rows() int {
	n := 0
	for _, r := range f.e.recs {
		n += len(r.root.t)
	}
	return n
}

// likelihood is the log likelihood of record i under the shape in force,
// at the model's tangent. It keeps the figures of the residuals it passes, in place
// of those it had.
func (f *fitted) likelihood(i int, t *tangent) float64 {
	r := f.e.recs[i]
	model := t.model
	if f.full != nil {
		model = f.full.explained(f.st, i)
	}
	figures, w := r.walkResiduals(model, f.figures[i])
	f.figures[i] = figures
	if !r.averagesRows() {
		return logLikelihood(f.p.part[i], r.filter.logdet, len(r.t))
	}
	return logLikelihood(w.sum, w.logDeterminant(), len(r.root.t))
}
