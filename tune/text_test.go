package tune

import (
	"bytes"
	"flag"
	"fmt"
	"os"
	"strings"
	"testing"
)

var update = flag.Bool("update", false, "write the golden files anew")

// A written-out example of everything the text can show, with the best of what
// was tried and with all of it; the numbers are invented, so that no arithmetic
// decides the digits.
func TestWriteText(t *testing.T) {
	figures := func(ms, overshoot float64) *Metrics {
		return &Metrics{Stable: true, Ms: ptr(ms), GainMargin: ptr(3.1), PhaseMargin: ptr(58), DelayMargin: ptr(6), Settling: ptr(140),
			Overshoot: ptr(overshoot), PeakInput: ptr(5.5), IAE: ptr(320)}
	}
	g := newGains(law{kc: 0.19, ti: 60, td: 7, tf: 0.7, b: 1}, "pid")
	g.Rule, g.Assurance, g.ShareMeeting, g.Scan = "synthesis", 0.95, 0.84, 0.5
	g.Units = GainUnits{Input: "V", Temperature: "degC"}
	g.Limits = Limits{Min: ptr(0), Max: ptr(10), Rate: ptr(2)}
	g.ShareError, g.Nominal = 0.0154, figures(1.5, 3)
	g.Requirement = Requirement{Ms: ptr(1.6), Overshoot: ptr(5)}
	g.Candidates = []Candidate{
		{Rule: "synthesis", Controller: "pid", Kc: 0.19, Ti: ptr(60), Td: ptr(7), Filter: 0.7, Nominal: figures(1.5, 3), Worst: figures(1.7, 6), Share: 0.84, Selected: true, InputNoise: 0.12},
		{Rule: "zn-step", Controller: "pi", Kc: 0.4, Ti: ptr(50), Nominal: figures(2.4, 28), Worst: &Metrics{}, InputNoise: 0.06, Missed: "overshoot"},
		{Rule: "cohen-coon", Controller: "pi", Kc: 0.3, Ti: ptr(50), SetpointWeight: ptr(1), Nominal: figures(2.4, 28), Worst: &Metrics{}, Missed: "overshoot"},
		{Rule: "dahlin", Controller: "pi", Kc: 0.3, Ti: ptr(50), SetpointWeight: ptr(1), Nominal: figures(1.7, 8), Worst: &Metrics{}},
		{Rule: "simc", Controller: "pi", Kc: 0.05, Ti: ptr(50), SetpointWeight: ptr(0.76), Nominal: figures(1.2, 0), Worst: figures(1.3, 2), Share: 1, Meets: true},
	}
	g.Reasons = []string{"overshoot: up to 6 % on 95 % of the plausible plants; asked is 5 %"}
	g.Cures = []string{"allow an overshoot of 6.5 % in place of 5 %", "cut the dead time from 5 s to 4 s (sensor nearer the heater, measurement less filtered)"}
	g.SquareRoot = &SquareRoot{Kc: 2.3, Unit: "V²/K"}
	g.PoleRegion = &RegionDesign{Region: PoleRegion{Damping: 0.7}, Plausible: nil, Assurance: 0.95, Best: 0.3, BestSettling: 120, BestDamping: 0.65}
	g.Schedule = []ScheduleEntry{{Card: "low\x1b[31m.csv", Input: [2]float64{2, 4}, Kc: 0.3, Ti: ptr(55), Meets: true, Cost: ptr(1.7)}}
	g.Cautions = []string{"be ready to switch to manual"}
	var b bytes.Buffer
	if err := g.WriteText(&b); err != nil {
		t.Fatal(err)
	}
	compareGolden(t, "testdata/gains.golden", b.Bytes())
	b.Reset()
	if err := g.WriteWholeText(&b); err != nil {
		t.Fatal(err)
	}
	compareGolden(t, "testdata/gains-whole.golden", b.Bytes())
}

