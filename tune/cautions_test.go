package tune

import (
	"strings"
	"testing"
)

// A scan that is long against the settling time is spoken of, a short one not.
func TestCautionBetweenScans(t *testing.T) {
	const words = "Settling is counted from a setpoint moved at a scan; moved between scans it may take up to 60 s longer."
	settled := func(s float64) *Metrics { return &Metrics{Stable: true, Settling: &s} }
	for _, tc := range []struct {
		name string
		g    Gains
		want string
	}{
		{"long against what was found", Gains{Scan: 60, Worst: settled(1100)}, words},
		{"long against the best fit", Gains{Scan: 60, Worst: &Metrics{}, Nominal: settled(1100)}, words},
		{"long against what is asked", Gains{Scan: 60, Requirement: Requirement{Settling: ptr(1100)}}, words},
		{"short", Gains{Scan: 60, Worst: settled(1300), Requirement: Requirement{Settling: ptr(1400)}}, ""},
		{"continuous", Gains{Worst: settled(10)}, ""},
		{"nothing settles", Gains{Scan: 60, Worst: &Metrics{}}, ""},
	} {
		if got := tc.g.betweenScans(); got != tc.want {
			t.Errorf("%s: %q, want %q", tc.name, got, tc.want)
		}
	}
}

// TestBetterRule: a rule with a setpoint weight below one that does better is named, others
// are not.
func TestBetterRule(t *testing.T) {
	iae := func(v float64) *Metrics { return &Metrics{Stable: true, IAE: ptr(v)} }
	rule := func(name, controller string, weight, v float64, meets bool) Candidate {
		return Candidate{Rule: name, Controller: controller, SetpointWeight: ptr(weight), Nominal: iae(v), Meets: meets}
	}
	g := &Gains{Rule: synthesised, Controller: "pid", Meets: true, Nominal: iae(100)}
	g.Candidates = []Candidate{
		{Rule: synthesised, Controller: "pid", SetpointWeight: ptr(1), Nominal: iae(100), Meets: true, Selected: true},
		rule("a", "pid", 1, 50, true), rule("b", "pi", 0.7, 50, true), rule("c", "pid", 0.7, 50, false), rule("d", "pid", 0.7, 95, true),
	}
	if words := g.betterRule(); words != "" {
		t.Errorf("none is better: %q", words)
	}
	g.Candidates = append(g.Candidates, rule("e", "pid", 0.7, 85, true), rule("f", "pid", 0.8, 70, true))
	if words := g.betterRule(); !strings.Contains(words, "rule f meets") || !strings.Contains(words, "70 against 100") || !strings.Contains(words, "weight of 0.8") {
		t.Errorf("%q", words)
	}
}
