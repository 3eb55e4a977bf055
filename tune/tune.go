package tune

import (
	"cmp"
	"context"
	"fmt"
	"math"
	"runtime"
	"slices"
	"strings"

	"lagwright/data"
	"lagwright/fit"
	"lagwright/ident"
)

// Options steers [Tune]. The zero value takes the better of PI and PID.
type Options struct {
	Controller string   // "p", "pi" or "pid"; "" takes the better of PI and PID, and lists P beside them
	Rule       string   // a published rule (see Rules) in place of the synthesis
	TauC       float64  // closed-loop time constant for the rule, s; 0 means its usual choice
	Assurance  float64  // share of the plausible plants on which the requirement must hold; 0 means 0.95
	Rand       int64    // seed; nothing here is drawn at random today
	Workers    int      // 0 means one per core; no effect on the result
	Operating  *float64 // operating input; nil: see operate in operating.go
	Tool       string   // written into the gains

	InputSpan, TempSpan *data.Span // where both are given, the entries are in percent of span
	Band, Rate, Minutes bool       // spelling of the entries, see Spelling

	// ScheduleFactor is the load IAE that one set for several cards may cost
	// against a set of each card's own before a schedule is proposed; 0 means 1.5.
	ScheduleFactor float64
}

// The figures a result is judged by.
const (
	rulesJudged  = 100         // plausible plants a row of the table is judged on where it is not the recommended one
	synthesised  = "synthesis" // the name of the default in place of a rule's
	usualMs      = 1.6         // when nothing is required
	usualShare   = 0.95
	derivativeBy = 0.7  // PID is preferred where it brings the load IAE below this part of PI's …
	noiseAllowed = 0.02 // … and sends less noise to the drive than this part of the input's range
)

// tuning is one call of Tune under way.
type tuning struct {
	requirement Requirement
	options     Options
	ops         []operation
	workers     int
	plausible   *ensemble
}

// Tune finds gains for one or several cards (several: one set safe for all).
// A result whose Meets is false is the nearest there is, with the reasons;
// an error wraps [ErrUnusable] or says what in the options is wrong. The
// same input and seed give the same result with any number of workers.
func Tune(ctx context.Context, cards []*fit.Card, q Requirement, o Options) (*Gains, error) {
	t, err := newTuning(cards, q, o)
	if err != nil {
		return nil, err
	}
	var rows []row
	if o.Rule != "" {
		rows, err = t.ruleRows(o.Rule, o.Controller)
	} else {
		rows, err = t.designRows(ctx)
	}
	if err != nil {
		return nil, err
	}
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	best := t.choose(rows)
	g, err := t.gains(ctx, rows[best])
	if err != nil {
		return nil, err
	}
	if o.Rule == "" {
		for _, r := range Rules() {
			more, err := t.ruleRows(r.Name, "")
			if err == nil {
				rows = append(rows, more...)
			}
		}
	}
	for i := range rows {
		g.Candidates = append(g.Candidates, t.candidate(rows[i], i == best))
	}
	if words := g.betterRule(); words != "" {
		g.Cautions = append([]string{words}, g.Cautions...)
	}
	if o.Rule == "" && len(cards) > 1 {
		t.schedule(ctx, g)
	}
	t.powerLaw(g)
	t.poleRegion(g)
	for _, c := range cards {
		id, err := c.Fingerprint()
		if err != nil {
			return nil, err
		}
		if !slices.Contains(g.Cards, id) {
			g.Cards = append(g.Cards, id)
		}
	}
	return g, ctx.Err()
}

func newTuning(cards []*fit.Card, q Requirement, o Options) (*tuning, error) {
	if len(cards) == 0 {
		return nil, fmt.Errorf("%w: no card given", ErrUnusable)
	}
	if o.Controller != "" && !slices.Contains(all, o.Controller) {
		return nil, fmt.Errorf("controller %q: use p, pi or pid", o.Controller)
	}
	if o.Assurance == 0 {
		o.Assurance = usualShare
	}
	if !(o.Assurance > 0 && o.Assurance <= 1) {
		return nil, fmt.Errorf("assurance %g: give a share above 0 and up to 1", o.Assurance)
	}
	if o.Workers <= 0 {
		o.Workers = runtime.GOMAXPROCS(0)
	}
	t := &tuning{options: o, workers: o.Workers}
	for _, c := range cards {
		op, err := operate(c, o.Operating)
		if err != nil {
			return nil, err
		}
		t.ops = append(t.ops, op)
	}
	if err := sameAction(t.ops); err != nil {
		return nil, err
	}
	var err error
	if t.requirement, err = complete(q, t.ops[0]); err != nil {
		return nil, err
	}
	return t, t.prepare()
}

