package fit

import (
	"errors"
	"fmt"
	"io"
	"math"
	"strings"

	"lagwright/ident"
)

// PlanSchema is the schema of a plan.
const PlanSchema = "lagwright/plan/1"

// PlanOptions says what the next bump is for and what it must not do. The zero
// value asks for the bounds that make a verdict good.
type PlanOptions struct {
	Gain, Lags, DeadTime float64  // wanted half-width of each interval, as a share: of the gain, the sum of lags, and dead time and lags together; 0 means 0.10, 0.10, 0.05
	Input                *float64 // input to bump from; nil means the middle of the card's range
	InputMin, InputMax   *float64 // limits of the input; nil means none but zero on the side of the range
	TempMax              *float64 // highest temperature allowed; nil means none
	Sampling             float64  // s, the logger's fastest interval; 0 means any
	Tool                 string   // written into the plan
}

// Plan is a proposed bump test: from From to To and back, both held.
type Plan struct {
	Schema string    `json:"schema"`
	Tool   string    `json:"tool"`
	Units  CardUnits `json:"units"`

	From     float64 `json:"from"` // input before and after
	To       float64 `json:"to"`
	Size     float64 `json:"size"`
	Before   float64 `json:"before_s"` // hold before the bump
	Hold     float64 `json:"hold_s"`   // hold of the bump
	Back     float64 `json:"back_s"`   // hold after the step back
	Sampling float64 `json:"sampling_s"`
	Duration float64 `json:"duration_s"`
	Repeats  int     `json:"repeats"` // how often the whole test is made

	Expected []PlannedBound `json:"expected"`
	Meets    bool           `json:"meets"`               // every bound is expected to be as wanted
	Reasons  []string       `json:"reasons"`             // what limits the plan
	Highest  *float64       `json:"highest_temperature"` // with the largest plausible gain; null for a plant that never rests
	Caution  []string       `json:"cautions"`
}

// PlannedBound is the half-width that a plan is expected to give, in percent.
type PlannedBound struct {
	Parameter string  `json:"parameter"`
	Wanted    float64 `json:"wanted_percent"`
	Expected  float64 `json:"expected_percent"`
}

// What a plan may ask for. Common practice, no source.
const (
	holdLags   = 5.0 // residence times that a bump is held, so that its plateau shows
	beforeLags = 2.0 // and the input before it
	mostRepeat = 6
	rowsPerLag = 12.0 // of the shortest lag that matters
	leastRise  = 10.0 // of a bump, in standard deviations of the noise
	leastShare = 0.1  // of a bump, of the range the card's log was driven over
	planMargin = 1.25 // on the expected bounds: the plan rests on one card's noise
)

// PlanBump proposes the next bump from what a card knows of plant and noise:
// the smallest step whose answer is expected, by its Fisher information
// under the card's noise, to give the wanted bounds.
func PlanBump(c *Card, o PlanOptions) (*Plan, error) {
	plant, err := c.Plant()
	if err != nil {
		return nil, err
	}
	if plant.Structure.Integrating() {
		return nil, fmt.Errorf("card: selected structure ipdt never rests: %w", errNoPlan)
	}
	m, _ := c.Model(c.Selected)
	d := &design{card: c, plant: plant, noise: m.Noise, o: o}
	return d.plan()
}

var errNoPlan = errors.New("fit a log that shows a plateau, and plan from that card")

// design is a plan in the making.
type design struct {
	card  *Card
	plant ident.Plant
	noise Noise
	o     PlanOptions

	guessed bool // nothing was measured: see PlanFirst
}

func (d *design) residence() float64 { return d.plant.DeadTime + total(d.plant.Elements()) }

// wants are the half-widths asked for, absolute, and as shares of what.
func (d *design) wants() []PlannedBound {
	share := func(v float64, name string) float64 {
		if v > 0 {
			return 100 * v
		}
		return 100 * wanted[name][0]
	}
	return []PlannedBound{
		{Parameter: "gain", Wanted: share(d.o.Gain, "gain")},
		{Parameter: "lags", Wanted: share(d.o.Lags, "lags")},
		{Parameter: "dead_time", Wanted: share(d.o.DeadTime, "dead_time")},
	}
}

func (d *design) plan() (*Plan, error) {
	law := d.card.Law()
	p := &Plan{
		Schema: PlanSchema, Tool: d.o.Tool, Units: d.card.Units, Reasons: []string{}, Repeats: 1, Meets: true,
		Before: roundUp(beforeLags * d.residence()), Hold: roundUp(holdLags * d.residence()), Sampling: d.sampling(),
	}
	p.Back = p.Hold
	p.From = (d.card.Range.Input[0] + d.card.Range.Input[1]) / 2
	if d.o.Input != nil {
		p.From = *d.o.Input
	}
	if err := d.within(p.From); err != nil {
		return nil, err
	}
	heat := d.neededHeat(p)
	p.To = d.inputOf(p.From, heat)
	if limit, why := d.limit(p.From); math.Abs(p.To-p.From) > math.Abs(limit-p.From) || math.IsNaN(p.To) {
		p.To = limit
		p.Reasons = append(p.Reasons, why)
	}
	p.Size = p.To - p.From
	if p.Size == 0 {
		return nil, fmt.Errorf("no bump from %s is possible: %s, which may be reached without one; bump from a lower input", quantity(p.From, d.card.Units.Input, 4), p.Reasons[0])
	}
	// What size alone cannot give, repeats may.
	reached := law.Apply(p.To) - law.Apply(p.From)
	if short := math.Abs(heat / reached); short > 1 {
		p.Repeats = min(int(math.Ceil(short*short-1e-9)), mostRepeat)
	}
	d.expect(p, math.Abs(reached))
	p.Duration = p.Before + p.Hold + p.Back
	d.warn(p, reached)
	return p, nil
}

