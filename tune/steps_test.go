package tune

import (
	"encoding/csv"
	"math"
	"os"
	"strings"
	"testing"
)

// TestStepsAgainstIndependentScript compares the continuous loop in time with
// testdata/steps.csv, which testdata/steps.py integrates by a Runge-Kutta
// method for delay equations.
func TestStepsAgainstIndependentScript(t *testing.T) {
	f, err := os.Open("testdata/steps.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	for _, row := range rows[1:] {
		t.Run(strings.Join(row[:9], " "), func(t *testing.T) {
			var lags []float64
			for _, v := range strings.Split(row[2], "|") {
				lags = append(lags, number(t, v))
			}
			p := plant(t, row[0], number(t, row[1]), lags, number(t, row[3]))
			c := law{kc: number(t, row[4]), ti: math.Inf(1), td: number(t, row[6]), tf: number(t, row[7]), b: number(t, row[8])}
			if row[5] != "" {
				c.ti = number(t, row[5])
			}
			task := newTask(Requirement{}, 0, 0)
			s := newScenario(p, &task, 0)
			l := newOpenLoop(p, c, 0)
			step, err := task.setpoint(s, c, &l, s.quick(c), reportStep, math.Inf(1))
			if err != nil {
				t.Fatal(err)
			}
			load, err := task.load(s, c, s.quick(c), reportStep)
			if err != nil {
				t.Fatal(err)
			}
			const tolerance = 1e-3 // the accuracy asked of step figures
			near(t, "overshoot", 100*step.overshoot, number(t, row[9]), tolerance*(100+number(t, row[9])))
			near(t, "settling", step.settling, number(t, row[10]), 2*tolerance*number(t, row[10]))
			if c.integral() {
				near(t, "load IAE", load.iae, number(t, row[11]), tolerance*number(t, row[11]))
			}
			near(t, "load peak", load.peak, number(t, row[12]), tolerance*number(t, row[12]))

			coarse, err := task.setpoint(s, c, &l, s.quick(c), searchStep, math.Inf(1))
			if err != nil {
				t.Fatal(err)
			}
			near(t, "overshoot while searching", 100*coarse.overshoot, number(t, row[9]), 2.5*tolerance*(100+number(t, row[9])))
		})
	}
}
