package validate

import (
	"math"
	"math/rand/v2"
	"testing"

	"lagwright/fit"
	"lagwright/ident"
	"lagwright/tune"
)

// A log simulated in closed loop with known plant, gains and noise, replayed
// with the true plant and the same gains, returns temperature and input to
// 1e-9.
func TestReplayReturnsItsOwnLog(t *testing.T) {
	noise := fit.Noise{SD: 0.3, CorrelationTime: 2, WhiteSD: 0.1}
	pid := piGains(0.3, 6, 0.25)
	pid.Td, pid.Filter, pid.SetpointWeight = ptr(0.8), 0.2, 0.6
	slow := piGains(0.6, 5, 0.25)
	slow.Limits.Rate = ptr(0.8)
	p := piGains(0.8, 1, 0.25)
	p.Ti, p.Controller, p.Bias = nil, "p", 3
	for _, c := range []struct {
		name  string
		plant ident.Plant
		law   ident.Law
		gains *tune.Gains
	}{
		{"fopdt", mustPlant(t, "fopdt", 8, []float64{6}, 1.1), ident.Linear, piGains(0.4, 6, 0.25)},
		{"chain3 under limits", mustPlant(t, "chain3", 8, []float64{6, 1.5, 0.02}, 0.6), ident.Linear, piGains(1.5, 4, 0.25)},
		{"power law", mustPlant(t, "chain2", 0.9, []float64{6, 2}, 0.25), ident.Power, piGains(0.4, 6, 0.25)},
		{"pid with filter and weight", mustPlant(t, "equal3", 8, []float64{2}, 0), ident.Linear, pid},
		{"rate limit", mustPlant(t, "chain2", 8, []float64{6, 2}, 3.3), ident.Linear, slow},
		{"p with bias", mustPlant(t, "chain2", 8, []float64{6, 2}, 0.4), ident.Linear, p},
		{"ipdt", mustPlant(t, "ipdt", 0.8, nil, 1.3), ident.Linear, piGains(0.3, 15, 0.25)},
	} {
		t.Run(c.name, func(t *testing.T) {
			const n = 400
			setpoint := stepsAt(n, 50, map[int]float64{40: 10, 200: -14})
			d := noisy(rand.New(rand.NewPCG(5, 6)), n, 0.25, noise)
			for i := 260; i < n; i++ {
				d[i] -= 4 // a load
			}
			d[0] = 0
			run := loggedLoop(t, c.plant, c.law, c.gains, setpoint, d, 3)
			plan, err := newPlan(cardOf(t, c.law.String(), noise, c.plant), c.gains, Options{})
			if err != nil {
				t.Fatal(err)
			}
			for _, way := range []string{"lattice", "scan by scan"} {
				course, err := newCourse(run, segment{0, n, 0}, plan)
				if err != nil {
					t.Fatal(err)
				}
				if !course.even || course.lattice.row != 1 || course.lattice.scan != 1 {
					t.Fatalf("lattice %+v, want a row and a scan every step", course.lattice)
				}
				if way != "lattice" {
					course.even = false // the way for rows that scans do not meet
					if err := course.layScans(); err != nil {
						t.Fatal(err)
					}
				}
				y, u := make([]float64, n), make([]float64, n)
				if err := newRunner(c.law, c.gains, plan.plants).replay(course, 0, y, u); err != nil {
					t.Fatal(err)
				}
				var dy, du float64
				for i := range y {
					dy = max(dy, math.Abs(y[i]-run.Y[i]))
					du = max(du, math.Abs(u[i]-run.U[i]))
				}
				if !(dy <= 1e-9 && du <= 1e-9) {
					t.Errorf("%s: replay is off by %g in temperature and %g in input, want 1e-9", way, dy, du)
				}
			}
		})
	}
}
