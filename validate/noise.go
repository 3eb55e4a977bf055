package validate

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"

	"lagwright/fit"
)

// noiseBeyondControl returns the standard deviation of the noise that no
// controller can act on: the white part, and what the first-order correlated
// part does afresh within the plant's response time (dead time + sum of lags),
//
//	sd² = white² + (total² − white²)·(1 − exp(−2·response/correlation time))
//
// the variance of a first-order process given its value one response time
// earlier. Slower wandering is a disturbance that the loop should remove, and
// is measured as one.
func noiseBeyondControl(n fit.Noise, response float64) float64 {
	white := min(n.WhiteSD, n.SD)
	if n.CorrelationTime <= 0 {
		return n.SD
	}
	fresh := -math.Expm1(-2 * response / n.CorrelationTime)
	return math.Sqrt(white*white + (n.SD*n.SD-white*white)*fresh)
}

// allowance returns what is granted to noise over a span of s seconds: the
// size that the largest of its independent values stays below in 95% of such
// spans, plus half the resolution. Settling is judged into the band widened
// by it, and overshoot counts beyond it; so neither is missed or invented for
// noise alone. The price is that settling of a noisy record is, if anything,
// told too short.
func (m yardstick) allowance(span float64) float64 {
	half := m.quantum / 2
	if m.noise <= 0 {
		return half
	}
	values := 1.0
	if m.apart > 0 {
		values = max(1, span/m.apart)
	}
	level := math.Pow(0.95, 1/values)
	return half + m.noise*distuv.UnitNormal.Quantile((1+level)/2)
}
