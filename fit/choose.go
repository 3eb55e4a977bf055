package fit

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"

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
	var recs []*record
	for _, run := range runs {
		r, err := newRecord(run, law)
		if err != nil {
			return nil, err
		}
		recs = append(recs, r)
	}
	return recs, nil
}

// find fits the structures and chooses among them.
func find(ctx context.Context, recs []*record, o Options) (*outcome, error) {
	out := &outcome{opt: o, recs: recs}
	s := &study{recs: recs, white: o.Noise == "white", fix: o.Fix}
	if err := out.settle(s); err != nil {
		return nil, err
	}
	structures := o.structures()
	fits := map[string]*fitted{}
	get := func(name string) *fitted {
		if f, ok := fits[name]; ok {
			return f
		}
		st, _ := ident.ParseStructure(name)
		var shorter *fitted
		switch name {
		case "chain2":
			shorter = fits["fopdt"]
		case "chain3":
			shorter = fits["chain2"]
		case "chain4":
			shorter = fits["chain3"]
		}
		f := s.fit(st, shorter)
		fits[name] = f
		return f
	}
	if s.tau == 0 {
		get("fopdt")
	}
	level := o.Confidence
	for i, st := range structures {
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		for _, below := range map[string][]string{"chain3": {"chain2"}, "chain4": {"chain2", "chain3"}}[st.String()] {
			get(below)
		}
		f := get(st.String())
		if !(f.p.s > 0) && len(f.p.part) == 0 {
			return nil, fmt.Errorf("%w: the least squares of %s did not come to an end", ErrNoAnswer, st)
		}
		out.models = append(out.models, s.bound(f, level, rng(o.Rand, "bound", i)))
		if o.Progress != nil {
			o.Progress(i+1, len(structures))
		}
	}
	out.choose()
	return out, nil
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
// by AICc on the noise model, unless the options say.
func (out *outcome) settle(s *study) error {
	o := out.opt
	var ins []initial
	if o.Initial == "auto" {
		ins = []initial{rest, earlier}
	} else {
		in, err := parseInitial(o.Initial)
		if err != nil {
			return fmt.Errorf("%w: %w", ErrOption, err)
		}
		ins = []initial{in}
	}
	drifts := map[string][]bool{"none": {false}, "linear": {true}, "auto": {true, false}}[o.Drift]
	if len(ins) == 1 && len(drifts) == 1 {
		out.initial, out.drift = ins[0], drifts[0]
		s.set(out.initial, out.drift)
		return nil
	}
	one, _ := ident.ParseStructure("fopdt")
	two, _ := ident.ParseStructure("chain2")
	probe := &study{recs: s.recs, white: s.white}
	best := math.Inf(1)
	for _, in := range ins {
		for _, dr := range drifts {
			for _, r := range probe.recs {
				r.setShape(whiteShape)
				r.weight = 1
			}
			probe.set(in, dr)
			f := probe.fit(two, probe.fit(one, nil))
			score := f.aicc
			if in == earlier {
				score += earlierPenalty
			}
			if !dr {
				score += driftBonus
			}
			if score < best {
				best, out.initial, out.drift = score, in, dr
			}
		}
	}
	for _, r := range s.recs {
		r.setShape(whiteShape)
		r.weight = 1
	}
	s.set(out.initial, out.drift)
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
)

// set puts the linear columns of every record in place.
func (s *study) set(in initial, drift bool) {
	for _, r := range s.recs {
		r.model(in, drift)
	}
}

// choose selects the model and weighs all for the plausible plants.
//
// The selected model is the one with fewest parameters among those whose AICc
// lies within 2 of the least, ties by AICc (the usual reading of differences
// below 2: Burnham and Anderson 2002, from memory).
func (out *outcome) choose() {
	low := math.Inf(1)
	for _, m := range out.models {
		low = math.Min(low, m.aicc)
	}
	best := -1
	for i, m := range out.models {
		if m.aicc > low+2 {
			continue
		}
		if best < 0 || m.params < out.models[best].params ||
			(m.params == out.models[best].params && m.aicc < out.models[best].aicc) {
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
		if w > 0.02 {
			out.weights[i] = w
			total += w
		}
	}
	for i := range out.weights {
		out.weights[i] /= total
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
