package tune

import (
	"fmt"
	"math"
)

// The forms a controller is written in.
const (
	Ideal    = "ideal"    // Kc·(1 + 1/(Ti·s) + Td·s)
	Parallel = "parallel" // Kc + Kc/Ti/s + Kc·Td·s, entered as Kp, Ki, Kd
	Series   = "series"   // Kc·(1 + 1/(Ti·s))·(1 + Td·s)
)

// toIdeal returns the ideal settings of a controller written in a form. In a
// gains file the parallel form carries kc, ti_s and td_s of the ideal form;
// the three separate gains are made when it is shown, see Entry.
//
// Series to ideal, with f = 1 + Td/Ti:
//
//	Kc·f, Ti·f, Td/f
//
// (Corripio and Smith, Principles and Practice of Automatic Process Control,
// 3rd ed. 2006, ch. 7). Without integral action the two forms are one.
func toIdeal(c law, form string) (law, error) {
	switch form {
	case Ideal, Parallel:
		return c, nil
	case Series:
		if !c.integral() {
			return c, nil
		}
		f := 1 + c.td/c.ti
		return law{kc: c.kc * f, ti: c.ti * f, td: c.td / f, tf: c.tf, b: c.b / f}, nil
	}
	return law{}, fmt.Errorf("form %q: use %s, %s or %s", form, Ideal, Parallel, Series)
}

// toSeries is the inverse of toIdeal for the series form. It exists where
// Ti ≥ 4·Td:
//
//	root = √(1 − 4·Td/Ti),  Kc·(1+root)/2,  Ti·(1+root)/2,  Ti·(1−root)/2
func toSeries(c law) (law, error) {
	if !c.integral() || c.td == 0 {
		return c, nil
	}
	d := 1 - 4*c.td/c.ti
	if d < 0 {
		return law{}, &NoSeriesError{Ti: c.ti, Td: c.td}
	}
	f := (1 + math.Sqrt(d)) / 2
	return law{kc: c.kc * f, ti: c.ti * f, td: c.td / f, tf: c.tf, b: c.b / f}, nil
}

// derivativeOnly returns the ideal settings for a controller that filters its
// derivative alone, Kc·(1 + 1/(Ti·s) + Td·s/(Tf·s + 1)), with the same C(s) and
// the same filter:
//
//	Ti − Tf, Kc·(Ti − Tf)/Ti, Ti·Td/(Ti − Tf) − Tf, b·Ti/(Ti − Tf)
//
// by comparing coefficients. It exists where those are positive.
func derivativeOnly(c law) (law, bool) {
	if !c.integral() || c.tf == 0 {
		return law{}, false
	}
	ti := c.ti - c.tf
	td := c.ti*c.td/ti - c.tf
	return law{kc: c.kc * ti / c.ti, ti: ti, td: td, tf: c.tf, b: c.b * c.ti / ti}, ti > 0 && td > 0
}

// NoSeriesError says that ideal settings have no series form, which needs
// Ti ≥ 4·Td.
type NoSeriesError struct {
	Ti, Td float64 // ideal, s
}

func (e *NoSeriesError) Error() string {
	return fmt.Sprintf("no series form: ti_s %.4g is less than 4 times td_s %.4g; the nearest that has one keeps kc and ti_s with td_s %.4g",
		e.Ti, e.Td, e.Ti/4)
}
