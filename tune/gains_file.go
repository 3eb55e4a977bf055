package tune

import (
	"encoding/json"
	"fmt"
	"io"
	"slices"
)

// maxGainsFile bounds what ReadGains takes in, in bytes.
const maxGainsFile = 16 << 20

// ReadGains reads a gains file and checks what it holds; name goes into the
// errors.
func ReadGains(r io.Reader, name string) (*Gains, error) {
	raw, err := io.ReadAll(io.LimitReader(r, maxGainsFile+1))
	if err != nil {
		return nil, fmt.Errorf("%s: %w", name, err)
	}
	if len(raw) > maxGainsFile {
		return nil, fmt.Errorf("%s: longer than %d MB, not a gains file", name, maxGainsFile>>20)
	}
	var head struct {
		Schema string `json:"schema"`
	}
	if err := json.Unmarshal(raw, &head); err != nil {
		return nil, fmt.Errorf("%s: not a gains file: %w", name, err)
	}
	if head.Schema != GainsSchema {
		return nil, fmt.Errorf("%s: schema is %q, this version reads %q", name, head.Schema, GainsSchema)
	}
	g := &Gains{Form: Ideal, SetpointWeight: 1}
	if err := json.Unmarshal(raw, g); err != nil {
		return nil, fmt.Errorf("%s: %w", name, err)
	}
	if err := g.check(); err != nil {
		return nil, fmt.Errorf("%s: %w", name, err)
	}
	return g, nil
}

// MadeFrom reports whether the gains were made from the card of a fingerprint, alone or
// among others, as far as they say: gains written by hand name none, and may be of any.
func (g *Gains) MadeFrom(card string) bool {
	return len(g.Cards) == 0 || slices.Contains(g.Cards, card)
}

// check says which field cannot be.
func (g *Gains) check() error {
	if _, err := g.law(); err != nil {
		return err
	}
	want := "p"
	switch {
	case g.Td != nil:
		want = "pid"
	case g.Ti != nil:
		want = "pi"
	}
	if g.Controller == "" {
		g.Controller = want
	}
	action := "reverse"
	if g.Kc < 0 {
		action = "direct"
	}
	if g.Action == "" {
		g.Action = action
	}
	l := g.Limits
	switch {
	case !slices.Contains(all, g.Controller):
		return fmt.Errorf("controller is %q: use p, pi or pid", g.Controller)
	case g.Controller != want:
		return fmt.Errorf("controller is %q, but ti_s and td_s are those of %s", g.Controller, want)
	case g.Action != action:
		return fmt.Errorf("action is %q, but kc %g is %s", g.Action, g.Kc, action)
	case !(isFinite(g.Scan) && g.Scan >= 0):
		return fmt.Errorf("scan_s is %g: give a time of 0 or more", g.Scan)
	case !isFinite(g.Bias):
		return fmt.Errorf("bias is not a number")
	case l.Min != nil && l.Max != nil && !(*l.Min < *l.Max):
		return fmt.Errorf("limits: min %g is not below max %g", *l.Min, *l.Max)
	case l.Rate != nil && !(*l.Rate > 0):
		return fmt.Errorf("limits: rate is %g, give a positive one", *l.Rate)
	case l.Resolution != nil && !(*l.Resolution > 0):
		return fmt.Errorf("limits: resolution is %g, give a positive one", *l.Resolution)
	}
	return nil
}

// WriteJSON writes the gains file.
func (g *Gains) WriteJSON(w io.Writer) error {
	e := json.NewEncoder(w)
	e.SetIndent("", "  ")
	e.SetEscapeHTML(false)
	if err := e.Encode(g); err != nil {
		return fmt.Errorf("write gains: %w", err)
	}
	return nil
}
