package tune

import (
	"bytes"
	"flag"
	"os"
	"testing"
)

var update = flag.Bool("update", false, "write the golden files anew")

// A written-out example of everything the text can show; the numbers are
// invented, so that no arithmetic decides the digits.
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
		{Rule: "zn-step", Controller: "pi", Kc: 0.4, Ti: ptr(50), Nominal: figures(2.4, 28), Worst: &Metrics{}, InputNoise: 0.06},
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
	const file = "testdata/gains.golden"
	if *update {
		if err := os.WriteFile(file, b.Bytes(), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	want, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(b.Bytes(), want) {
		t.Errorf("text differs from %s (-update writes it anew):\n%s", file, b.String())
	}
}
