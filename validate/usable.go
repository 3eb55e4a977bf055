package validate

import (
	"fmt"
	"strings"
)

// unusable says why a fit tells nothing of its plant, "" where it does. Without
// a bump or a setpoint move the gain is not told from zero, or the log bounds
// it on one side only; dead time and lags of such a fit follow chance features
// of the noise, with intervals that do not show it.
func (e estimate) unusable() string {
	for _, p := range e.parameters {
		if p.Fixed {
			continue
		}
		switch {
		case p.Name == "gain" && (p.Low == nil || p.High == nil):
			return fmt.Sprintf("the log bounds the gain (%s) on no more than one side; it needs a bump or a setpoint move, held until the temperature levels off", quantity(p.Value, p.Unit))
		case p.Name == "gain" && *p.Low <= 0 && *p.High >= 0:
			return fmt.Sprintf("the gain (%s to %s) is not told from zero; the log needs a bump or a setpoint move", number(*p.Low), quantity(*p.High, p.Unit))
		case strings.HasPrefix(p.Name, "lag") && e.span > 0 && p.Value > e.span:
			return fmt.Sprintf("a lag of %s from a log of %s: it needs a bump held until the temperature levels off", quantity(p.Value, "s"), quantity(e.span, "s"))
		}
	}
	return ""
}
