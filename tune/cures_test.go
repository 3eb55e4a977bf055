package tune

import (
	"context"
	"math"
	"regexp"
	"strconv"
	"strings"
	"testing"

	"lagwright/fit"
)

// cured reads a number out of the cure that matches.
func cured(t *testing.T, g *Gains, pattern string) float64 {
	t.Helper()
	re := regexp.MustCompile(pattern)
	for _, c := range g.Cures {
		if m := re.FindStringSubmatch(c); m != nil {
			v, err := strconv.ParseFloat(m[1], 64)
			if err != nil {
				t.Fatal(err)
			}
			return v
		}
	}
	t.Fatalf("no cure like %q among:\n%s", pattern, strings.Join(g.Cures, "\n"))
	return 0
}

// What a cure says is possible is possible, and not much less would be.
func TestCuresHold(t *testing.T) {
	c := cardOf(t, 3, 24, 0.05)
	for _, tc := range []struct {
		name    string
		asked   Requirement
		pattern string
		with    func(q Requirement, v float64) Requirement
		tighter float64 // factor on v that nothing meets any more
	}{
		{"settling", Requirement{Settling: ptr(70), Overshoot: ptr(5)}, `allow a settling time of ([0-9.]+) s in place of 70 s$`,
			func(q Requirement, v float64) Requirement { q.Settling = &v; return q }, 0.85},
		{"Ms of two", Requirement{Settling: ptr(250), Ms: ptr(1.1)}, `allow an Ms of ([0-9.]+) in place of 1.1$`,
			func(q Requirement, v float64) Requirement { q.Ms = &v; return q }, 0.95},
		{"supply", Requirement{Overshoot: ptr(5), InputMax: ptr(4.5), SetpointStep: ptr(9)}, `an input up to ([0-9.]+) V in place of 4.5 V$`,
			func(q Requirement, v float64) Requirement { q.InputMax = &v; return q }, 0.95},
		{"step", Requirement{Overshoot: ptr(5), InputMax: ptr(4.5), SetpointStep: ptr(9)}, `keep setpoint steps to ([0-9.]+) K in place of 9 K$`,
			func(q Requirement, v float64) Requirement { q.SetpointStep = &v; return q }, 1.15},
	} {
		t.Run(tc.name, func(t *testing.T) {
			tune := func(q Requirement) *Gains {
				g, err := Tune(context.Background(), []*fit.Card{c}, q, Options{Controller: "pi", Workers: 2})
				if err != nil {
					t.Fatal(err)
				}
				return g
			}
			g := tune(tc.asked)
			if g.Meets {
				t.Fatal("the requirement is met as it is")
			}
			v := cured(t, g, tc.pattern)
			if g := tune(tc.with(tc.asked, v)); !g.Meets {
				t.Errorf("%g does not do: %v", v, g.Reasons)
			}
			tight, err := newTuning([]*fit.Card{c}, tc.with(tc.asked, v*tc.tighter), Options{Controller: "pi", Workers: 2})
			if err != nil {
				t.Fatal(err)
			}
			if tight.attains(context.Background(), "pi") {
				t.Errorf("%g would have done, %g was said", v*tc.tighter, v)
			}
		})
	}
}

// A cure names nothing that was not asked.
func TestCuresNameWhatWasAsked(t *testing.T) {
	g, err := Tune(context.Background(), []*fit.Card{cardOf(t, 3, 24, 0.05)}, Requirement{Settling: ptr(20), Overshoot: ptr(2)}, Options{Controller: "pi", Workers: 2})
	if err != nil {
		t.Fatal(err)
	}
	text := strings.Join(g.Cures, "\n")
	for _, not := range []string{"Ms", "damping", "supply", "scan"} {
		if strings.Contains(text, not) {
			t.Errorf("%s was not asked, yet:\n%s", not, text)
		}
	}
	cured(t, g, `allow a settling time of ([0-9.]+) s`)
}

// A published rule that fails where the synthesis does not is told apart.
func TestCureOfRule(t *testing.T) {
	g, err := Tune(context.Background(), []*fit.Card{cardOf(t, 3, 24, 0.05)}, Requirement{Ms: ptr(1.4)}, Options{Controller: "pi", Rule: "simc", Workers: 2})
	if err != nil {
		t.Fatal(err)
	}
	if len(g.Cures) != 1 || !strings.Contains(g.Cures[0], "leave out --rule") {
		t.Errorf("cures %q", g.Cures)
	}
}

func TestRoundOut(t *testing.T) {
	for _, c := range []struct{ v, up, down float64 }{
		{57.3, 58, 57}, {123.4, 124, 123}, {0.0215, 0.022, 0.021}, {2, 2, 2}, {19.99, 20, 19.9}, {840, 840, 840}, {0.153, 0.153, 0.153}, {0, 0, 0}, {-3.3, -3.3, -3.3},
	} {
		if up, down := roundOut(c.v, true), roundOut(c.v, false); math.Abs(up-c.up) > 1e-12*math.Abs(c.up) || math.Abs(down-c.down) > 1e-12*math.Abs(c.down) {
			t.Errorf("%g: %g up, %g down, want %g and %g", c.v, up, down, c.up, c.down)
		}
	}
}

func TestLeastFactor(t *testing.T) {
	for _, at := range []float64{1.01, 1.7, 5.5, 99} {
		f, ok := leastFactor(100, func(f float64) bool { return f >= at })
		if !ok || f < at || f > 1.05*at {
			t.Errorf("possible from %g on: %g, %v", at, f, ok)
		}
	}
	if _, ok := leastFactor(8, func(float64) bool { return false }); ok {
		t.Error("found what is not there")
	}
}
