package fit

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"runtime"
	"slices"
	"sort"
	"sync"

	"lagwright/data"
	"lagwright/ident"
)

// outcome is everything a fit found out.
type outcome struct {
	opt      Options
	recs     []*record
	initial  initial
	drift    bool
	models   []*bounded
	selected int
	weights  []float64 // of the models, for plausible plants
	draws    []plausible

	yardsticks []*yardstick // of the records

	one, two *fitted // the single lag and the chain of two that settled initial state and drift
	final    bool    // two is the chain of two that is asked for, too
}

// plausible is a draw with the structure it is of.
type plausible struct {
	st ident.Structure
	draw
}

// prepare makes the records of the runs.
func prepare(runs []*data.Run, law ident.Law) ([]*record, error) {
	if len(runs) == 0 {
		return nil, fmt.Errorf("%w: no log given", ErrTooShort)
	}
	if err := alikeRuns(runs); err != nil {
		return nil, err
	}
	var recs []*record
	for _, run := range runs {
		r, err := newRecord(run, law)
		if err != nil {
			return nil, err
		}
		recs = append(recs, r.coarse(searchRows))
	}
	return recs, nil
}

// alikeRuns refuses runs that cannot share a plant: other units, or the same
// rows twice.
func alikeRuns(runs []*data.Run) error {
	for i, a := range runs {
		for _, b := range runs[:i] {
			if a.Units != b.Units {
				return fmt.Errorf("%w: %s is in %s and %s, %s in %s and %s; bring them to the same units with --input-unit, --temp-unit",
					ErrUnlike, b.Source.File, b.Units.Input, b.Units.Temperature, a.Source.File, a.Units.Input, a.Units.Temperature)
			}
			if a.Start.Equal(b.Start) && slices.Equal(a.T, b.T) && slices.EqualFunc(a.Y, b.Y, sameReading) {
				return fmt.Errorf("%w: %s and %s hold the same rows; give each log once", ErrUnlike, b.Source.File, a.Source.File)
			}
		}
	}
	return nil
}

func sameReading(a, b float64) bool { return a == b || math.IsNaN(a) && math.IsNaN(b) }

// find fits the structures and chooses among them.
func find(ctx context.Context, recs []*record, o Options) (*outcome, error) {
	out := &outcome{opt: o, recs: recs}
	s := &study{recs: recs, white: o.Noise == "white", fix: o.Fix, rival: math.Inf(1)}
	if o.Initial == free.String() { // the states are those at the first row of the log
		for i, r := range recs {
			r.root.scope, r.root.most = r.root.wholeScope(), mostFree
			if r.survey(0, 3*r.step).excerpt() {
				return nil, fmt.Errorf("%w: --initial free serves logs of up to %d rows where the input never rests, and %s is longer: leave --initial out, or cut the log with --from and --to",
					ErrOption, mostFree, r.run.Source.File)
			}
			s.recs[i] = r.coarse(searchRows)
		}
	}
	if err := out.settle(s); err != nil {
		return nil, err
	}
	structures, err := o.structures()
	if err != nil {
		return nil, err
	}
	fits := make([]*fitted, len(structures))
	studies := make([]*study, len(structures))
	s.survey()
	for i := range studies {
		studies[i] = s.clone()
	}
	// Fits side by side; the chains wait for one another, since each starts
	// from the one below.
	tasks := map[int][]func(){}
	task := func(group int, f func()) { tasks[group] = append(tasks[group], f) }
	var chains []int
	for i, st := range structures {
		if !st.Equal() && st.Order() > 1 {
			chains = append(chains, i)
			continue
		}
		task(i+1, func() { fits[i] = studies[i].fit(st, nil) })
	}
	if len(chains) > 0 {
		task(0, func() {
			shorter := out.two
			for _, i := range chains {
				st := structures[i]
				for n := shorter.st.Order() + 1; n < st.Order(); n++ {
					below, _ := ident.ParseStructure(fmt.Sprintf("chain%d", n))
					shorter = studies[i].clone().fit(below, shorter)
				}
				switch {
				case st.Order() == 2 && out.final:
					fits[i] = studies[i].take(out.two)
				case st.Order() == 2:
					fits[i] = studies[i].fit(st, out.one)
				default:
					fits[i] = studies[i].fit(st, shorter)
				}
				shorter = fits[i]
			}
		})
	}
	done := 0
	var mu sync.Mutex
	tick := func() {
		mu.Lock()
		defer mu.Unlock()
		done++
		if o.Progress != nil {
			o.Progress(done, 2*len(structures))
		}
	}
	if err := together(ctx, o.Workers, sortedGroups(tasks), tick); err != nil {
		return nil, err
	}
	structures, fits, studies = answered(structures, fits, studies)
	if len(fits) == 0 {
		return nil, noAnswer(recs)
	}
	least := math.Inf(1)
	for _, f := range fits {
		least = math.Min(least, f.aicc)
	}
	for i, f := range fits {
		studies[i].refuted = f.aicc > least+refutedBy
	}
	out.models = make([]*bounded, len(structures))
	var bounds [][]func()
	for i := range structures {
		bounds = append(bounds, []func(){func() {
			out.models[i] = studies[i].bound(fits[i], o.Confidence, rng(o.Rand, "bound", i))
		}})
	}
	if err := together(ctx, o.Workers, bounds, tick); err != nil {
		return nil, err
	}
	// Better optima met on the way may show no answer after all.
	out.models = slices.DeleteFunc(out.models, func(m *bounded) bool { return !m.shows() })
	if len(out.models) == 0 {
		return nil, noAnswer(recs)
	}
	out.choose()
	out.widen()
	for i, m := range out.models {
		if o.quick && m.rows() > polishAll {
			continue
		}
		if i == out.selected || s.white && m.rows() <= polishAll {
			m.refine(s.white)
		}
	}
	return out, nil
}

