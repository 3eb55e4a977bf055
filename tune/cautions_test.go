package tune

import "testing"

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