// prepare makes the plausible plants ready to be tried.
func (t *tuning) prepare() error {
	var list []*scenario
	for card, op := range t.ops {
		if err := op.admits(t.requirement); err != nil {
			return err
		}
		task := op.task(t.requirement)
		for _, p := range op.plants {
			list = append(list, newScenario(p, &task, card))
		}
	}
	t.plausible = newEnsemble(list, t.workers)
	return nil
}

// complete checks a requirement and fills in what it leaves open.
func complete(q Requirement, o operation) (Requirement, error) {
	positive := func(name string, v *float64, zero bool) error {
		if v != nil && (!isFinite(*v) || *v < 0 || *v == 0 && !zero) {
			return fmt.Errorf("%s is %g: give a positive number", name, *v)
		}
		return nil
	}
	for _, err := range []error{
		positive("settling time", q.Settling, false), positive("overshoot", q.Overshoot, true),
		positive("damping ratio", q.Damping, false), positive("input rate", q.InputRate, false),
	} {
		if err != nil {
			return q, err
		}
	}
	switch {
	case q.Ms != nil && !(*q.Ms > 1):
		return q, fmt.Errorf("ms is %g: the sensitivity peak is never below 1", *q.Ms)
	case q.Damping != nil && *q.Damping >= 1:
		return q, fmt.Errorf("damping ratio is %g: give one below 1", *q.Damping)
	case !(q.Band >= 0 && q.Band < 1):
		return q, fmt.Errorf("band is %g: give a fraction below 1", q.Band)
	case !(q.Scan >= 0) || math.IsInf(q.Scan, 1):
		return q, fmt.Errorf("scan time is %g s: give 0 or more", q.Scan)
	case q.InputMin != nil && q.InputMax != nil && !(*q.InputMin < *q.InputMax):
		return q, fmt.Errorf("input limits %g and %g: the first must be the smaller", *q.InputMin, *q.InputMax)
	case q.SetpointStep != nil && (*q.SetpointStep == 0 || !isFinite(*q.SetpointStep)):
		return q, fmt.Errorf("setpoint step is %g: give a step other than 0", *q.SetpointStep)
	}
	if q.Band == 0 {
		q.Band = 0.02
	}
	if q.Settling == nil && q.Overshoot == nil && q.Damping == nil && q.Ms == nil {
		q.Ms = finite(usualMs)
	}
	if q.SetpointStep == nil {
		step := (o.card.Range.Temperature[1] - o.card.Range.Temperature[0]) / 4
		if !(step > 0) || !isFinite(step) {
			step = 10
		}
		q.SetpointStep = &step
	}
	return q, nil
}

// A row is one set of gains of the table.
type row struct {
	rule, kind string
	law        law
	form       string // in which the rule publishes it
	note       string
	nominal    *Metrics
	worst      *Metrics
	worstOver  float64   // see Gains.WorstOver
	on         *ensemble // the plants it is judged on
	out        []outcome // on each of them, not chosen on it
	share      float64
	designed   design
}

// designRows synthesises the controllers asked for.
func (t *tuning) designRows(ctx context.Context) ([]row, error) {
	kinds := all
	if t.options.Controller != "" {
		kinds = []string{t.options.Controller}
	}
	var rows []row
	for _, kind := range kinds {
		r, err := t.designRow(ctx, kind)
		if err != nil {
			return nil, err
		}
		rows = append(rows, t.judged(r))
	}
	return rows, nil
}

// designRow synthesises a controller of one kind.
func (t *tuning) designRow(ctx context.Context, kind string) (row, error) {
	s := newSearch(ctx, t.plausible, t.ops[0].nominal, t.options.Assurance)
	d := s.design(kind)
	if err := ctx.Err(); err != nil {
		return row{}, err
	}
	r := row{rule: synthesised, kind: kind, law: d.law, form: Ideal, designed: d, on: t.plausible}
	r.out = crossFitted(ctx, t.plausible, d, t.options.Assurance)
	r.share = r.on.share(r.out)
	if !d.found {
		r.note = "nearest miss"
	}
	return r, nil
}