func compareGolden(t *testing.T, file string, got []byte) {
	t.Helper()
	if *update {
		if err := os.WriteFile(file, got, 0o644); err != nil {
			t.Fatal(err)
		}
	}
	want, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(got, want) {
		t.Errorf("text differs from %s (-update writes it anew):\n%s", file, got)
	}
}

// The pole region is about P control: it stands with P gains alone.
func TestPoleRegionOnlyWithP(t *testing.T) {
	for kind, want := range map[string]bool{"p": true, "pi": false, "pid": false} {
		g := &Gains{Controller: kind, Form: Ideal, Kc: 1, SetpointWeight: 1, PoleRegion: &RegionDesign{Region: PoleRegion{Damping: 0.7}}}
		var b bytes.Buffer
		if err := g.WriteText(&b); err != nil {
			t.Fatal(err)
		}
		if got := strings.Contains(b.String(), "P control:"); got != want {
			t.Errorf("%s: pole region shown: %v", kind, got)
		}
	}
}

// What was tried comes after the answer: of the published rules the best that
// meet, and for the others what they miss.
func TestBestOfTheRules(t *testing.T) {
	g := &Gains{Controller: "pi", Form: Ideal, Kc: 1, Ti: ptr(9), SetpointWeight: 1, Rule: synthesised}
	g.Candidates = []Candidate{{Rule: synthesised, Controller: "pi", Kc: 1, Selected: true, Meets: true}}
	for i := range 7 {
		g.Candidates = append(g.Candidates, Candidate{Rule: fmt.Sprintf("rule%d", i), Controller: "pi", Kc: 1, Meets: i < 6, Nominal: &Metrics{IAE: ptr(float64(9 - i))}, Missed: "Ms"})
	}
	var b bytes.Buffer
	if err := g.WriteText(&b); err != nil {
		t.Fatal(err)
	}
	text := b.String()
	for _, want := range []string{"rule2 ", "rule5 ", "6 of 7 published rules meet the requirement (listed: the 4 with the smallest load IAE); the others miss it, most of all in Ms (1)"} {
		if !strings.Contains(text, want) {
			t.Errorf("no %q in\n%s", want, text)
		}
	}
	for _, never := range []string{"rule0", "rule1 ", "rule6"} {
		if strings.Contains(text, never) {
			t.Errorf("%q in\n%s", never, text)
		}
	}
	if strings.Index(text, "Enter at the controller") != 0 {
		t.Errorf("the answer does not come first:\n%s", text)
	}
}

func TestDuration(t *testing.T) {
	for _, c := range []struct {
		seconds float64
		digits  int
		want    string
	}{{0.3, 3, "0.3 s"}, {56.04, 3, "56 s"}, {599, 4, "599 s"}, {600, 4, "10 min"}, {1800, 3, "30 min"}, {5400, 3, "1.5 h"}, {21600, 4, "6 h"}, {15100, 3, "4.19 h"}} {
		if got := duration(c.seconds, c.digits); got != c.want {
			t.Errorf("%g s: %q, want %q", c.seconds, got, c.want)
		}
	}
}

// Gains with which plausible loops are unstable are not to be entered, whatever else is said.
func TestUnstableGainsAreNotToBeEntered(t *testing.T) {
	for _, c := range []struct {
		meets, stable bool
		begins        string
	}{
		{true, true, "Enter at the controller"},
		{false, true, "Requirement NOT met"},
		{false, false, "DO NOT ENTER"},
	} {
		g := &Gains{Rule: synthesised, Controller: "pi", Meets: c.meets, Nominal: &Metrics{Stable: true}, Worst: &Metrics{Stable: c.stable}}
		var b bytes.Buffer
		if err := g.WriteText(&b); err != nil {
			t.Fatal(err)
		}
		if !strings.HasPrefix(b.String(), c.begins) {
			t.Errorf("meets %v, stable %v: %q", c.meets, c.stable, strings.SplitN(b.String(), "\n", 2)[0])
		}
	}
}
