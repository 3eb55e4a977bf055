package tune

import (
	"context"
	"strings"
	"testing"

	"lagwright/fit"
)

// A step that the input limits keep out of reach is no step without
// overshoot: nothing meets it, the gains keep their margins, and the supply
// that would cure it is the one that the plants' gains ask for.
func TestStepBeyondTheInputLimits(t *testing.T) {
	c := card(t, 3, 0.02)
	plant, err := c.Plant()
	if err != nil {
		t.Fatal(err)
	}
	middle := (c.Range.Input[0] + c.Range.Input[1]) / 2
	q := Requirement{Overshoot: finite(5), InputMin: finite(0), InputMax: finite(middle + 1), SetpointStep: finite(1.5 * plant.Gain)}
	g, err := Tune(context.Background(), []*fit.Card{c}, q, Options{Controller: "pi", Workers: 2})
	if err != nil {
		t.Fatal(err)
	}
	if g.Meets || g.ShareMeeting != 0 {
		t.Errorf("meets %v, share %g, though the input falls half the step short", g.Meets, g.ShareMeeting)
	}
	if g.Nominal.Ms == nil || *g.Nominal.Ms > 1.7 || g.Nominal.Settling != nil {
		t.Errorf("nominal %+v: want the margins of a sound loop and no settling time", g.Nominal)
	}
	if got, want := *g.Nominal.SteadyOffset, 0.5*plant.Gain; got < 0.99*want || got > 1.01*want {
		t.Errorf("steady offset %g, want %g", got, want)
	}
	text := strings.Join(append(g.Reasons, g.Cures...), "\n")
	for _, want := range []string{"the limit that binds is the input", "more supply: an input up to 5.6 V"} {
		if !strings.Contains(text, want) {
			t.Errorf("%q is not said in:\n%s", want, text)
		}
	}
}

// A gain that leaves the temperature far from the setpoint, or that leaves
// little margin, is not handed over without a word.
func TestCautionsOfOffsetAndMargins(t *testing.T) {
	c := card(t, 3, 0.02)
	for _, tc := range []struct {
		kind string
		q    Requirement
		says string
	}{
		{"p", Requirement{Overshoot: finite(5)}, "P control leaves an offset"},
		{"pi", Requirement{Ms: finite(3)}, "Small margins"},
	} {
		g, err := Tune(context.Background(), []*fit.Card{c}, tc.q, Options{Controller: tc.kind, Workers: 2})
		if err != nil {
			t.Fatal(err)
		}
		if text := strings.Join(g.Cautions, "\n"); !strings.Contains(text, tc.says) {
			t.Errorf("%s: %q is not said in:\n%s", tc.kind, tc.says, text)
		}
	}
}

func TestOperatingPointOutsideTheLimits(t *testing.T) {
	linear, power := card(t, 3, 0.02), card(t, 3, 0.02)
	power.InputLaw = "power"
	high := card(t, 3, 0.02)
	high.Range.Input = [2]float64{8, 10}
	for name, tc := range map[string]struct {
		cards []*fit.Card
		q     Requirement
		o     Options
		says  string
	}{
		"ceiling below the step": {[]*fit.Card{linear}, Requirement{TempMax: finite(30)}, Options{}, "ceiling"},
		"second card":            {[]*fit.Card{linear, high}, Requirement{InputMax: finite(7)}, Options{}, "outside the input limits"},
		"negative input, power":  {[]*fit.Card{power}, Requirement{}, Options{Operating: finite(-4)}, "above 0"},
	} {
		t.Run(name, func(t *testing.T) {
			_, err := Tune(context.Background(), tc.cards, tc.q, tc.o)
			if err == nil || !strings.Contains(err.Error(), tc.says) {
				t.Errorf("error %v, want one that says %q", err, tc.says)
			}
		})
	}
}

// Rounding to the output's resolution does not carry it past a limit.
func TestResolutionStaysWithinTheLimits(t *testing.T) {
	ti := 10.0
	g := &Gains{Form: Ideal, Kc: 1, Ti: &ti, SetpointWeight: 1, Limits: Limits{Min: finite(-11), Max: finite(11), Resolution: finite(3)}}
	c, err := NewController(g, 1)
	if err != nil {
		t.Fatal(err)
	}
	for _, r := range []float64{100, -100} {
		c.Start(0, 0, 0)
		for range 5 {
			if u := c.Next(r, 0); u < -11 || u > 11 || u == 0 {
				t.Errorf("output %g for an error of %g, limits ±11", u, r)
			}
		}
	}
}

// With several cards the figures of a step are counted from where each card
// operates.
func TestPeakInputOfSeveralCards(t *testing.T) {
	low, high := card(t, 3, 0.02), card(t, 3, 0.02)
	high.Range.Input = [2]float64{8, 10}
	g, err := Tune(context.Background(), []*fit.Card{low, high}, Requirement{}, Options{Controller: "pi", Workers: 2})
	if err != nil {
		t.Fatal(err)
	}
	if peak := *g.Worst.PeakInput; peak < 9 {
		t.Errorf("peak input %g, though one card operates at 9", peak)
	}
}
