package fit

import (
	"bytes"
	"errors"
	"math"
	"strings"
	"testing"

	"lagwright/data"
)

// A test made as planned gives the bounds that were wanted.
func TestPlannedBumpGivesTheBounds(t *testing.T) {
	l := twoLags()
	l.sd = 0.3
	card := fitted1(t, []*data.Run{l.run(1)}, Options{Structure: "chain2", Plants: 60, Initial: "rest", Drift: "none"})
	p, err := PlanBump(card, PlanOptions{Gain: 0.02, Lags: 0.05, DeadTime: 0.05})
	if err != nil {
		t.Fatal(err)
	}
	if !p.Meets || p.Size <= 0 || p.Repeats != 1 {
		t.Fatalf("plan %+v: want one that meets without limits", p)
	}
	l.every, l.n = p.Sampling, int(p.Duration/p.Sampling)
	l.steps = []step{{0, p.From}, {p.Before, p.To}, {p.Before + p.Hold, p.From}}
	const logs = 15
	kept := map[string]int{}
	for seed := range uint64(logs) {
		c := fitted1(t, []*data.Run{l.run(500 + seed)}, Options{Structure: "chain2", Plants: 60, Initial: "rest", Drift: "none"})
		m, _ := c.Model("chain2")
		plant, _ := c.Plant()
		residence := plant.DeadTime + total(plant.Lags)
		for _, q := range m.Parameters {
			if q.Low == nil || q.High == nil {
				continue
			}
			half := (*q.High - *q.Low) / 2
			if (q.Name == "gain" && half <= 0.02*plant.Gain) || (q.Name == "dead_time" && half <= 0.05*residence) {
				kept[q.Name]++
			}
		}
		for _, d := range c.Derived {
			if d.Name == "sum_of_lags" && (*d.High-*d.Low)/2 <= 0.05*d.Value {
				kept["lags"]++
			}
		}
	}
	for _, name := range []string{"gain", "lags", "dead_time"} {
		if kept[name] < logs*8/10 {
			t.Errorf("%s is as wanted in %d of %d planned tests", name, kept[name], logs)
		}
	}
}

func TestPlanKeepsTheLimits(t *testing.T) {
	l := twoLags()
	l.sd = 0.5
	card := fitted1(t, []*data.Run{l.run(1)}, Options{Structure: "chain2", Plants: 60, Initial: "rest", Drift: "none"})
	from, most, hot := 3.0, 3.8, 65.0
	free, err := PlanBump(card, PlanOptions{Input: &from, DeadTime: 0.02})
	if err != nil {
		t.Fatal(err)
	}
	if free.To <= most {
		t.Fatalf("a free plan goes to %g V only; the limits below would not bite", free.To)
	}
	capped, err := PlanBump(card, PlanOptions{Input: &from, DeadTime: 0.02, InputMax: &most})
	if err != nil {
		t.Fatal(err)
	}
	if capped.To > most || capped.Repeats < 2 {
		t.Errorf("capped at %g V: to %g V, %d times; want the limit and repeats", most, capped.To, capped.Repeats)
	}
	cool, err := PlanBump(card, PlanOptions{Input: &from, DeadTime: 0.02, TempMax: &hot})
	if err != nil {
		t.Fatal(err)
	}
	// The true plant: 61 °C at 3 V, 7.4 K/V.
	if reached := 61 + 7.4*(cool.To-3); reached > hot || *cool.Highest > hot+0.01 || cool.To <= from {
		t.Errorf("with at most %g °C the plan goes to %g V, %g °C, and says %g °C", hot, cool.To, reached, *cool.Highest)
	}
	below := 60.0
	if _, err := PlanBump(card, PlanOptions{Input: &from, TempMax: &below}); err == nil || !strings.Contains(err.Error(), "no bump") {
		t.Errorf("a limit below where the plant rests: error %v", err)
	}
	var text bytes.Buffer
	if err := capped.WriteText(&text); err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{"step to", "over-temperature", "the input may go to 3.8 V", "Log every"} {
		if !strings.Contains(strings.ToLower(text.String()), strings.ToLower(want)) {
			t.Errorf("the text lacks %q:\n%s", want, text.String())
		}
	}
}

