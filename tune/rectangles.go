package tune

import (
	"fmt"
	"strings"
)

// smallestShift is the change of gain below which the two ways of summing the
// integral are not told apart (common practice, no source).
const smallestShift = 0.01

// rectangular returns the law of a controller that adds Kc/Ti·scan·(r − yf) at
// every scan and gives the output of c, whose sum is trapezoidal. The trapezoids
// lag half a scan's share of the present error behind the rectangles:
//
//	Kc/Ti·h·Σ(e[j] + e[j−1])/2 = Kc/Ti·h·Σe[j] − Kc·x·e[k],  x = h/(2·Ti)
//
// which gain, setpoint weight and derivative time take up. There is none where
// the scan is not short against the integral time.
func (c law) rectangular(scan float64) (out law, ok bool) {
	x := scan / (2 * c.ti)
	if !c.integral() || !(x < 0.5) {
		return law{}, false
	}
	return law{kc: c.kc * (1 - x), ti: c.ti * (1 - x), td: c.td / (1 - x), tf: c.tf, b: (c.b - x) / (1 - x)}, true
}

// summing gives the numbers for a controller that sums its integral in
// rectangles, as many do: at the edge of the requirement a gain one per cent
// higher can already miss it.
func (g *Gains) summing() string {
	c, err := g.law()
	if err != nil || !c.integral() || g.Scan <= 2*smallestShift*c.ti {
		return ""
	}
	const how = "The integral is taken to be summed in trapezoids"
	r, ok := c.rectangular(g.Scan)
	if !ok {
		return how + "; a controller that adds error times scan time at every scan behaves otherwise at so slow a scan."
	}
	numbers := []string{"gain " + quantity(r.kc, g.Units.Input+"/"+perKelvin(g.Units.Temperature), 4), "integral time " + quantity(r.ti, "s", 4)}
	if r.td > 0 {
		numbers = append(numbers, "derivative time "+quantity(r.td, "s", 4))
	}
	if c.b != 1 {
		numbers = append(numbers, "setpoint weight "+figure(&r.b, 3))
	}
	return fmt.Sprintf("%s; a controller that adds error times scan time at every scan (see its manual) does the same with %s (ideal form).", how, strings.Join(numbers, ", "))
}
