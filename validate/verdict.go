package validate

import (
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"

	"lagwright/data"
	"lagwright/tune"
)

// A demand is one item of the requirement as it is judged on a run. A figure
// above the limit fails; one that does not exist is not judged.
type demand struct {
	name, unit string
	limit      float64
	figure     func(figures) float64
}

// demands lists what the requirement asks of a run. Ms and damping are
// properties of loop and plant, not of a run: see loopCheck. The limits of
// the input are not asked here: the controller of the replay keeps them.
func demands(r tune.Requirement, units units) []demand {
	var out []demand
	add := func(limit *float64, d demand) {
		if limit != nil {
			d.limit = *limit
			out = append(out, d)
		}
	}
	add(r.Settling, demand{name: "settling", unit: "s", figure: func(f figures) float64 { return f.settling }})
	add(r.Overshoot, demand{name: "overshoot", unit: "%", figure: func(f figures) float64 { return f.overshoot }})
	add(r.TempMax, demand{name: "peak temperature", unit: units.temperature, figure: func(f figures) float64 { return f.peakTemp }})
	return out
}

// demands lists what is asked of a run's loads.
func (l RunLimits) demands(units units) []demand {
	var out []demand
	if l.Deviation != nil {
		out = append(out, demand{"largest deviation", units.difference, *l.Deviation, func(f figures) float64 { return f.deviation }})
	}
	if l.IAE != nil {
		out = append(out, demand{"error area", units.difference + "·s", *l.IAE, func(f figures) float64 { return f.iae }})
	}
	return out
}

// slack is the relative rounding that a figure may pass its limit by.
const slack = 1e-9

func (d demand) fails(f figures) bool {
	return d.figure(f) > d.limit+slack*max(1, math.Abs(d.limit)) // false for NaN
}

// judge returns the share of plants on which a run fails no demand, the share
// of those among them on which it is open whether it meets them all, and for
// each demand that fails on some plant a sentence with its numbers. A plant
// whose loop misses what is asked of it meets nothing. assurance is the share
// that is asked.
func judge(ds []demand, all []figures, misses []bool, assurance float64) (share, open float64, reasons []string) {
	failing := slices.Clone(misses)
	for k, f := range all {
		failing[k] = failing[k] || f.moves == runaway
	}
	for _, d := range ds {
		count := 0
		for k, f := range all {
			if d.fails(f) {
				failing[k] = true
				count++
			}
		}
		if count > 0 {
			reasons = append(reasons, d.reason(all, count, assurance))
		}
	}
	meeting, unseen := 0, 0
	for k, failed := range failing {
		if failed {
			continue
		}
		meeting++
		if len(ds) > 0 && all[k].endsTooSoon() {
			unseen++
		}
	}
	n := float64(len(all))
	return float64(meeting) / n, float64(unseen) / n, reasons
}

// upToWords begin the figure that a share of the plants stays below.
const upToWords = "up to "

// reason says what fails, by how much and on how many plants: "settling 46 s (up
// to 52 s on 95 % of the plants) where at most 45 s is asked: fails on …". Beside
// the median stands what the assured share of the plants stay below, the figure
// that the verdict goes by; the ends of the band go further.
func (d demand) reason(all []figures, count int, assurance float64) string {
	values := valuesOf(all, d.figure)
	slices.Sort(values)
	median, most := quantity(quantile(values, 0.5), d.unit), quantile(values, assurance)
	settled, _ := slices.BinarySearch(values, math.Inf(1))
	spread := ""
	switch upTo := quantity(most, d.unit); {
	case upTo == median || count == len(all):
	case math.IsInf(most, 1):
		spread = fmt.Sprintf(" (%s on %d plants)", upTo, len(values)-settled)
	default:
		spread = fmt.Sprintf(" (%s%s on %s of the plants)", upToWords, upTo, percent(assurance))
	}
	return fmt.Sprintf("%s %s%s where at most %s is asked: fails on %d of %d plausible plants",
		d.name, median, spread, quantity(d.limit, d.unit), count, len(all))
}

// quantity writes a number and its unit.
func quantity(x float64, unit string) string {
	switch {
	case math.IsInf(x, 1) && unit == "s":
		return "not reached"
	case math.IsInf(x, 0):
		return "without bound"
	case unit == "" || unit == "%":
		return number(x) + unit
	case unit == "s":
		return duration(x)
	}
	return bare(x, unit) + " " + data.ShownUnit(unit)
}

// duration writes a time in the unit of its size.
func duration(seconds float64) string {
	s := scaleOf(seconds)
	return number(seconds/s.seconds) + " " + s.unit
}

// bare writes a number without its unit. On a scale of temperature that does not
// begin at zero three significant digits could hide the tenths that people read.
func bare(x float64, unit string) string {
	if size := math.Abs(x); unit != "degC" && unit != "degF" || !(size >= 99.95 && size < 9999.95) {
		return number(x)
	}
	return strings.TrimSuffix(strconv.FormatFloat(x, 'f', 1, 64), ".0")
}

// number writes three significant digits without an exponent where it can.
func number(x float64) string {
	size := math.Abs(x)
	switch {
	case math.IsInf(x, 0) || math.IsNaN(x):
		return "none"
	case size < 1e-9: // rounding, in any unit people use
		return "0"
	case size < 1e-4 || size >= 1e9:
		return strconv.FormatFloat(x, 'g', 3, 64)
	}
	decimals := max(0, 2-int(math.Floor(math.Log10(size)+1e-12)))
	text := strconv.FormatFloat(x, 'f', decimals, 64)
	if decimals > 0 {
		text = strings.TrimRight(strings.TrimRight(text, "0"), ".")
	}
	return text
}