// answered drops the structures whose fit found no response in any row.
func answered(sts []ident.Structure, fits []*fitted, studies []*study) ([]ident.Structure, []*fitted, []*study) {
	var s []ident.Structure
	var f []*fitted
	var d []*study
	for i := range fits {
		if p := fits[i].p; p.gg > 0 && fits[i].shows() && !math.IsNaN(fits[i].aicc) && !math.IsInf(fits[i].aicc, 0) {
			s, f, d = append(s, sts[i]), append(f, fits[i]), append(d, studies[i])
		}
	}
	return s, f, d
}

func noAnswer(recs []*record) error {
	return fmt.Errorf("%s: %w: no row after the bump shows it; record on until the temperature has settled", recs[0].run.Source.File, ErrNoAnswer)
}

// leastShown is the part of the temperature's range that the answer to the input must
// make up; less is rounding.
const leastShown = 1e-9

// shows reports whether the answer of f to the input can be seen in a log.
func (f *fitted) shows() bool {
	for _, r := range f.e.recs {
		answer := math.Abs(f.p.gain) * r.swing
		if f.st.Integrating() {
			answer *= r.root.span
		}
		if answer > leastShown*r.rise() {
			return true
		}
	}
	return false
}

// refutedBy is the difference in AICc beyond which a structure counts as
// refuted: its likelihood is e^-15 of the best one's (Burnham and Anderson
// 2002, from memory, call a difference above 10 "essentially no support").
const refutedBy = 30

// polishAll is the number of rows up to which every structure of a white fit is
// brought to its optimum on every row; of longer logs only the selected one.
const polishAll = 50000

func sortedGroups(tasks map[int][]func()) [][]func() {
	var keys []int
	for k := range tasks {
		keys = append(keys, k)
	}
	sort.Ints(keys)
	var out [][]func()
	for _, k := range keys {
		out = append(out, tasks[k])
	}
	return out
}

// together runs groups of tasks on a number of workers, the tasks of a group
// one after the other; tick is called after each.
func together(ctx context.Context, workers int, groups [][]func(), tick func()) error {
	if workers <= 0 {
		workers = runtime.GOMAXPROCS(0)
	}
	next := make(chan []func())
	var wg sync.WaitGroup
	for range min(workers, len(groups)) {
		wg.Add(1)
		go func() {
			defer wg.Done()
			for g := range next {
				for _, f := range g {
					if ctx.Err() != nil {
						return
					}
					f()
					tick()
				}
			}
		}()
	}
	for _, g := range groups {
		select {
		case next <- g:
		case <-ctx.Done():
		}
	}
	close(next)
	wg.Wait()
	return ctx.Err()
}

