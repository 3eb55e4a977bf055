package tune

import (
	"bytes"
	"context"
	"math"
	"regexp"
	"strconv"
	"strings"
	"testing"

	"lagwright/fit"
)

// halfReach is a requirement that a P controller meets half the step away
// from the setpoint, and that no controller meets at it: the input does not
// reach.
func halfReach(t *testing.T) (*fit.Card, Requirement) {
	t.Helper()
	c := cardOf(t, 3, 24, 0.02)
	plant, err := c.Plant()
	if err != nil {
		t.Fatal(err)
	}
	return c, Requirement{Settling: ptr(400), Overshoot: ptr(10), InputMin: ptr(0), InputMax: ptr(5), SetpointStep: ptr(2 * plant.Gain), Scan: 1}
}

func tuned(t *testing.T, c *fit.Card, q Requirement, kind string) (*Gains, string) {
	t.Helper()
	g, err := Tune(context.Background(), []*fit.Card{c}, q, Options{Controller: kind, Workers: 2})
	if err != nil {
		t.Fatal(err)
	}
	var b bytes.Buffer
	if err := g.WriteText(&b); err != nil {
		t.Fatal(err)
	}
	return g, b.String()
}

// P control does not turn a no into a yes unless it was asked for; then the
// answer names its offset in the same sentence.
func TestProportionalOnlyWhereAsked(t *testing.T) {
	c, q := halfReach(t)
	g, text := tuned(t, c, q, "")
	if g.Meets || g.Controller == "p" {
		t.Errorf("%s recommended, meets %v", g.Controller, g.Meets)
	}
	listed := false
	for _, row := range g.Candidates {
		listed = listed || row.Controller == "p" && row.Rule == synthesised && row.Meets && !row.Selected
	}
	if !listed {
		t.Error("P, which meets in its own way, is not listed")
	}
	offset := func(text, pattern string) float64 {
		m := regexp.MustCompile(pattern).FindStringSubmatch(text)
		if m == nil {
			t.Fatalf("no %q in\n%s", pattern, text)
		}
		v, err := strconv.ParseFloat(m[1], 64)
		if err != nil {
			t.Fatal(err)
		}
		return v
	}
	beside := offset(text, `P leaves a permanent offset: after a step of \S+ K it comes to rest (\S+) K away from the setpoint`)
	g, text = tuned(t, c, q, "p")
	if !g.Meets || g.Controller != "p" {
		t.Fatalf("asked for P: %s, meets %v: %v", g.Controller, g.Meets, g.Reasons)
	}
	said := offset(text, `This meets the requirement \(.*\), counted from where P control comes to rest, which after a step of \S+ K is (\S+) K away from the setpoint for good \(best fit\): it holds on`)
	if math.Abs(said-math.Abs(*g.Nominal.SteadyOffset)) > 0.01*said || said != beside || said < 0.4**q.SetpointStep {
		t.Errorf("%g K said, %g K beside the others, %g K computed", said, beside, *g.Nominal.SteadyOffset)
	}
	if first, _, _ := strings.Cut(text, "\n"); !strings.Contains(first, "leaves a permanent offset") {
		t.Errorf("the first line is %q", first)
	}
	if _, text = tuned(t, c, Requirement{Ms: ptr(1.6)}, "pi"); strings.Contains(text, "offset") {
		t.Errorf("PI is said to leave an offset:\n%s", text)
	}
}

