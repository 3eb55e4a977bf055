package tune

import (
	"context"
	"math"
	"strings"
	"testing"

	"lagwright/fit"
)

// What is reported of several cards is that of the worst: with two cards that
// differ, the figures of the two pooled would be those of neither.
func TestWorstIsThatOfTheWorstCard(t *testing.T) {
	cards := []*fit.Card{scaledCard(t, 3, 1, "low.csv"), scaledCard(t, 3, 1.4, "high.csv")}
	tu, err := newTuning(cards, Requirement{Ms: ptr(1.6), Overshoot: ptr(10)}, Options{Controller: "pi", Workers: 2})
	if err != nil {
		t.Fatal(err)
	}
	c := piLaw(0.18, 50)
	out := tu.plausible.outcomes(c, searchStep)
	inputs := []float64{4, 4}
	all := tu.plausible.worst(c, out, 0.9, inputs)
	var each []*Metrics
	for card := range cards {
		one := tu.ofCard(card)
		each = append(each, one.worst(c, one.outcomes(c, searchStep), 0.9, inputs))
	}
	largest := func(name string, of func(m *Metrics) *float64) {
		t.Helper()
		near(t, name, *of(all), math.Max(*of(each[0]), *of(each[1])), 1e-12)
	}
	largest("Ms", func(m *Metrics) *float64 { return m.Ms })
	largest("settling", func(m *Metrics) *float64 { return m.Settling })
	largest("overshoot", func(m *Metrics) *float64 { return m.Overshoot })
	largest("IAE", func(m *Metrics) *float64 { return m.IAE })
	near(t, "phase margin", *all.PhaseMargin, math.Min(*each[0].PhaseMargin, *each[1].PhaseMargin), 1e-12)
	if *each[1].Ms < 1.02*(*each[0].Ms) {
		t.Errorf("Ms %g and %g: the cards hardly differ", *each[0].Ms, *each[1].Ms)
	}

	// and what fails is told of the card on which it fails
	r := row{rule: "simc", kind: "pi", law: c, on: tu.plausible, out: out}
	r.share = r.on.share(out)
	if text := strings.Join(tu.reasons(r), "\n"); !strings.Contains(text, "high.csv") || strings.Contains(text, "low.csv") {
		t.Errorf("reasons do not name the card that fails:\n%s", text)
	}
}

// Under the power law several cards say, too, over which inputs their common
// set holds: where it holds on every card.
func TestPowerLawOfSeveralCards(t *testing.T) {
	q := Requirement{Ms: ptr(1.6), Overshoot: ptr(10)}
	power := func(by float64, file string, in [2]float64) *fit.Card {
		c := scaledCard(t, 3, by, file)
		c.InputLaw, c.Range.Input = "power", in
		return c
	}
	cards := []*fit.Card{power(1, "winter.csv", [2]float64{2, 6}), power(1.2, "summer.csv", [2]float64{2, 5})}
	g, err := Tune(context.Background(), cards, q, Options{Controller: "pi", Workers: 2})
	if err != nil {
		t.Fatal(err)
	}
	if !g.Meets || g.HoldsOver == nil || g.SquareRoot == nil {
		t.Fatalf("meets %v, holds over %v, square root %v", g.Meets, g.HoldsOver, g.SquareRoot)
	}
	c, err := g.law()
	if err != nil {
		t.Fatal(err)
	}
	holds := func(input float64) bool {
		for _, card := range cards {
			tu, err := newTuning([]*fit.Card{card}, g.Requirement, Options{Operating: &input, Workers: 2})
			if err != nil {
				t.Fatal(err)
			}
			if !tu.plausible.holds(c, tu.enough(tu.plausible)) {
				return false
			}
		}
		return true
	}
	low, high := g.HoldsOver[0], g.HoldsOver[1]
	for _, input := range []float64{low * 1.001, (low + high) / 2, high * 0.999} {
		if !holds(input) {
			t.Errorf("does not hold at an input of %g, said to hold over %v", input, *g.HoldsOver)
		}
	}
	if holds(high * 1.04) {
		t.Errorf("holds beyond the upper end of %v", *g.HoldsOver)
	}
	if one := *g.SquareRoot; !(one.Kc > 0) || one.Unit != "V²/K" {
		t.Errorf("behind a square root: %+v", one)
	}
	if !strings.Contains(strings.Join(g.Cautions, "\n"), "hold the requirement") {
		t.Errorf("not said in the cautions: %q", g.Cautions)
	}
}

// The share of a published rule stands as it is counted; that of a design may
// stay short by its sampling error.
func TestMeetsWithinTheSamplingError(t *testing.T) {
	tu, err := newTuning([]*fit.Card{card(t, 3, 0.05)}, Requirement{}, Options{})
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		rule  string
		share float64
		meets bool
	}{{synthesised, 0.95, true}, {synthesised, 0.91, true}, {synthesised, 0.89, false}, {"simc", 0.95, true}, {"simc", 0.9499, false}} {
		r := row{rule: c.rule, share: c.share, on: tu.plausible, designed: design{found: true}}
		if tu.meets(r) != c.meets { // 80 plants: an error of 2.4 %
			t.Errorf("%s at %g: meets %v", c.rule, c.share, !c.meets)
		}
	}
}

// A step that drives the input to where the log has not been is told of where
// no limit was given.
func TestUnlimitedInputIsSaid(t *testing.T) {
	for _, c := range []struct {
		q     Requirement
		words string
	}{
		{Requirement{SetpointStep: ptr(20)}, "No --input-max was given"},
		{Requirement{SetpointStep: ptr(-20)}, "No --input-min was given"},
		{Requirement{SetpointStep: ptr(20), InputMax: ptr(20)}, ""},
		{Requirement{SetpointStep: ptr(0.5)}, ""},
	} {
		g, err := Tune(context.Background(), []*fit.Card{card(t, 3, 0.04)}, c.q, Options{Controller: "pi", Workers: 2})
		if err != nil {
			t.Fatal(err)
		}
		text := strings.Join(g.Cautions, "\n")
		if c.words == "" && strings.Contains(text, "unlimited") || !strings.Contains(text, c.words) {
			t.Errorf("step %g: cautions\n%s", *c.q.SetpointStep, text)
		}
	}
}

// A P controller's gains for two cards are those that do on both.
func TestPoleRegionOfSeveralCards(t *testing.T) {
	q := Requirement{Settling: ptr(170), Damping: ptr(0.4)}
	region := func(cards ...*fit.Card) *RegionDesign {
		tu, err := newTuning(cards, q, Options{Controller: "p"})
		if err != nil {
			t.Fatal(err)
		}
		g := &Gains{}
		tu.poleRegion(g)
		return g.PoleRegion
	}
	low, high := scaledCard(t, 3, 1, "low.csv"), scaledCard(t, 3, 1.3, "high.csv")
	a, b, both := region(low), region(high), region(low, high)
	if len(a.Plausible) != 1 || len(b.Plausible) != 1 || len(both.Plausible) != 1 {
		t.Fatalf("gains %v, %v, together %v", a.Plausible, b.Plausible, both.Plausible)
	}
	want := GainInterval{max(a.Plausible[0].Low, b.Plausible[0].Low), min(a.Plausible[0].High, b.Plausible[0].High)}
	if both.Plausible[0] != want {
		t.Errorf("gains %v, want %v", both.Plausible[0], want)
	}
}