// within refuses to bump from outside the limits of the input.
func (d *design) within(from float64) error {
	low, high := d.o.InputMin, d.o.InputMax
	unit := d.card.Units.Input
	switch {
	case high != nil && from >= *high:
		return fmt.Errorf("%w: a bump from %s leaves no room below the highest input allowed, %s; give an input to bump from below it", ErrOption, quantity(from, unit, 4), quantity(*high, unit, 4))
	case low != nil && from < *low:
		return fmt.Errorf("%w: a bump from %s begins below the lowest input allowed, %s; give an input to bump from above it", ErrOption, quantity(from, unit, 4), quantity(*low, unit, 4))
	}
	return nil
}

// sampling is the interval between rows: a dozen in the shortest lag that
// matters, no faster than the logger.
func (d *design) sampling() float64 {
	shortest := d.residence()
	for _, tau := range d.plant.Elements() {
		if tau > 0.1*d.residence() {
			shortest = math.Min(shortest, tau)
		}
	}
	every := shortest / rowsPerLag
	return math.Max(roundDown(every), d.o.Sampling)
}

// precision is what the plan's test tells per unit step of the heat.
func (d *design) precision(p *Plan) precision {
	end := p.Before + p.Hold + p.Back
	every := math.Max(p.Sampling, end/(4*experimentRows))
	e := experiment{
		in:    ident.Input{At: []float64{p.Before, p.Before + p.Hold}, Value: []float64{1, 0}},
		drift: d.card.Drift == "linear",
	}
	for k := 0; float64(k)*every <= end; k++ {
		e.t = append(e.t, float64(k)*every)
	}
	return e.precision(d.plant, d.noise, nil)
}

// whole is what the share of a bound is of.
func (d *design) whole(name string) float64 {
	switch name {
	case "gain":
		return math.Abs(d.plant.Gain)
	case "lags":
		return total(d.plant.Elements())
	}
	return d.residence()
}

// halfWidth is the expected half-width, in percent, of a test with a step of
// the heat of this size, made so many times.
func (d *design) halfWidth(name string, unit precision, heat float64, repeats int) float64 {
	z := normalQuantile((1 + d.card.Confidence) / 2)
	return 100 * planMargin * z * unit.of(name) / (heat * math.Sqrt(float64(repeats)) * d.whole(name))
}

// neededHeat is the step of phi(u) that gives every wanted bound at once; it is
// positive, a step up. Its rise stands well out of the noise, and it is no
// smaller than a share of what the card's log was driven by.
func (d *design) neededHeat(p *Plan) float64 {
	unit := d.precision(p)
	law, in := d.card.Law(), d.card.Range.Input
	heat := math.Max(leastRise*d.noise.SD/math.Abs(d.plant.Gain), leastShare*(law.Apply(in[1])-law.Apply(in[0])))
	for _, w := range d.wants() {
		heat = math.Max(heat, d.halfWidth(w.Parameter, unit, 1, 1)/w.Wanted)
	}
	return heat
}

// inputOf is the input, rounded up to two digits of its step, at which the heat
// is larger by so much than at from.
func (d *design) inputOf(from, heat float64) float64 {
	law := d.card.Law()
	to := from + heat
	if law == ident.Power {
		to = math.Sqrt(from*from + heat)
	}
	return math.Round((from+roundUp(to-from))*1e9) / 1e9 // without the last bits of the sum
}

// limit is the highest input allowed, and why.
func (d *design) limit(from float64) (float64, string) {
	limit, why := math.Inf(1), "" // no limit
	if d.o.InputMax != nil {
		limit, why = *d.o.InputMax, fmt.Sprintf("the input may go to %s", quantity(*d.o.InputMax, d.card.Units.Input, 4))
	}
	if d.o.TempMax == nil || d.plant.Gain < 0 {
		return limit, why
	}
	law := d.card.Law()
	room := (*d.o.TempMax - d.rest(from)) / d.largestGain()
	u := from + room
	if law == ident.Power {
		u = math.Sqrt(math.Max(from*from+room, 0))
	}
	if room <= 0 {
		u = from
	}
	u = from + roundDown(u-from) // never above the temperature allowed
	if u < limit {
		limit, why = u, fmt.Sprintf("the temperature may go to %s", quantity(*d.o.TempMax, d.card.Units.Temperature, 4))
	}
	return limit, why
}