// Where the input does not reach and the time is too short as well, every cure
// is a change with which PI meets the requirement at the setpoint; the input is
// among what is changed. One who asked for P is told the same, and to take PI.
func TestCuresReachTheSetpoint(t *testing.T) {
	c, q := halfReach(t)
	q.Settling = ptr(60)
	read := regexp.MustCompile(`an input up to (\S+) V|setpoint steps to (\S+) K|settling time of (\S+) s|overshoot of (\S+) %`)
	g, _ := tuned(t, c, q, "pi")
	if g.Meets || len(g.Cures) == 0 {
		t.Fatalf("meets %v, cures %q", g.Meets, g.Cures)
	}
	if !strings.Contains(strings.Join(g.Cures, "\n"), "more supply: an input up to") {
		t.Errorf("the input is not cured: %q", g.Cures)
	}
	for _, cure := range g.Cures {
		changed := q
		for _, m := range read.FindAllStringSubmatch(cure, -1) {
			for i, to := range []**float64{&changed.InputMax, &changed.SetpointStep, &changed.Settling, &changed.Overshoot} {
				if m[i+1] == "" {
					continue
				}
				v, err := strconv.ParseFloat(m[i+1], 64)
				if err != nil {
					t.Fatal(err)
				}
				*to = &v
			}
		}
		if changed == q {
			t.Errorf("nothing to do in %q", cure)
		}
		if g, _ := tuned(t, c, changed, "pi"); !g.Meets || math.Abs(*g.Nominal.SteadyOffset) > 1e-6 {
			t.Errorf("%q does not do: %v", cure, g.Reasons)
		}
	}
	p, _ := tuned(t, c, q, "p")
	for i, cure := range p.Cures {
		if len(p.Cures) != len(g.Cures) || cure != "with a PI controller, which leaves no offset (--controller pi): "+g.Cures[i] {
			t.Errorf("told to one who asked for P: %q", p.Cures)
		}
	}
	if p.Meets || len(p.Cures) == 0 {
		t.Errorf("P: meets %v, cures %q", p.Meets, p.Cures)
	}
}

// An input that may not go low enough for a step down is named with how low
// it would have to go, never below zero.
func TestCureOfALowerInput(t *testing.T) {
	c := cardOf(t, 3, 24, 0.02)
	plant, err := c.Plant()
	if err != nil {
		t.Fatal(err)
	}
	q := Requirement{Overshoot: ptr(10), InputMin: ptr(3.5), InputMax: ptr(10), SetpointStep: ptr(-2 * plant.Gain)}
	g, _ := tuned(t, c, q, "pi")
	v := cured(t, g, `allow an input down to (\S+) V in place of 3.5 V$`)
	if v < 0 || v > 2 {
		t.Errorf("down to %g V", v)
	}
	q.InputMin = &v
	if g, _ := tuned(t, c, q, "pi"); !g.Meets {
		t.Errorf("%g V does not do: %v", v, g.Reasons)
	}
}

// Where the sampling error decides, the worst figures are those of the plants
// that meet, and are called so; else those at the assurance.
func TestWorstOfThoseThatMeet(t *testing.T) {
	tu, err := newTuning([]*fit.Card{card(t, 3, 0.05)}, Requirement{Overshoot: ptr(10)}, Options{Workers: 2})
	if err != nil {
		t.Fatal(err)
	}
	r, err := tu.designRow(context.Background(), "pi")
	if err != nil {
		t.Fatal(err)
	}
	n := len(r.out)
	spoil := func(failing int) row { // the plants that overshoot most, by 40 % more
		r := r
		r.out = append([]outcome(nil), r.out...)
		for i := range r.out {
			r.out[i].violation, r.out[i].step.overshoot = -0.1, 0.05
			if i < failing {
				r.out[i].violation, r.out[i].step.overshoot = 4, 0.5
			}
		}
		r.share = r.on.share(r.out)
		return tu.judged(r)
	}
	for _, c := range []struct {
		failing int
		over    float64
		worst   float64
		words   string
	}{
		{0, 0, 5, "Worst over 95 % of the plausible plants"},
		{n * 7 / 100, float64(n-n*7/100) / float64(n), 5, "Worst over the 93.7 % that meet"}, // within the sampling error
		{n / 2, 0, 50, "Worst over 95 % of the plausible plants"},
	} {
		r := spoil(c.failing)
		g, err := tu.gains(context.Background(), r)
		if err != nil {
			t.Fatal(err)
		}
		if g.WorstOver != c.over || math.Abs(*g.Worst.Overshoot-c.worst) > 1e-9 {
			t.Errorf("%d fail: worst over %g overshoots by %g %%, want %g and %g %%", c.failing, g.WorstOver, *g.Worst.Overshoot, c.over, c.worst)
		}
		if got := g.worstWords(); got != c.words {
			t.Errorf("%d fail: %q, want %q", c.failing, got, c.words)
		}
		if one := g.oneSided(); strings.Contains(one, "none of those plants") != (c.over > 0) {
			t.Errorf("%d fail: %q", c.failing, one)
		}
	}
}
