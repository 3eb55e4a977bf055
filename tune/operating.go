package tune

import (
	"errors"
	"fmt"
	"math"
	"slices"

	"lagwright/fit"
	"lagwright/ident"
)

// ErrUnusable is wrapped by every error that says a card cannot be tuned on.
var ErrUnusable = errors.New("card cannot be used")

// operation is a card at its operating point: plants with the gain that holds
// there, and the point itself.
type operation struct {
	card        *fit.Card
	nominal     ident.Plant
	plants      []ident.Plant // plausible plants
	input       float64       // operating input, input units
	temperature float64       // about the temperature there
	slope       float64       // dphi/du at the operating input
}

// operate reads a card. Without an operating input it is the middle of the
// inputs the card was measured over; under the power law it is their upper end,
// where the gain is highest.
func operate(c *fit.Card, input *float64) (operation, error) {
	o := operation{card: c, slope: 1}
	nominal, err := c.Plant()
	if err != nil {
		return o, fmt.Errorf("%w: %w", ErrUnusable, err)
	}
	plants, err := c.PlausiblePlants()
	if err != nil {
		return o, fmt.Errorf("%w: %w", ErrUnusable, err)
	}
	if len(plants) == 0 {
		plants = []ident.Plant{nominal}
	}
	in, temp := c.Range.Input, c.Range.Temperature
	o.input = (in[0] + in[1]) / 2
	if c.Law() == ident.Power {
		o.input = math.Max(math.Abs(in[0]), math.Abs(in[1]))
	}
	if input != nil {
		o.input = *input
	}
	o.slope = c.Law().Slope(o.input)
	if c.Law() == ident.Power && !(o.input > 0) || !isFinite(o.slope) {
		return o, fmt.Errorf("%w: at an input of %g the power law has no gain that a controller could use: give an --operating-input above 0", ErrUnusable, o.input)
	}
	o.temperature = temperatureAt(c, nominal, o.input, in, temp)
	o.nominal = scaledGain(nominal, o.slope)
	for _, p := range plants {
		o.plants = append(o.plants, scaledGain(p, o.slope))
	}
	return o, nil
}

// temperatureAt is the temperature that goes with an input, by the recorded
// ranges and the plant's gain through their middle.
func temperatureAt(c *fit.Card, p ident.Plant, input float64, in, temp [2]float64) float64 {
	middle := (temp[0] + temp[1]) / 2
	if p.Structure.Integrating() {
		return middle
	}
	phi := c.Law().Apply
	return middle + p.Gain*(phi(input)-(phi(in[0])+phi(in[1]))/2)
}

// task makes a requirement ready to be judged about the operating point.
func (o operation) task(q Requirement) task {
	t := newTask(q, o.input, o.temperature)
	t.on(o.card.Law(), o.input)
	return t
}

// moved is the same card at another operating input, without its plants.
func (o operation) moved(input float64) operation {
	law, slope := o.card.Law(), o.card.Law().Slope(input)
	if !o.nominal.Structure.Integrating() {
		o.temperature += o.nominal.Gain / o.slope * (law.Apply(input) - law.Apply(o.input))
	}
	o.nominal = scaledGain(o.nominal, slope/o.slope)
	o.input, o.slope, o.plants = input, slope, nil
	return o
}

func scaledGain(p ident.Plant, by float64) ident.Plant {
	p.Gain *= by
	return p
}

// sameAction refuses cards whose gains have different signs: no controller
// serves both.
func sameAction(ops []operation) error {
	for _, o := range ops {
		if gain, open := signOpen(o.card); open {
			return fmt.Errorf("%w: the log of %s does not tell the sign of the gain (%s): gains for it could act the wrong way; make a larger bump in manual (lagwright plan)", ErrUnusable, label(o.card), gain)
		}
		for _, p := range append([]ident.Plant{o.nominal}, o.plants...) {
			if (p.Gain > 0) != (ops[0].nominal.Gain > 0) {
				return fmt.Errorf("%w: the gain's sign is not certain (%.3g and %.3g are both plausible): a better test is needed", ErrUnusable, ops[0].nominal.Gain, p.Gain)
			}
		}
		if o.card.Units != ops[0].card.Units {
			return fmt.Errorf("%w: cards in different units (%v and %v)", ErrUnusable, ops[0].card.Units, o.card.Units)
		}
	}
	return nil
}

// signOpen tells whether the interval of a card's gain reaches zero, or has no end
// on the side of zero, and writes the interval. The plausible plants alone do not
// show it: they may all lie on the side of the best fit.
func signOpen(c *fit.Card) (interval string, open bool) {
	m, ok := c.Model(c.Selected)
	if !ok {
		return "", false
	}
	k := slices.IndexFunc(m.Parameters, func(p fit.Parameter) bool { return p.Name == "gain" })
	if k < 0 {
		return "", false
	}
	p := m.Parameters[k]
	inner := p.Low // the end on the side of zero
	if p.Value < 0 {
		inner = p.High
	}
	bounded := p.Low != nil || p.High != nil || p.SE != nil // else nobody set any
	if p.Fixed || !bounded || inner != nil && *inner*p.Value > 0 {
		return "", false
	}
	switch {
	case p.Low == nil && p.High == nil:
		return quantity(p.Value, p.Unit, 3) + ", no bound", true
	case p.Low == nil:
		return quantity(p.Value, p.Unit, 3) + ", at most " + figure(p.High, 3), true
	case p.High == nil:
		return quantity(p.Value, p.Unit, 3) + ", at least " + figure(p.Low, 3), true
	}
	return figure(p.Low, 3) + " to " + quantity(*p.High, p.Unit, 3), true
}
