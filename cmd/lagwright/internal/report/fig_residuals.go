package report

import (
	"fmt"

	"lagwright/cmd/lagwright/internal/format"
	"lagwright/data"
	"lagwright/fit"
)

// ResidualFigure draws what the model leaves of a run over time, and the
// autocorrelation of what the noise model leaves of that.
func ResidualFigure(r *data.Run, c *fit.Curves, m *fit.Model) *Figure {
	f := &Figure{Name: "residuals"}
	over := &panel{
		heading: "Log minus model, " + format.Unit(kelvin(r.Units.Temperature)),
		x:       runTime(r), y: yAxis("Residual", kelvin(r.Units.Temperature)), height: 110,
		marks: []mark{
			rule{at: 0, ink: inkMuted, solid: true},
			trace{name: "residual", x: c.T, y: c.Residual, ink: inkLogged, width: 1},
		},
	}
	f.panels = []*panel{over}
	outside := 0
	if len(c.ACF) > 0 {
		lags := make([]float64, len(c.ACF))
		for i := range lags {
			lags[i] = float64(i + 1)
			if c.ACF[i] > c.ACFBound || c.ACF[i] < -c.ACFBound {
				outside++
			}
		}
		acf := &panel{
			heading: "Autocorrelation after the noise model",
			x:       &axis{label: "Lag, samples", grace: 0.02, hold: [2]*float64{new(float64)}},
			y:       yAxis("Autocorrelation", ""), height: 90,
			marks: []mark{
				zone{name: fmt.Sprintf("expected of noise, ±%s", format.Short(c.ACFBound, 2)),
					box: box{nowhere.x1, nowhere.x0, -c.ACFBound, c.ACFBound}, ink: inkModel},
				rule{at: 0, ink: inkMuted, solid: true},
				stems{x: lags, y: c.ACF, ink: inkModel},
			},
		}
		acf.y.hold = [2]*float64{ptr(-1.2 * c.ACFBound), ptr(1.2 * c.ACFBound)}
		f.panels = append(f.panels, acf)
	}
	f.Finding = residualFinding(m, outside, len(c.ACF))
	low, high := rangeOf(c.Residual)
	f.Alt = fmt.Sprintf("Residuals over time between %s and %s, and a stem chart of their autocorrelation. %s",
		format.Short(low, 2), format.Amount(high, kelvin(r.Units.Temperature), 2), f.Finding)
	return f
}

// residualFinding judges by the Ljung–Box test of the whitened residuals at
// 5 %.
func residualFinding(m *fit.Model, outside, of int) string {
	s := "What the model leaves looks like noise"
	if m.Residuals.LjungBoxP < 0.05 {
		s = "What the model leaves still has a pattern"
	}
	p := "= " + format.Short(m.Residuals.LjungBoxP, 2)
	if m.Residuals.LjungBoxP < 1e-4 {
		p = "below 0.0001"
	}
	s += " (Ljung-Box p " + p
	if of > 0 {
		s += fmt.Sprintf("; %d of %d lags outside the expected range", outside, of)
	}
	return s + ")."
}
