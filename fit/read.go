package fit

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"math"
	"slices"

	"lagwright/ident"
)

// WriteJSON writes the card as indented JSON.
func (c *Card) WriteJSON(w io.Writer) error { return writeJSON(w, c) }

func writeJSON(w io.Writer, v any) error {
	e := json.NewEncoder(w)
	e.SetIndent("", "  ")
	e.SetEscapeHTML(false)
	return e.Encode(v)
}

// Fingerprint tells a card from others by all that it says: the first 16 hexadecimal
// digits of the SHA-256 of its JSON. A card read back from its file has the same one.
func (c *Card) Fingerprint() (string, error) {
	b, err := json.Marshal(c)
	if err != nil {
		return "", fmt.Errorf("model card: %w", err)
	}
	// A byte of a file's name that is no text is written as this escape, and as the
	// character itself once it was read.
	sum := sha256.Sum256(bytes.ReplaceAll(b, []byte(`\ufffd`), []byte("\uFFFD")))
	return hex.EncodeToString(sum[:8]), nil
}

// What a card may hold; more is not a card.
const (
	maxCard   = 64 << 20 // bytes
	maxModels = 100
	maxPlants = 200000
	maxSize   = 1e12 // of any number: parameter, bound, range
)

// ReadCard reads a card and checks it: known schema, finite numbers of sane
// size, lags not negative, bounds in order, matrices of the right shape. name
// is for errors, which say which field is wrong.
func ReadCard(r io.Reader, name string) (*Card, error) {
	text, err := io.ReadAll(io.LimitReader(r, maxCard+1))
	if err != nil {
		return nil, fmt.Errorf("%s: %w", name, err)
	}
	if len(text) > maxCard {
		return nil, fmt.Errorf("%s: larger than %d MiB, not a model card", name, maxCard>>20)
	}
	// The schema first: a later one may differ in everything else.
	var head struct {
		Schema string `json:"schema"`
	}
	if err := json.Unmarshal(text, &head); err != nil {
		return nil, fmt.Errorf("%s: not a model card: %w", name, jsonError(text, err))
	}
	if head.Schema != CardSchema {
		return nil, fmt.Errorf("%s: schema is %q, this version reads %q", name, head.Schema, CardSchema)
	}
	c := &Card{}
	if err := json.Unmarshal(text, c); err != nil {
		return nil, fmt.Errorf("%s: not a model card: %w", name, jsonError(text, err))
	}
	if err := c.check(); err != nil {
		return nil, fmt.Errorf("%s: %w", name, err)
	}
	return c, nil
}

// jsonError adds the line to an error of the JSON reader.
func jsonError(text []byte, err error) error {
	var syntax *json.SyntaxError
	var kind *json.UnmarshalTypeError
	offset := int64(-1)
	switch {
	case errors.As(err, &syntax):
		offset = syntax.Offset
	case errors.As(err, &kind):
		offset = kind.Offset
	}
	if offset < 0 || offset > int64(len(text)) {
		return err
	}
	return fmt.Errorf("line %d: %w", 1+bytes.Count(text[:offset], []byte("\n")), err)
}

