package validate

import (
	"math"
	"strings"
	"testing"
)

// What is known worse than its own size is told in words or by its ends, never
// as a percentage of thousands.
func TestWideBounds(t *testing.T) {
	for _, c := range []struct {
		name             string
		value, low, high float64
		want             string
	}{
		{"narrow", 11.67, 11.6, 11.74, "11.670 ±0.070"},
		{"as wide as the value", 0.5, 0, 1, "0.50 ±0.50"},
		{"wider", 0.3, 0, 1.2, "0..1.2"},
		{"hopeless", 3, 0.01, 2.7e6, "0.01..2700000"},
	} {
		if got := (DriftPoint{Value: ptr(c.value), Low: ptr(c.low), High: ptr(c.high)}).words(); got != c.want {
			t.Errorf("%s: %q, want %q", c.name, got, c.want)
		}
	}
	for _, c := range []struct {
		shift float64
		want  string
	}{
		{0.25, "about 25% longer than the card's"}, {-0.4, "about 40% shorter than the card's"},
		{2.4, "about 3.4 times the card's"}, {-1.3, "far shorter than the card's"},
	} {
		if got := against(c.shift, "longer", "shorter"); got != c.want {
			t.Errorf("shift %g: %q, want %q", c.shift, got, c.want)
		}
	}
	for _, c := range []struct {
		scatter float64 // relative standard error of each run
		want    string
	}{
		{0.01, "in 9 of 10 such histories from about "}, {0.4, "only from about "}, {2, "but the runs bound it too widely to see one"},
	} {
		h := &track{log: true, at: make([]int, 12)}
		for range h.at {
			h.history.se = append(h.history.se, c.scatter)
			h.history.x, h.history.t = append(h.history.x, math.Log(11)), append(h.history.t, float64(len(h.history.t)))
		}
		if got := h.detectable(&Drift{FalseAlarm: 0.05}, 8); !strings.Contains(got, c.want) {
			t.Errorf("scatter %g: %q, want %q", c.scatter, got, c.want)
		}
	}
}
