package fit

import (
	"errors"
	"fmt"

	"lagwright/ident"
)

// Model returns the figures of a structure in the card.
func (c *Card) Model(structure string) (*Model, bool) {
	for i := range c.Models {
		if c.Models[i].Structure == structure {
			return &c.Models[i], true
		}
	}
	return nil, false
}

// Law is the input law of the card; linear when the card does not say.
func (c *Card) Law() ident.Law {
	l, err := ident.ParseLaw(c.InputLaw)
	if err != nil {
		return ident.Linear
	}
	return l
}

// Plant returns the best fit of the selected structure.
func (c *Card) Plant() (ident.Plant, error) {
	m, ok := c.Model(c.Selected)
	if !ok {
		return ident.Plant{}, fmt.Errorf("card: selected structure %q is not among its models", c.Selected)
	}
	return m.Plant()
}

// Plant returns the fitted plant of the model.
func (m *Model) Plant() (ident.Plant, error) {
	st, err := ident.ParseStructure(m.Structure)
	if err != nil {
		return ident.Plant{}, fmt.Errorf("card: %w", err)
	}
	lags := make([]float64, st.NumLags())
	var gain, dead float64
	seen := 0
	for _, p := range m.Parameters {
		switch i := lagIndex(p.Name); {
		case p.Name == "gain":
			gain = p.Value
			seen++
		case p.Name == "dead_time":
			dead = p.Value
			seen++
		case i >= 0 && i < len(lags):
			lags[i] = p.Value
			seen++
		}
	}
	if seen != len(lags)+2 {
		return ident.Plant{}, fmt.Errorf("card: model %s lacks some of gain, its lags and dead_time", m.Structure)
	}
	return ident.NewPlant(st, gain, lags, dead)
}

// PlausiblePlants returns the plausible plants of the card, in its order. A lag
// of 0 is an element that the plant lacks; repeated lags are an equal-lag chain.
func (c *Card) PlausiblePlants() ([]ident.Plant, error) {
	var out []ident.Plant
	for row, v := range c.Plants.Values {
		p, err := c.plausible(v)
		if err != nil {
			return nil, fmt.Errorf("card: plants.values[%d]: %w", row, err)
		}
		out = append(out, p)
	}
	return out, nil
}

func (c *Card) plausible(v []float64) (ident.Plant, error) {
	n := len(v)
	if n != len(c.Plants.Parameters) || n < 2 {
		return ident.Plant{}, fmt.Errorf("%d values for %d parameters", n, len(c.Plants.Parameters))
	}
	if c.Plants.Parameters[0] != "gain" || c.Plants.Parameters[n-1] != "dead_time" {
		return ident.Plant{}, errors.New("the columns are not gain, lags, dead_time: see plants.parameters")
	}
	if c.Plants.Structure != "mixed" {
		st, err := ident.ParseStructure(c.Plants.Structure)
		if err != nil {
			return ident.Plant{}, err
		}
		return ident.NewPlant(st, v[0], v[1:n-1], v[n-1])
	}
	var lags []float64
	equal := true
	for i, l := range v[1 : n-1] {
		if l < 0 {
			return ident.Plant{}, fmt.Errorf("%s is %g s, want 0 or longer", c.Plants.Parameters[i+1], l)
		}
		if l > 0 {
			lags = append(lags, l)
			equal = equal && l == lags[0]
		}
	}
	name := fmt.Sprintf("chain%d", len(lags))
	switch {
	case len(lags) == 0:
		return ident.Plant{}, errors.New("no lag above zero")
	case len(lags) == 1:
		name = "fopdt"
	case equal:
		name, lags = fmt.Sprintf("equal%d", len(lags)), lags[:1]
	}
	st, err := ident.ParseStructure(name)
	if err != nil {
		return ident.Plant{}, err
	}
	return ident.NewPlant(st, v[0], lags, v[n-1])
}
