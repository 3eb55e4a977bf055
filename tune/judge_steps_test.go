package tune

import (
	"context"
	"math"
	"strings"
	"testing"

	"lagwright/fit"
	"lagwright/ident"
)

// A loop at the edge of stability that comes in without overshoot because its
// output sits at the limit is no loop that meets the requirement: the small
// step swings.
func TestSmallStepIsJudgedToo(t *testing.T) {
	p := ident.Plant{Structure: structureOf(t, 2), Gain: 1, Lags: []float64{30, 8}, DeadTime: 4}
	q := Requirement{Overshoot: ptr(5), Settling: ptr(200), InputMin: ptr(-100), InputMax: ptr(14), SetpointStep: ptr(10)}
	limited := newTask(q, 0, 0)
	edge := law{kc: 6.5, ti: 60, b: 1}
	for _, tc := range []struct {
		name   string
		change func(q *task)
		small  bool
		missed string
	}{
		{"limits", func(*task) {}, true, smallOvershoot},
		{"no limit touched", func(k *task) { k.limits = Limits{Min: ptr(-1e6), Max: ptr(1e6)} }, false, "overshoot"},
		{"only settling", func(k *task) { k.overshoot, k.settling = math.Inf(1), 205 }, true, smallSettling},
		{"only a temperature", func(k *task) { k.overshoot, k.settling, k.peakTemp = math.Inf(1), math.Inf(1), 40 }, false, ""},
	} {
		task := limited
		tc.change(&task)
		s := newScenario(p, &task, 0)
		o := task.judge(s, edge, reportStep)
		t.Logf("%s: Ms %.3g, step %+v, small %+v", tc.name, o.quick.ms, o.step, o.small)
		if (o.small != nil) != tc.small || !o.met() && o.missed != tc.missed || o.met() != (tc.missed == "") {
			t.Errorf("%s: met %v, missed %q, small step %+v", tc.name, o.met(), o.missed, o.small)
		}
		if task.meets(s, edge) != o.met() || (task.violation(s, edge, math.Inf(1)) <= hair) != o.met() {
			t.Errorf("%s: meets, violation and judge disagree", tc.name)
		}
	}
	// the small step is the one that is judged where there are no limits
	free := limited
	free.limits, free.limited = Limits{}, false
	o, f := limited.judge(newScenario(p, &limited, 0), edge, reportStep), free.judge(newScenario(p, &free, 0), edge, reportStep)
	near(t, "overshoot", o.small.overshoot, f.step.overshoot, 1e-12)
	near(t, "violation", o.violation, f.violation, 1e-12)
}

// stepToTheLimit is a card, its plant and the middle of its input, and a requirement whose
// step an input limit cuts short.
func stepToTheLimit(t *testing.T) (c *fit.Card, plant ident.Plant, middle float64, q Requirement) {
	t.Helper()
	c = card(t, 3, 0.02)
	plant, err := c.Plant()
	if err != nil {
		t.Fatal(err)
	}
	middle = (c.Range.Input[0] + c.Range.Input[1]) / 2
	return c, plant, middle, Requirement{Overshoot: ptr(5), InputMin: ptr(0), InputMax: ptr(middle + 2), SetpointStep: ptr(1.7 * plant.Gain)}
}

// What is recommended under limits keeps its overshoot in a small step, and
// says so; without limits nothing is said of it.
func TestLimitsLeaveTheLoopSound(t *testing.T) {
	c, plant, middle, q := stepToTheLimit(t)
	says := func(g *Gains) bool {
		var b strings.Builder
		if err := g.WriteText(&b); err != nil {
			t.Fatal(err)
		}
		return strings.Contains(b.String(), "It holds for small setpoint steps too")
	}
	g, err := Tune(context.Background(), []*fit.Card{c}, q, Options{Controller: "pi", Workers: 2})
	if err != nil {
		t.Fatal(err)
	}
	if !g.Meets || !g.SmallStep || !says(g) || *g.Worst.Ms > 2 {
		t.Errorf("meets %v, small step %v, worst Ms %g", g.Meets, g.SmallStep, *g.Worst.Ms)
	}
	free := q
	free.InputMin, free.InputMax, free.SetpointStep = nil, nil, ptr(0.01)
	m, err := Evaluate(plant, g, free, middle, 0)
	if err != nil {
		t.Fatal(err)
	}
	if *m.Overshoot > 5 {
		t.Errorf("a small step overshoots by %.3g %%", *m.Overshoot)
	}
	g, err = Tune(context.Background(), []*fit.Card{c}, free, Options{Controller: "pi", Workers: 2})
	if err != nil {
		t.Fatal(err)
	}
	if g.SmallStep || says(g) {
		t.Error("a small step is spoken of where the input is not limited")
	}
}

// A published rule that only a limit keeps from overshooting is told what it
// misses.
func TestReasonsOfSmallSteps(t *testing.T) {
	c, _, _, q := stepToTheLimit(t)
	of := func(c *fit.Card, q Requirement) (*Gains, string) {
		g, err := Tune(context.Background(), []*fit.Card{c}, q, Options{Rule: "zn-step", Controller: "pi", Workers: 2})
		if err != nil {
			t.Fatal(err)
		}
		return g, strings.Join(g.Reasons, "\n")
	}
	g, text := of(c, q)
	for _, want := range []string{"overshoot of a small step that no limit touches: up to", "the limit that binds is the overshoot of small steps"} {
		if g.Meets || !strings.Contains(text, want) {
			t.Errorf("%q is not said in:\n%s", want, text)
		}
	} // loops that are not stable have no small step to speak of
	wide := card(t, 3, 0.6)
	if _, text := of(wide, Requirement{Overshoot: ptr(5), Settling: ptr(100)}); !strings.Contains(text, "stable on") || strings.Contains(text, "small") {
		t.Errorf("without limits it says\n%s", text)
	}
}