// rng is a random source of its own for each purpose, so that the draws of
// one do not depend on how many another took.
func rng(seed int64, purpose string, index int) *rand.Rand {
	h := uint64(14695981039346656037)
	for _, c := range []byte(purpose) {
		h = (h ^ uint64(c)) * 1099511628211
	}
	return rand.New(rand.NewPCG(uint64(seed), h+uint64(index)))
}

// settle decides on the initial state and the drift with a chain of two lags,
// by AICc on the noise model, unless the options say. It leaves the single-lag
// plant and the noise shapes found with two lags as a start for all structures.
func (out *outcome) settle(s *study) error {
	o := out.opt
	ins := []initial{rest, earlier}
	if o.Initial != "auto" {
		in, err := parseInitial(o.Initial)
		if err != nil {
			return fmt.Errorf("%w: %w", ErrOption, err)
		}
		ins = []initial{in}
	}
	drifts := map[string][]bool{"none": {false}, "linear": {true}, "auto": {true, false}}[o.Drift]
	one, _ := ident.ParseStructure("fopdt")
	two, _ := ident.ParseStructure("chain2")
	bonus := driftBonus
	for _, r := range s.recs {
		if loopOf(r.run).State == "closed" {
			bonus = driftClosed
		}
	}
	best := math.Inf(1)
	var shapes []shape
	var weights []float64
	var plainest *fitted // the single lag under white noise
	for _, in := range ins {
		if in == earlier && out.one != nil && startsAtRest(s.recs, out.one.p.eta[0]) && !plainest.comesFromElsewhere() {
			break
		}
		for _, r := range s.recs {
			r.shape, r.weight = whiteShape, 1
		}
		s.set(in, drifts[0])
		plain := &study{recs: slices.Clone(s.recs), white: true, unscored: true, coarse: s.coarse, rival: math.Inf(1)}
		start := plain.fit(one, nil)
		s.coarse = plain.coarse
		plainest = start
		for _, dr := range drifts {
			s.set(in, dr)
			free := &study{recs: slices.Clone(s.recs), white: s.white, tau: start.p.eta[0], dead: start.p.eta[1], rival: math.Inf(1)}
			f := free.fit(two, start)
			if math.IsNaN(f.p.s) || math.IsInf(f.p.s, 0) || math.IsNaN(f.aicc) {
				return fmt.Errorf("%s: %w: the least squares did not come to an end", s.recs[0].run.Source.File, ErrNoAnswer)
			}
			score := f.aicc
			if in == earlier {
				score += earlierPenalty
			}
			if !dr {
				score += bonus
			}
			if score < best {
				best, out.initial, out.drift = score, in, dr
				out.one, out.two = start, f
				shapes, weights = f.shapes, f.weight
			}
		}
	}
	out.final = len(s.fix) == 0
	if !s.white {
		out.two.activate()
		for i, t := range out.two.tangents() {
			w := t.bestWalk(shapes[i])
			s.walks = append(s.walks, t.walkNodes(w))
			if w.dev < t.judge(shapes[i]).dev-walkBonus {
				shapes[i], out.final = w.shape, false
			}
		}
	}
	for i, r := range s.recs {
		r.shape, r.weight = shapes[i], weights[i]
	}
	s.set(out.initial, out.drift)
	s.tau, s.dead = out.one.p.eta[0], out.one.p.eta[1]
	s.rival = out.two.aicc
	return nil
}