// ruleRows applies a published rule to the best fit of the first card; kind
// "" takes all its controllers.
func (t *tuning) ruleRows(name, kind string) ([]row, error) {
	kinds := noP
	if kind != "" {
		kinds = []string{kind}
	}
	var rows []row
	var first error
	for _, k := range kinds {
		g, note, err := ApplyRule(name, k, t.ops[0].nominal, RuleOptions{TauC: t.options.TauC})
		if err != nil {
			if first == nil {
				first = err
			}
			continue
		}
		c, err := g.law()
		if err != nil {
			continue
		}
		c.tf = filterShare * c.td
		on := t.plausible
		if t.options.Rule == "" {
			on = t.plausible.thinned(rulesJudged)
		}
		r := row{rule: name, kind: k, law: c, form: g.Form, note: note, designed: design{law: c, found: true}, on: on, out: on.outcomes(c, searchStep)}
		r.share = on.share(r.out)
		rows = append(rows, t.judged(r))
		if t.options.Rule != "" {
			break // the first controller the rule has
		}
	}
	if len(rows) == 0 {
		return nil, first
	}
	return rows, nil
}

// judged completes a row: its gains on the best fit, and the figures over the
// plausible plants from its outcomes.
func (t *tuning) judged(r row) row {
	o := t.ops[0]
	task := o.task(t.requirement)
	r.nominal = task.metrics(newScenario(o.nominal, &task, 0), r.law, o.input)
	inputs := make([]float64, len(t.ops))
	for i, o := range t.ops {
		inputs[i] = o.input
	}
	on, out, share := r.on, r.out, t.options.Assurance
	if t.meets(r) && r.share < share-1e-9 {
		on, out = on.meeting(out)
		share, r.worstOver = 1, r.share
	}
	r.worst = on.worst(r.law, out, share, inputs)
	return r
}

// meets tells whether a row's share reaches the assurance. A design holds on
// that share of the plants it was chosen on (see toHold); that it holds as well
// on others is a count that scatters about the share by its sampling error, and
// may stay short of it by twice that much. A published rule was not chosen on
// any: its count stands as it is.
func (t *tuning) meets(r row) bool {
	short := t.options.Assurance - r.share
	if r.rule != synthesised {
		return short <= 1e-9
	}
	return r.designed.found && short <= 2*t.shareError(r)
}

// shareError is the sampling error of a row's share where the assurance is
// right: one standard deviation on the card with the fewest plants.
func (t *tuning) shareError(r row) float64 {
	return samplingError(t.options.Assurance, slices.Min(r.on.counts()))
}

// samplingError is the standard deviation of a share counted on n plants.
func samplingError(share float64, n int) float64 {
	return math.Sqrt(share * (1 - share) / float64(n))
}

// units are those of the cards.
func (t *tuning) units() GainUnits {
	u := t.ops[0].card.Units
	return GainUnits{Input: u.Input, Temperature: u.Temperature}
}

// choose returns the row to recommend: PI where it meets the requirement,
// PID where only it does or where it rejects loads much better at little
// noise; where neither meets it, the one that is nearest. P leaves an offset
// that no requirement asks about, so it is no answer unless it was asked for.
func (t *tuning) choose(rows []row) int {
	index := func(kind string) int {
		return slices.IndexFunc(rows, func(r row) bool { return r.kind == kind && t.meets(r) })
	}
	pi, pid := index("pi"), index("pid")
	switch {
	case pi >= 0 && pid >= 0:
		cost := t.inputNoise(rows[pid].law)
		in := t.ops[0].card.Range.Input
		if rows[pid].designed.iae < derivativeBy*rows[pi].designed.iae && cost < noiseAllowed*(in[1]-in[0]) {
			return pid
		}
		return pi
	case pi >= 0:
		return pi
	case pid >= 0:
		return pid
	}
	nearest := 0
	for i, r := range rows {
		best := rows[nearest]
		if cmp.Or(t.answers(r)-t.answers(best), cmp.Compare(r.share, best.share), cmp.Compare(best.designed.miss, r.designed.miss)) > 0 {
			nearest = i
		}
	}
	return nearest
}

// answers is 1 for a controller that was asked for, or that leaves no offset
// where none was.
func (t *tuning) answers(r row) int {
	if r.law.integral() || t.options.Controller == r.kind {
		return 1
	}
	return 0
}

