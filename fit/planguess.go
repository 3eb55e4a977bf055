package fit

import (
	"fmt"
	"math"

	"lagwright/ident"
)

// Guess is what someone expects of a heater that no log describes yet.
type Guess struct {
	Gain        float64 // temperature units per input unit
	Lag         float64 // s, one lag or the sum of several
	DeadTime    float64 // s
	Noise       float64 // standard deviation of the temperature at rest
	Temperature float64 // at rest at the input to bump from
	Units       CardUnits
}

// What a plan allows a guess to be wrong by. Common practice, no source.
const (
	guessSpread  = 1.5 // factor on the gain, either way
	guessedNoise = 0.1 // correlation time of the noise, in lags
)

// PlanFirst proposes the first bump of a heater from a guess. The options must
// say the input to bump from; the largest temperature allows for a gain half
// as large again as guessed.
func PlanFirst(g Guess, o PlanOptions) (*Plan, error) {
	if o.Input == nil {
		return nil, fmt.Errorf("%w: a plan from a guess needs the input to bump from", ErrOption)
	}
	for _, v := range []float64{g.Lag, g.Noise} {
		if !(v > 0) || math.IsInf(v, 0) {
			return nil, fmt.Errorf("%w: guessed lag %g s and noise %g must be above zero", ErrOption, g.Lag, g.Noise)
		}
	}
	st, err := ident.ParseStructure("fopdt")
	if err != nil {
		return nil, err
	}
	plant, err := ident.NewPlant(st, g.Gain, []float64{g.Lag}, g.DeadTime)
	if err != nil {
		return nil, fmt.Errorf("%w: %w", ErrOption, err)
	}
	noise := Noise{SD: g.Noise, CorrelationTime: guessedNoise * g.Lag}
	d := &design{card: g.card(*o.Input, noise), plant: plant, noise: noise, o: o, guessed: true}
	return d.plan()
}

// card is the guess as a card that was measured at one point.
func (g Guess) card(input float64, noise Noise) *Card {
	parameters := []Parameter{
		{Name: "gain", Value: g.Gain}, {Name: "lag1", Value: g.Lag}, {Name: "dead_time", Value: g.DeadTime},
		{Name: "baseline", Value: g.Temperature},
	}
	return &Card{
		Units: g.Units, InputLaw: ident.Linear.String(), Drift: "none", Confidence: 0.95,
		Range:    CardRange{Input: [2]float64{input, input}, Temperature: [2]float64{g.Temperature, g.Temperature}},
		Selected: "fopdt", Models: []Model{{Structure: "fopdt", Parameters: parameters, Noise: noise}},
		Plants: Plants{
			Structure: "fopdt", Parameters: []string{"gain", "lag1", "dead_time"},
			Values: [][]float64{{g.Gain / guessSpread, g.Lag, g.DeadTime}, {g.Gain * guessSpread, g.Lag, g.DeadTime}},
		},
	}
}
