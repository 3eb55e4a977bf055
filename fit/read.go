package fit

import (
	"encoding/json"
	"fmt"
	"io"
	"math"

	"lagwright/ident"
)

// WriteJSON writes the card as indented JSON.
func (c *Card) WriteJSON(w io.Writer) error {
	e := json.NewEncoder(w)
	e.SetIndent("", "  ")
	e.SetEscapeHTML(false)
	return e.Encode(c)
}

// maxCard is the largest card read, in bytes.
const maxCard = 64 << 20

// ReadCard reads a card and checks it; name is for errors. The error says
// which field is wrong.
func ReadCard(r io.Reader, name string) (*Card, error) {
	limited := &io.LimitedReader{R: r, N: maxCard + 1}
	c := &Card{}
	if err := json.NewDecoder(limited).Decode(c); err != nil {
		if limited.N <= 0 {
			return nil, fmt.Errorf("%s: larger than %d MiB, not a model card", name, maxCard>>20)
		}
		return nil, fmt.Errorf("%s: not a model card: %w", name, err)
	}
	if err := c.check(); err != nil {
		return nil, fmt.Errorf("%s: %w", name, err)
	}
	return c, nil
}

// check says which field of a card read from outside is wrong.
func (c *Card) check() error {
	if c.Schema != CardSchema {
		return fmt.Errorf("schema is %q, this version reads %q", c.Schema, CardSchema)
	}
	if c.InputLaw != "" {
		if _, err := ident.ParseLaw(c.InputLaw); err != nil {
			return fmt.Errorf("input_law: %w", err)
		}
	}
	if !(c.Confidence > 0 && c.Confidence < 1) {
		return fmt.Errorf("confidence is %g, not between 0 and 1", c.Confidence)
	}
	for i, v := range []float64{c.Range.Input[0], c.Range.Input[1], c.Range.Temperature[0], c.Range.Temperature[1]} {
		if math.IsNaN(v) || math.Abs(v) > 1e12 {
			return fmt.Errorf("range[%d] is %g", i, v)
		}
	}
	if len(c.Models) > 100 || len(c.Plants.Values) > 200000 {
		return fmt.Errorf("too many models (%d) or plants (%d)", len(c.Models), len(c.Plants.Values))
	}
	for i := range c.Models {
		if _, err := c.Models[i].Plant(); err != nil {
			return fmt.Errorf("models[%d]: %w", i, err)
		}
		if n := c.Models[i].Noise; !(n.SD >= 0) || !(n.CorrelationTime >= 0) || !(n.WhiteSD >= 0) {
			return fmt.Errorf("models[%d].noise has a negative figure", i)
		}
	}
	if _, err := c.Plant(); err != nil {
		return fmt.Errorf("selected: %w", err)
	}
	if _, err := c.PlausiblePlants(); err != nil {
		return err
	}
	return nil
}
