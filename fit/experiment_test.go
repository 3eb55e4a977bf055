package fit

import (
	"math"
	"testing"

	"lagwright/data"
	"lagwright/ident"
)

// The Cramér–Rao bounds of a step test of one lag under white noise, sampled
// much faster than the lag, in the dimensionless form of statistics.md §9 of
// the references (derived there from the closed-form integrals): baseline
// known, record of a time constants past the dead time.
func TestPrecisionAgainstClosedForm(t *testing.T) {
	const gain, tau, dead, du, sd = 3.0, 60.0, 7.25, 2.0, 0.2
	for _, c := range []struct{ a, gain, tau, dead float64 }{
		{3, 2.1628, 7.0020, 2.3456},
		{5, 0.8762, 4.3213, 2.1433},
		{8, 0.4985, 3.4542, 2.0599},
	} {
		const h = 0.2
		var times []float64
		// A hundred times as long before the step, so that the baseline is nearly known.
		for x := -100 * c.a * tau; x < dead+c.a*tau; x += h {
			times = append(times, x)
		}
		st, _ := ident.ParseStructure("fopdt")
		plant, err := ident.NewPlant(st, gain, []float64{tau}, dead)
		if err != nil {
			t.Fatal(err)
		}
		e := experiment{t: times, in: ident.Input{At: []float64{0}, Value: []float64{du}}}
		p := e.precision(plant, Noise{SD: sd, WhiteSD: sd}, nil)
		amplitude := gain * du
		for _, q := range []struct {
			name      string
			got, want float64
		}{
			{"gain", p.gain * du / (sd * math.Sqrt(h/tau)), c.gain},
			{"lag", p.lags * amplitude / (sd * math.Sqrt(h*tau)), c.tau},
			{"dead time", p.deadTime * amplitude / (sd * math.Sqrt(h*tau)), c.dead},
		} {
			if math.Abs(q.got/q.want-1) > 0.01 {
				t.Errorf("a = %g: %s %.4f, closed form %.4f", c.a, q.name, q.got, q.want)
			}
		}
	}
}

// What the information foretells is what fits of such logs scatter by.
func TestPrecisionForetellsTheScatter(t *testing.T) {
	l := twoLags()
	run := l.run(1)
	st, _ := ident.ParseStructure(l.structure)
	plant, err := ident.NewPlant(st, l.gain, l.lags, l.dead)
	if err != nil {
		t.Fatal(err)
	}
	e := experiment{t: run.T, in: ident.HeldInput(run.T, run.U, ident.Linear)}
	foretold := e.precision(plant, Noise{SD: l.sd, WhiteSD: l.sd}, nil)
	const logs = 120
	var gain, lags, dead float64
	for seed := range uint64(logs) {
		card := fitted1(t, []*data.Run{l.run(300 + seed)}, Options{Structure: l.structure, Noise: "white", Initial: "rest", Drift: "none", Plants: -1})
		c, err := card.Plant()
		if err != nil {
			t.Fatal(err)
		}
		gain += (c.Gain - l.gain) * (c.Gain - l.gain) / logs
		d := total(c.Lags) - total(l.lags)
		lags += d * d / logs
		dead += (c.DeadTime - l.dead) * (c.DeadTime - l.dead) / logs
	}
	// 120 logs: the scatter is known to 6.5 %; 4 standard deviations are 26 %.
	for _, q := range []struct {
		name           string
		seen, foretold float64
	}{{"gain", math.Sqrt(gain), foretold.gain}, {"sum of lags", math.Sqrt(lags), foretold.lags}, {"dead time", math.Sqrt(dead), foretold.deadTime}} {
		if r := q.seen / q.foretold; r < 0.74 || r > 1.26 {
			t.Errorf("%s scatters by %.4g, foretold %.4g", q.name, q.seen, q.foretold)
		}
	}
}
