package validate

import (
	"fmt"

	"lagwright/fit"
	"lagwright/ident"
)

// response is the plant's response time in s: dead time + sum of lags. An
// ipdt plant has no lags; three dead times stand for them (common practice,
// no source).
func response(p ident.Plant) float64 {
	if p.Structure.Integrating() {
		return 3 * p.DeadTime
	}
	sum := p.DeadTime
	for _, tau := range p.Elements() {
		sum += tau
	}
	return sum
}

// cardPlants returns the plant of the card's selected structure, its
// plausible plants and the noise left by its fit.
func cardPlants(card *fit.Card) (best ident.Plant, plausible []ident.Plant, noise fit.Noise, err error) {
	best, err = card.Plant()
	if err != nil {
		return best, nil, noise, fmt.Errorf("model card: %w", err)
	}
	plausible, err = card.PlausiblePlants()
	if err != nil {
		return best, nil, noise, fmt.Errorf("model card: %w", err)
	}
	if len(plausible) == 0 {
		plausible = []ident.Plant{best}
	}
	if m, ok := card.Model(card.Selected); ok {
		noise = m.Noise
	}
	return best, plausible, noise, nil
}