// rest is the highest temperature at which the plant may rest at an input. The
// baseline of a log belongs to its first input, which lies in the card's range;
// of that range the end is taken that makes the answer hotter.
func (d *design) rest(u float64) float64 {
	law := d.card.Law()
	first, gain := d.card.Range.Input[0], d.largestGain()
	if d.plant.Gain < 0 {
		first, gain = d.card.Range.Input[1], -gain
	}
	rise := gain * (law.Apply(u) - law.Apply(first))
	if rise < 0 {
		rise *= d.smallestGain() / d.largestGain()
	}
	base := math.Inf(-1)
	m, _ := d.card.Model(d.card.Selected)
	for _, q := range m.Parameters {
		if strings.HasPrefix(q.Name, "baseline") {
			base = math.Max(base, q.Value)
		}
	}
	if math.IsInf(base, -1) {
		base = d.card.Range.Temperature[1]
	}
	return base + rise
}

func (d *design) largestGain() float64  { return d.gainEnd(math.Max) }
func (d *design) smallestGain() float64 { return d.gainEnd(math.Min) }

// gainEnd is the extreme of the size of the gain over the plausible plants.
func (d *design) gainEnd(of func(a, b float64) float64) float64 {
	g := math.Abs(d.plant.Gain)
	plants, err := d.card.PlausiblePlants()
	if err != nil {
		return g
	}
	for _, p := range plants {
		g = of(g, math.Abs(p.Gain))
	}
	return g
}

// expectedTo is a bound that a plan is expected to give, in percent.
func expectedTo(percent float64) string {
	if percent > 100 {
		return "over ±100 %"
	}
	return plusMinus(percent)
}

// expect fills the bounds that the plan is expected to give.
func (d *design) expect(p *Plan, heat float64) {
	unit := d.precision(p)
	for _, w := range d.wants() {
		w.Expected = d.halfWidth(w.Parameter, unit, heat, p.Repeats)
		if w.Expected > w.Wanted*(1+1e-9) {
			p.Meets = false
			p.Reasons = append(p.Reasons, fmt.Sprintf("%s is expected to %s only, wanted %s", parameterWords(w.Parameter), expectedTo(w.Expected), plusMinus(w.Wanted)))
		}
		p.Expected = append(p.Expected, w)
	}
}

// warn fills the highest temperature and the cautions.
func (d *design) warn(p *Plan, heat float64) {
	highest := d.rest(p.From)
	if d.plant.Gain > 0 {
		highest += d.largestGain() * heat
	}
	p.Highest = &highest
	by := "by every plausible plant of the card"
	if d.guessed {
		by = "if the gain is up to half as large again as guessed"
	}
	p.Caution = []string{
		fmt.Sprintf("This bump would bring the outlet to about %s at most, %s. Check that this lies well below the limits of heater, duct and product before you begin.", quantity(highest, d.card.Units.Temperature, 3), by),
		CautionCutOut,
		CautionSheath,
		"Begin from a steady state, at the airflow the loop will run at.",
		CautionStay,
		CautionCodes,
	}
	if d.guessed {
		p.Caution = append(p.Caution, "This plan rests on a guess: watch the first minutes, and plan the next bump from the card of this one.")
		return
	}
	if p.To > d.card.Range.Input[1] || highest > d.card.Range.Temperature[1] {
		p.Caution = append(p.Caution, fmt.Sprintf("It leaves the range the card was measured in (input %s to %s, up to %s): go there in smaller steps first.",
			figure(d.card.Range.Input[0], 4), quantity(d.card.Range.Input[1], d.card.Units.Input, 4), quantity(d.card.Range.Temperature[1], d.card.Units.Temperature, 4)))
	}
}

// WriteJSON writes the plan as indented JSON.
func (p *Plan) WriteJSON(w io.Writer) error { return writeJSON(w, p) }

// WriteText writes the plan for a terminal, at most 80 columns wide.
func (p *Plan) WriteText(w io.Writer) error {
	out := &page{}
	out.heading("Next bump")
	in := p.Units.Input
	out.table("  ", [][]string{
		{"hold", quantity(p.From, in, 4), "for " + duration(p.Before)},
		{"step to", quantity(p.To, in, 4), "hold for " + duration(p.Hold)},
		{"step back to", quantity(p.From, in, 4), "hold for " + duration(p.Back)},
	})
	text := fmt.Sprintf("Log every %s or faster. It takes %s.", duration(p.Sampling), duration(p.Duration))
	if p.Repeats > 1 {
		text += fmt.Sprintf(" Make it %d times, %s in all, and fit the logs together.", p.Repeats, duration(p.Duration*float64(p.Repeats)))
	}
	out.paragraph("  ", text)
	out.heading("What it is expected to give")
	rows := [][]string{{"", "expected", "wanted"}}
	for _, e := range p.Expected {
		rows = append(rows, []string{parameterWords(e.Parameter), expectedTo(e.Expected), plusMinus(e.Wanted)})
	}
	out.table("  ", rows, 1, 2)
	for _, r := range p.Reasons {
		out.paragraph("  - ", sentence(printable(r)))
	}
	out.heading("Cautions")
	for _, c := range p.Caution {
		out.paragraph("  - ", printable(c))
	}
	return out.writeTo(w)
}