// check says which field of a card read from outside is wrong.
func (c *Card) check() error {
	if c.InputLaw != "" {
		if _, err := ident.ParseLaw(c.InputLaw); err != nil {
			return fmt.Errorf("input_law: %w", err)
		}
	}
	for _, word := range []struct {
		field, value string
		allowed      []string
	}{
		{"initial", c.Initial, []string{"", "rest", "earlier", "free"}},
		{"noise_model", c.NoiseModel, []string{"", "auto", "white"}},
		{"drift", c.Drift, []string{"", "none", "linear"}},
		{"bump_instant", c.BumpTime, []string{"", "row", "unknown"}},
	} {
		if !slices.Contains(word.allowed, word.value) {
			return fmt.Errorf("%s is %q, not one of %q", word.field, word.value, word.allowed[1:])
		}
	}
	if !(c.Confidence > 0 && c.Confidence < 1) {
		return fmt.Errorf("confidence is %g, not between 0 and 1", c.Confidence)
	}
	if err := checkRange("range.input", &c.Range.Input); err != nil {
		return err
	}
	if err := checkRange("range.temperature", &c.Range.Temperature); err != nil {
		return err
	}
	if err := checkRange("conditions.airflow", c.Conditions.Airflow); err != nil {
		return err
	}
	if err := checkRange("conditions.inlet_temperature", c.Conditions.Inlet); err != nil {
		return err
	}
	if len(c.Models) > maxModels {
		return fmt.Errorf("models: %d of them, at most %d", len(c.Models), maxModels)
	}
	if len(c.Plants.Values) > maxPlants {
		return fmt.Errorf("plants.values: %d rows, at most %d", len(c.Plants.Values), maxPlants)
	}
	for i := range c.Models {
		if err := c.Models[i].check(); err != nil {
			return fmt.Errorf("models[%d].%w", i, err)
		}
	}
	if _, err := c.Plant(); err != nil {
		return fmt.Errorf("selected: %w", err)
	}
	for i, d := range c.Derived {
		if err := checkEstimate(d.Value, nil, d.Low, d.High); err != nil {
			return fmt.Errorf("derived[%d].%w", i, err)
		}
	}
	_, err := c.PlausiblePlants()
	return err
}

func checkRange(field string, r *[2]float64) error {
	if r == nil {
		return nil
	}
	for i, v := range r {
		if !sane(v) {
			return fmt.Errorf("%s[%d] is %g", field, i, v)
		}
	}
	if r[0] > r[1] {
		return fmt.Errorf("%s: %g is above %g", field, r[0], r[1])
	}
	return nil
}

func sane(v float64) bool { return math.Abs(v) <= maxSize } // false for NaN

func (m *Model) check() error {
	free := 0
	for i, q := range m.Parameters {
		if err := checkEstimate(q.Value, q.SE, q.Low, q.High); err != nil {
			return fmt.Errorf("parameters[%d].%w", i, err)
		}
		if !q.Fixed {
			free++
		}
		if (lagIndex(q.Name) >= 0 || q.Name == "dead_time") && q.Value < 0 {
			return fmt.Errorf("parameters[%d].value: %s is %g s, want 0 or longer", i, q.Name, q.Value)
		}
	}
	if n := len(m.Covariance); n != 0 && n != free {
		return fmt.Errorf("covariance has %d rows for %d free parameters", n, free)
	}
	for i, row := range m.Covariance {
		if len(row) != len(m.Covariance) {
			return fmt.Errorf("covariance[%d] has %d columns, want %d", i, len(row), len(m.Covariance))
		}
		for j, v := range row {
			if math.IsNaN(v) || math.IsInf(v, 0) || (i == j && v < 0) {
				return fmt.Errorf("covariance[%d][%d] is %g", i, j, v)
			}
		}
	}
	for _, f := range []struct {
		field string
		value float64
	}{
		{"samples", float64(m.Samples)}, {"sse", m.SSE}, {"rmse", m.RMSE},
		{"noise.sd", m.Noise.SD}, {"noise.correlation_time_s", m.Noise.CorrelationTime}, {"noise.white_sd", m.Noise.WhiteSD},
		{"noise.wander_sd", m.Noise.WanderSD},
	} {
		if !(f.value >= 0) {
			return fmt.Errorf("%s is %g, want 0 or more", f.field, f.value)
		}
	}
	if _, err := m.Plant(); err != nil {
		return fmt.Errorf("parameters: %w", err)
	}
	return nil
}

// checkEstimate looks at a value, its standard error and its bounds; nil where
// there is none.
func checkEstimate(value float64, se, low, high *float64) error {
	if !sane(value) {
		return fmt.Errorf("value is %g", value)
	}
	for _, b := range []struct {
		field string
		value *float64
	}{{"se", se}, {"low", low}, {"high", high}} {
		if b.value != nil && (math.IsNaN(*b.value) || math.IsInf(*b.value, 0)) {
			return fmt.Errorf("%s is %g", b.field, *b.value)
		}
	}
	if se != nil && *se < 0 {
		return fmt.Errorf("se is %g, want 0 or more", *se)
	}
	if low != nil && high != nil && *low > *high {
		return fmt.Errorf("low: %g is above high, %g", *low, *high)
	}
	return nil
}