const (
	// earlierPenalty is what an unknown earlier input must gain in AICc on top
	// of its parameter: on a log that starts at rest its column is close to
	// that of the bump, and taking it in for nothing widens the gain.
	earlierPenalty = 8
	// driftBonus keeps the drift where it is doubtful: leaving out a drift that
	// is there shifts the gain, keeping one that is not only widens it.
	driftBonus = 1.5
	// driftClosed is the same in closed loop, where it is the other way round: the
	// integral action answers slow noise with slow moves of the input, which a
	// drift in the model then explains too well (gain covered in 91 % with a
	// drift, in 95 % without, on closed-loop logs that do not drift).
	driftClosed = -4
)

// walkBonus is what a walk in the noise must gain in -2L to be in force, a
// factor of 20 in likelihood. The intervals weigh both in any case.
const walkBonus = 6

// set puts the linear columns of every record in place.
func (s *study) set(in initial, drift bool) {
	for _, r := range s.recs {
		r.model(in, drift)
	}
}

// choose selects the model and weighs all for the plausible plants.
//
// The selected model is the one with fewest parameters among those whose AICc
// lies within 2 of the least, ties by order (the usual reading of differences
// below 2: Burnham and Anderson 2002, from memory). An integrator is not
// selected while a chain is that near: its gain is another quantity.
func (out *outcome) choose() {
	low := math.Inf(1)
	for _, m := range out.models {
		low = math.Min(low, m.aicc)
	}
	best := -1
	for i, m := range out.models {
		if m.aicc > low+2 || m.st.Integrating() && out.chainWithin(low+2) {
			continue
		}
		if best < 0 || m.params < out.models[best].params ||
			(m.params == out.models[best].params && m.st.Order() < out.models[best].st.Order()) {
			best = i
		}
	}
	if best < 0 {
		best = 0
	}
	out.selected = best
	total := 0.0
	out.weights = make([]float64, len(out.models))
	for i, m := range out.models {
		if m.st.Integrating() != out.models[best].st.Integrating() {
			continue
		}
		w := math.Exp(-0.5 * (m.aicc - low))
		if m.irregular() && out.anyRegular() {
			continue // an excerpt would scatter its plants too widely
		}
		if w > 0.02 {
			out.weights[i] = w
			total += w
		}
	}
	for i := range out.weights {
		out.weights[i] /= total
	}
}

// chainWithin reports whether a chain has an AICc up to limit.
func (out *outcome) chainWithin(limit float64) bool {
	for _, m := range out.models {
		if !m.st.Integrating() && m.aicc <= limit {
			return true
		}
	}
	return false
}

// widen extends the selected model's interval of the gain over the intervals
// of every other chain that the log does not clearly reject (AICc within 4 of
// the least): which structure is right is not known either, and the steady gain
// means the same in all of them. It is open where one of them is.
func (out *outcome) widen() {
	sel := out.models[out.selected]
	if sel.st.Integrating() || sel.est[0].fixed {
		return
	}
	low := sel.aicc
	for _, m := range out.models {
		low = math.Min(low, m.aicc)
	}
	g := &sel.est[0]
	for _, m := range out.models {
		if m.irregular() {
			continue // its interval is that of an excerpt
		}
		if m == sel || m.st.Integrating() || m.aicc > low+alikeBy || m.est[0].value*g.value < 0 {
			continue
		}
		g.low = math.Min(g.low, m.est[0].low) // NaN, an open end, stays
		g.high = math.Max(g.high, m.est[0].high)
	}
}

// sample draws the plausible plants from every structure in proportion to its
// Akaike weight.
func (out *outcome) sample() {
	count := out.opt.Plants
	if count <= 0 {
		return
	}
	given := 0
	cumulative := 0.0
	for i, m := range out.models {
		if out.weights[i] == 0 {
			continue
		}
		cumulative += out.weights[i]
		n := int(math.Round(cumulative*float64(count))) - given
		if n <= 0 {
			continue
		}
		given += n
		for _, d := range m.sample(n, rng(out.opt.Rand, "plants", i)) {
			out.draws = append(out.draws, plausible{m.st, d})
		}
	}
	// Mixed, so that any part of the list is a fair sample of the whole.
	r := rng(out.opt.Rand, "order", 0)
	r.Shuffle(len(out.draws), func(i, j int) { out.draws[i], out.draws[j] = out.draws[j], out.draws[i] })
}
