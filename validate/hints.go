package validate

import (
	"fmt"
	"math"
	"strings"

	"gonum.org/v1/gonum/stat/distuv"

	"lagwright/data"
)

// text words the finding on one parameter.
func (tr *track) text(p DriftParameter, found levels, d *Drift, tests int) string {
	name := wordFor(tr.name)
	switch {
	case found.step != nil:
		r := d.Runs[*p.Step.Run]
		return fmt.Sprintf("%s %s %s %s (run %d of %d, %s)", name, past(p.Step.rises()), p.Step.amount(tr.unit), since(r), *p.Step.Run+1, len(d.Runs), clean(r.title()))
	case found.slope != nil:
		per := "per run"
		if d.Clock {
			per = "per 30 days"
		}
		return fmt.Sprintf("%s %s %s %s", name, present(p.Slope.rises()), p.Slope.amount(tr.unit), per)
	}
	return fmt.Sprintf("%s: no change seen; %s", name, tr.detectable(d, tests))
}

// detectable is the size of a step in the middle of the history that the
// test would find with 90% chance: (z(1 − α/(2·tests·places)) + z(0.9))
// standard errors of the difference of the two halves.
func (tr *track) detectable(d *Drift, tests int) string {
	n := len(tr.at)
	w := tr.history.weights()
	before, after := 0.0, 0.0
	for i, v := range w {
		if i < n/2 {
			before += v
		} else {
			after += v
		}
	}
	z := distuv.UnitNormal.Quantile(1-d.FalseAlarm/(2*float64(tests)*float64(n-1))) + distuv.UnitNormal.Quantile(0.9)
	size := z * math.Sqrt(1/before+1/after)
	const shows = "a step halfway would show in 9 of 10 such histories "
	switch percent := 100 * math.Expm1(size); {
	case !tr.log:
		return shows + "from about " + quantity(size, tr.unit) + " on"
	case percent <= 100:
		return shows + "from about " + number(percent) + "% on"
	case percent <= 900:
		return shows + "only from about " + number(math.Exp(size)) + " times the value on"
	}
	return "but the runs bound it too widely to see one"
}

// rises tells the direction of a change in size.
func (c *Change) rises() bool {
	if c.Percent != nil {
		return *c.Percent > 0
	}
	return c.Size > 0
}

// amount writes the size without its sign: "12% (8 to 16%)".
func (c *Change) amount(unit string) string {
	size, low, high := c.Size, c.SizeLow, c.SizeHigh
	if c.Percent != nil && c.PercentLow != nil && c.PercentHigh != nil {
		size, low, high, unit = *c.Percent, *c.PercentLow, *c.PercentHigh, "%"
	}
	if size < 0 {
		size, low, high = -size, -high, -low
	}
	if unit != "%" {
		unit = " " + data.ShownUnit(unit)
	}
	return fmt.Sprintf("%s%s (%s to %s%s)", number(size), unit, number(low), number(high), unit)
}

func since(r DriftRun) string {
	if r.Start == nil {
		return "from there on"
	}
	day, _, _ := strings.Cut(*r.Start, "T")
	return "from " + day + " on"
}

func past(rises bool) string {
	if rises {
		return "rose"
	}
	return "fell"
}

func present(rises bool) string {
	if rises {
		return "rises by"
	}
	return "falls by"
}

func wordFor(name string) string {
	return strings.ReplaceAll(strings.ReplaceAll(name, "_", " "), "lag", "lag ")
}

// hints says where to look first, with the reasoning: common practice, no
// source. With the air carrying the heat, a rise per volt goes with
// power/(flow × heat capacity), and dead time and the transport part of the
// lags with one over the flow; the element's resistance and the supply move
// the gain alone.
func hints(parameters []DriftParameter) []string {
	gain, dead, lags := 0, 0, 0
	for _, p := range parameters {
		switch {
		case !p.Alarm:
		case p.Name == "gain":
			gain = p.direction()
		case p.Name == "dead_time":
			dead = p.direction()
		case lags == 0:
			lags = p.direction()
		case lags != p.direction():
			lags = mixed
		}
	}
	text := hint(gain, dead, lags)
	if text == "" {
		return []string{}
	}
	return []string{text + " A hint where to look first, not a diagnosis."}
}

// mixed marks lags that changed both ways.
const mixed = 2

// direction is +1 or −1 for the change that was found.
func (p DriftParameter) direction() int {
	c := p.Step
	if !c.Alarm {
		c = p.Slope
	}
	if c.rises() {
		return 1
	}
	return -1
}

func hint(gain, dead, lags int) string {
	slower := dead > 0 && lags >= 0 && lags != mixed || lags == 1 && dead >= 0
	faster := dead < 0 && lags <= 0 || lags < 0 && dead <= 0
	switch {
	case gain == 0 && dead == 0 && lags == 0:
		return ""
	case gain < 0 && dead == 0 && lags == 0:
		return "The gain fell while dead time and lags did not change: look at the element and its supply, not at the airflow, since less or more air would have moved dead time or lags too."
	case gain > 0 && dead == 0 && lags == 0:
		return "The gain rose while dead time and lags did not change: look at the supply voltage, at a replaced element and at the scaling of input and temperature, not at the airflow, which would have moved dead time or lags too."
	case gain > 0 && slower:
		return "The gain rose and the response became slower, as with less air: look at filter, fan and damper, and at the airflow interlock."
	case gain < 0 && faster:
		return "The gain fell and the response became faster, as with more air: look at fan speed and damper."
	case gain == 0 && dead == 0 && lags == 1:
		return "The lags grew while gain and dead time did not change: look at the thermocouple and its well, where a deposit or a loose fit adds lag."
	case gain == 0 && dead == 0 && lags < 0:
		return "The lags shrank while gain and dead time did not change: look whether the thermocouple was replaced by a faster one or cleaned."
	case gain == 0 && dead != 0 && lags == 0:
		return "The dead time changed while gain and lags did not: look whether the thermocouple was moved along the duct, and at delays in the logger and the drive."
	}
	return "Gain, dead time and lags changed in a way that no one usual cause explains: compare how and at which airflow the runs were made before looking at the heater."
}