// Half the bound asks for twice the bump.
func TestPlanScales(t *testing.T) {
	card := fitted1(t, []*data.Run{twoLags().run(1)}, Options{Structure: "chain2", Plants: 20, Initial: "rest", Drift: "none"})
	a, err := PlanBump(card, PlanOptions{Gain: 0.02, Lags: 0.9, DeadTime: 0.9})
	if err != nil {
		t.Fatal(err)
	}
	b, err := PlanBump(card, PlanOptions{Gain: 0.01, Lags: 0.9, DeadTime: 0.9})
	if err != nil {
		t.Fatal(err)
	}
	if r := b.Size / a.Size; math.Abs(r-2) > 0.1 {
		t.Errorf("half the width of the gain asks for %.3g times the bump, want 2", r)
	}
}

// A bump is never planned from outside the limits.
func TestPlanRefusesToBeginOutsideTheLimits(t *testing.T) {
	g := Guess{Gain: 10, Lag: 30, DeadTime: 4, Noise: 0.2, Temperature: 60, Units: CardUnits{Time: "s", Input: "V", Temperature: "degC"}}
	five, two, six := 5.0, 2.0, 6.0
	for _, c := range []struct {
		name string
		o    PlanOptions
		want string
	}{
		{"above the highest", PlanOptions{Input: &five, InputMax: &two}, "no room below the highest input allowed, 2 V"},
		{"at the highest", PlanOptions{Input: &five, InputMax: &five}, "no room"},
		{"below the lowest", PlanOptions{Input: &five, InputMin: &six}, "begins below the lowest input allowed, 6 V"},
		{"nowhere", PlanOptions{}, "needs the input to bump from"},
	} {
		if _, err := PlanFirst(g, c.o); !errors.Is(err, ErrOption) || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: error %v, want %q", c.name, err, c.want)
		}
	}
	g.Lag = 0
	if _, err := PlanFirst(g, PlanOptions{Input: &five}); !errors.Is(err, ErrOption) {
		t.Errorf("no lag: error %v", err)
	}
}

// A plan from a guess gives what was wanted where the guess is right, and says
// how hot it gets where the gain is half as large again.
func TestPlanFromAGuess(t *testing.T) {
	l := twoLags() // 7.4 K/V
	l.sd = 0.3
	residence := l.dead + total(l.lags)
	from := 3.0
	g := Guess{Gain: 7.4, Lag: total(l.lags), DeadTime: l.dead, Noise: l.sd, Temperature: 61, Units: CardUnits{Time: "s", Input: "V", Temperature: "degC"}}
	p, err := PlanFirst(g, PlanOptions{Input: &from})
	if err != nil {
		t.Fatal(err)
	}
	if p.From != from || p.To <= from || !p.Meets || p.Hold < holdLags*residence {
		t.Fatalf("plan %+v", p)
	}
	if want := 61 + 1.5*7.4*p.Size; math.Abs(*p.Highest-want) > 1e-9 {
		t.Errorf("highest temperature %g °C, want %g", *p.Highest, want)
	}
	l.every, l.n = p.Sampling, int(p.Duration/p.Sampling)
	l.steps = []step{{0, p.From}, {p.Before, p.To}, {p.Before + p.Hold, p.From}}
	c := fitted1(t, []*data.Run{l.run(9)}, Options{Structure: "chain2", Plants: 20, Initial: "rest", Drift: "none"})
	m, _ := c.Model("chain2")
	if q := m.Parameters[0]; (*q.High-*q.Low)/2 > 0.1*q.Value {
		t.Errorf("the gain of the planned test is known to %g to %g, wanted ±10 %%", *q.Low, *q.High)
	}
}
