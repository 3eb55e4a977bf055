package validate

import (
	"fmt"
	"math"

	"lagwright/fit"
	"lagwright/tune"
)

// Belongs tells whether a replay was made with this card and these gains; either
// may be nil. A page that shows other gains beside it would say of them what was
// found of the replayed ones.
func (r *Replay) Belongs(card *fit.Card, gains *tune.Gains) error {
	if card != nil && r.Card != "" {
		id, err := card.Fingerprint()
		if err != nil {
			return err
		}
		if id != r.Card {
			return fmt.Errorf("the replay was made with another card: replay the runs again with this one")
		}
	}
	if gains == nil {
		return nil
	}
	same, err := sameLaw(&r.Gains, gains)
	if err == nil && !same {
		err = fmt.Errorf("the replay was made with other gains: replay the runs again with these")
	}
	return err
}

// asShown is how far two numbers of one controller may lie apart, relatively: gains
// written out have the four digits that are shown.
const asShown = 1e-3

// sameLaw tells whether two sets of gains are the same controller, in whatever
// form each is written.
func sameLaw(a, b *tune.Gains) (bool, error) {
	var laws [2][]float64
	for i, g := range []*tune.Gains{a, b} {
		ideal, err := tune.Convert(g, tune.Ideal, tune.Spelling{})
		if err != nil {
			return false, fmt.Errorf("gains: %w", err)
		}
		laws[i] = []float64{ideal.Kc, orNone(ideal.Ti), orNone(ideal.Td), ideal.Filter, ideal.SetpointWeight, ideal.Bias, ideal.Scan}
	}
	for k, x := range laws[0] {
		if y := laws[1][k]; math.Abs(x-y) > asShown*max(math.Abs(x), math.Abs(y)) {
			return false, nil
		}
	}
	return true, nil
}

// orNone is −1 for a time that a controller lacks.
func orNone(x *float64) float64 {
	if x == nil {
		return -1
	}
	return *x
}