// inputNoise is the standard deviation, in input units, that the noise of the
// measurement makes at the output: the card's correlated part as a first-order
// process of its correlation time Tc, its white part as one of half the logging
// interval, both through Kc·(1 + Td·s)/(Tf·s + 1). With a = Td/Tf, b = 1 − a
// the variance is multiplied by Kc²·(a² + (2ab + b²)·Tc/(Tc+Tf)).
func (t *tuning) inputNoise(c law) float64 {
	card := t.ops[0].card
	m, ok := card.Model(card.Selected)
	if !ok {
		return 0
	}
	interval := 1.0
	for _, s := range card.Source {
		if s.Rows > 1 {
			interval = (s.ToS - s.FromS) / float64(s.Rows-1)
		}
	}
	through := func(variance, tc float64) float64 {
		if c.tf == 0 || tc+c.tf == 0 {
			return variance
		}
		a := c.td / c.tf
		b := 1 - a
		return variance * (a*a + (2*a*b+b*b)*tc/(tc+c.tf))
	}
	white := m.Noise.WhiteSD * m.Noise.WhiteSD
	rest := max(0, m.Noise.SD*m.Noise.SD-white)
	return math.Abs(c.kc) * math.Sqrt(through(rest, m.Noise.CorrelationTime)+through(white, interval/2))
}

// candidate is the table's row.
func (t *tuning) candidate(r row, selected bool) Candidate {
	c := Candidate{Rule: r.rule, Controller: r.kind, Kc: r.law.kc, Filter: r.law.tf, Form: Ideal, Nominal: r.nominal, Worst: r.worst, WorstOver: r.worstOver,
		Share: r.share, Meets: t.meets(r), Selected: selected, Note: r.note, InputNoise: t.inputNoise(r.law), SetpointWeight: finite(r.law.b)}
	if !c.Meets {
		words, _ := r.binding()
		c.Missed = strings.TrimPrefix(words, "the ")
	}
	if r.law.integral() {
		c.Ti = finite(r.law.ti)
	}
	if r.kind == "pid" {
		c.Td = finite(r.law.td)
	}
	return c
}

// gains writes the recommended row down.
func (t *tuning) gains(ctx context.Context, r row) (*Gains, error) {
	o := t.ops[0]
	g := newGains(r.law, r.kind)
	g.Tool, g.Rule, g.Requirement = t.options.Tool, r.rule, t.requirement
	g.Scan = t.requirement.Scan
	g.Limits = Limits{Min: t.requirement.InputMin, Max: t.requirement.InputMax, Rate: t.requirement.InputRate}
	g.Units = t.units()
	if !r.law.integral() {
		g.Bias = o.input
	}
	g.Nominal, g.Worst, g.WorstOver, g.Assurance = r.nominal, r.worst, r.worstOver, t.options.Assurance
	g.Meets, g.ShareMeeting, g.ShareError = t.meets(r), r.share, t.shareError(r)
	g.SmallStep = t.plausible.scenarios[0].task.smallToo()
	g.OperatingInput = finite(o.input)
	g.Reasons = []string{}
	if !g.Meets {
		g.Reasons, g.Cures = t.reasons(r), t.cures(ctx, r.kind)
	}
	form := r.form
	out, err := Convert(g, form, Spelling{Band: t.options.Band, Rate: t.options.Rate, Minutes: t.options.Minutes, InputSpan: t.options.InputSpan, TempSpan: t.options.TempSpan})
	if err != nil {
		return nil, err
	}
	out.Cautions = t.cautions(out)
	return out, nil
}

// poleRegion adds, where P control is in question and settling or damping is
// asked, the gains that put the poles where they ask for.
func (t *tuning) poleRegion(g *Gains) {
	q := t.requirement
	if q.Settling == nil && q.Damping == nil || t.options.Rule != "" || t.options.Controller != "" && t.options.Controller != "p" {
		return
	}
	r := PoleRegion{Band: q.Band}
	if q.Settling != nil {
		r.Settling = *q.Settling
	}
	if q.Damping != nil {
		r.Damping = *q.Damping
	}
	of := func(o operation) *RegionDesign {
		plants := make([]ident.Plant, len(o.plants))
		for i, p := range o.plants {
			plants[i] = held(p, q.Scan)
		}
		return DesignPoleRegion(held(o.nominal, q.Scan), plants, r, t.options.Assurance)
	}
	d := of(t.ops[0])
	for _, o := range t.ops[1:] {
		other := of(o)
		d.Plausible = inBoth(d.Plausible, other.Plausible)
		d.BestShare = min(d.BestShare, other.BestShare)
	}
	g.PoleRegion = d
}

// held is a plant with half a scan of dead time more, see newOpenLoop.
func held(p ident.Plant, scan float64) ident.Plant {
	p.DeadTime += scan / 2
	return p
}
