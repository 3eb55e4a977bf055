package validate

import (
	"context"
	"math"
	"strings"
	"testing"

	"lagwright/data"
	"lagwright/fit"
)

// A load step d at the plant's input that integral action takes up without
// overshoot has ∫(r − y)dt = d·Ti/Kc: the integral term alone must come to −d.
// (K. J. Åström, T. Hägglund, Advanced PID Control, 2006, from memory.) With
// trapezoidal integration every scan this is exact, whatever the dead time.
func TestLoadIAEIsTiOverKc(t *testing.T) {
	plant := mustPlant(t, "chain2", 8, []float64{12, 3}, 2)
	const n, dt, load = 4000, 0.25, -0.8 // V at the plant's input
	log := &data.Run{}
	for i := range n {
		log.T = append(log.T, float64(i)*dt)
		log.U = append(log.U, 5)
		log.Setpoint = append(log.Setpoint, 70)
		log.Y = append(log.Y, 70)
		if s := float64(i)*dt - 50 - plant.DeadTime; s > 0 { // the plant's own response to the load
			log.Y[i] += plant.Gain * load * (1 - (12*math.Exp(-s/12)-3*math.Exp(-s/3))/9)
		}
	}
	kc, ti := 0.15, 14.0
	r, err := ReplayRuns(context.Background(), cardOf(t, "linear", fit.Noise{}, plant), []*data.Run{log}, piGains(kc, ti, dt), Options{})
	if err != nil {
		t.Fatal(err)
	}
	got, want := *r.Runs[0].Proposed.Median.IAE, math.Abs(load)*ti/kc
	if math.Abs(got-want) > 1e-6*want {
		t.Errorf("IAE %.9g, want |d|·Ti/Kc = %.9g", got, want)
	}
	if logged := *r.Runs[0].Logged.IAE; logged < 10*got {
		t.Errorf("the log in manual has IAE %g", logged)
	}
}

// A P controller leaves the offset of the final-value theorem,
// r − y = size/(1 + K·Kc). It settles there, which a warning says; measured to
// the setpoint, with noise, it never does. Its setpoint is a step from where the
// log starts.
func TestPControlLeavesAnOffset(t *testing.T) {
	plant := mustPlant(t, "fopdt", 8, []float64{12}, 1)
	log := &data.Run{}
	for i := range 2000 {
		log.T = append(log.T, float64(i)*0.25)
		log.U, log.Y = append(log.U, 5), append(log.Y, 70)
	}
	gains := piGains(0.25, 1, 0.25)
	gains.Ti, gains.Controller, gains.Bias = nil, "p", 5
	gains.Requirement.SetpointStep = ptr(6)
	r, err := ReplayRuns(context.Background(), cardOf(t, "linear", fit.Noise{}, plant), []*data.Run{log}, gains, Options{Traces: true})
	if err != nil {
		t.Fatal(err)
	}
	run := r.Runs[0]
	tr := run.Trace
	last := len(tr.T) - 1
	if got, want := *tr.Setpoint[last]-*tr.Median[last], 6/(1+8*0.25); math.Abs(got-want) > 1e-6 {
		t.Errorf("offset %g, want %g", got, want)
	}
	if run.Proposed.Median.Settling == nil || run.WithNoise.Settling != nil {
		t.Errorf("settles in %s s, with noise in %s", optional(run.Proposed.Median.Settling), optional(run.WithNoise.Settling))
	}
	if said := strings.Join(run.Warnings, "; "); !strings.Contains(said, "stands 2 K off the setpoint") {
		t.Errorf("warnings %q do not tell the offset", said)
	}
	if *tr.MedianIn[0] != 5+0.25*6 {
		t.Errorf("the input starts at %g, want the bias and Kc times the step", *tr.MedianIn[0])
	}
}
