package report

import (
	"math"
	"strconv"
	"strings"
	"time"
)

// tick is one labelled place on an axis.
type tick struct {
	at    float64
	label string
}

// ticker finds at most n ticks between low and high.
type ticker func(low, high float64, n int) []tick

// numberTicks are multiples of 1, 2 or 5 times a power of ten, with as many
// decimals as the step needs. It takes a coarser step where that keeps the
// labels to three significant digits and still leaves three of them.
func numberTicks(low, high float64, n int) []tick {
	step := niceStep((high - low) / float64(max(n, 1)))
	for coarse := step; ; {
		coarse = niceStep(coarse * 1.01)
		if digitsNeeded(low, high, step) <= 3 || math.Floor(high/coarse)-math.Ceil(low/coarse) < 2 {
			break
		}
		step = coarse
	}
	if math.Floor(high/step)-math.Ceil(low/step) < 1 { // fewer than two ticks
		step = niceStep(step * 0.4) // the next of 1, 2, 5 below
	}
	return multiples(low, high, step, func(v float64) string { return tickLabel(v, step) })
}

// niceStep is the smallest of 1, 2, 5 times a power of ten not below v.
func niceStep(v float64) float64 {
	if !(v > 0) || math.IsInf(v, 0) {
		return 1
	}
	base := math.Pow(10, math.Floor(math.Log10(v)))
	for _, m := range []float64{1, 2, 5, 10} {
		if m*base >= v*(1-1e-12) {
			return m * base
		}
	}
	return 10 * base
}

// digitsNeeded counts the significant digits that multiples of step take.
func digitsNeeded(low, high, step float64) int {
	largest := math.Max(math.Abs(low), math.Abs(high))
	return int(math.Floor(math.Log10(largest))-math.Floor(math.Log10(step)+1e-9)) + 1
}

// multiples of step from low to high, counted so that no error adds up.
func multiples(low, high, step float64, label func(float64) string) []tick {
	var out []tick
	const slack = 1e-9
	for k := math.Ceil(low/step - slack); k*step <= high+slack*step && len(out) < 50; k++ {
		v := k * step
		out = append(out, tick{v, label(v)})
	}
	return out
}

// tickLabel writes a multiple of step.
func tickLabel(v, step float64) string {
	if v == 0 {
		return "0"
	}
	if a := math.Abs(v); a >= 1e6 || step < 1e-4 && a < 1000*step {
		s := strconv.FormatFloat(v, 'e', 2, 64)
		mantissa, exp, _ := strings.Cut(s, "e")
		mantissa = strings.TrimRight(strings.TrimRight(mantissa, "0"), ".")
		e, _ := strconv.Atoi(exp)
		return mantissa + "e" + strconv.Itoa(e)
	}
	decimals := max(0, -int(math.Floor(math.Log10(step)+1e-9)))
	return strconv.FormatFloat(v, 'f', decimals, 64)
}

// logTicks are powers of ten, with 2 and 5 times them where there is room.
func logTicks(low, high float64, n int) []tick {
	if !(low > 0) || high <= low {
		return nil
	}
	decades := math.Log10(high / low)
	factors := []float64{1}
	switch {
	case 3*decades <= float64(n):
		factors = []float64{1, 2, 5}
	case 2*decades <= float64(n):
		factors = []float64{1, 3}
	}
	every := max(1, int(math.Ceil(decades/float64(max(n, 1)))))
	var out []tick
	for e := int(math.Floor(math.Log10(low))); e <= int(math.Ceil(math.Log10(high))); e++ {
		if e%every != 0 {
			continue
		}
		for _, f := range factors {
			if v := f * math.Pow(10, float64(e)); v >= low*(1-1e-9) && v <= high*(1+1e-9) {
				out = append(out, tick{v, tickLabel(v, v)})
			}
		}
	}
	return out
}

// timeUnit is a unit of elapsed time an axis may be labelled in.
type timeUnit struct {
	name    string
	seconds float64
	steps   []float64 // in the unit; beyond the last, round numbers
}

var timeUnits = []timeUnit{
	{"s", 1, nil},
	{"min", 60, []float64{1, 2, 5, 10, 15, 30}},
	{"h", 3600, []float64{0.5, 1, 2, 3, 6, 12}},
	{"d", 86400, nil},
}

// elapsedUnit is the unit in which a span of seconds reads well.
func elapsedUnit(span float64) timeUnit {
	switch {
	case span <= 600:
		return timeUnits[0]
	case span <= 3*3600:
		return timeUnits[1]
	case span <= 3*86400:
		return timeUnits[2]
	}
	return timeUnits[3]
}

// elapsedTicks labels seconds in the given unit.
func elapsedTicks(u timeUnit) ticker {
	return func(low, high float64, n int) []tick {
		low, high = low/u.seconds, high/u.seconds
		step := niceStep((high - low) / float64(max(n, 1)))
		for _, s := range u.steps {
			if s >= (high-low)/float64(max(n, 1)) {
				step = s
				break
			}
		}
		out := multiples(low, high, step, func(v float64) string { return tickLabel(v, step) })
		for i := range out {
			out[i].at *= u.seconds
		}
		return out
	}
}

// clockSteps are the distances between labels of a clock.
var clockSteps = []time.Duration{
	time.Second, 2 * time.Second, 5 * time.Second, 10 * time.Second, 15 * time.Second, 30 * time.Second,
	time.Minute, 2 * time.Minute, 5 * time.Minute, 10 * time.Minute, 15 * time.Minute, 30 * time.Minute,
	time.Hour, 2 * time.Hour, 3 * time.Hour, 6 * time.Hour, 12 * time.Hour,
	24 * time.Hour, 48 * time.Hour, 7 * 24 * time.Hour, 28 * 24 * time.Hour, 91 * 24 * time.Hour, 365 * 24 * time.Hour,
}

// clockTicks labels seconds after start with the clock: the first of
// clockSteps that gives at most n ticks, on whole steps since midnight. Days
// carry their date.
func clockTicks(start time.Time) ticker {
	return func(low, high float64, n int) []tick {
		step := clockSteps[len(clockSteps)-1]
		for _, s := range clockSteps {
			if (high-low)/s.Seconds() <= float64(n) {
				step = s
				break
			}
		}
		first := start.Add(seconds(low))
		y, m, d := first.Date()
		var out []tick
		for k := 0; len(out) <= n+1 && k < 200000; k++ {
			t := clockStep(y, m, d, k, step, start.Location())
			at := t.Sub(start).Seconds()
			if at > high+1e-9 {
				break
			}
			skipped := len(out) > 0 && out[len(out)-1].at == at // an hour that summer time leaves out
			if at >= low-1e-9 && !skipped {
				out = append(out, tick{at, clockLabel(t, step)})
			}
		}
		return out
	}
}

// clockStep is the k-th whole step since midnight of a day, by the wall
// clock, so that labels stay on full hours across a change of summer time.
func clockStep(y int, m time.Month, d, k int, step time.Duration, zone *time.Location) time.Time {
	if step >= 24*time.Hour {
		return time.Date(y, m, d+k*int(step/(24*time.Hour)), 0, 0, 0, 0, zone)
	}
	return time.Date(y, m, d, 0, 0, k*int(step/time.Second), 0, zone)
}

func clockLabel(t time.Time, step time.Duration) string {
	switch {
	case step >= 3*time.Hour && t.Hour() == 0:
		return t.Format("2 Jan")
	case step < time.Minute:
		return t.Format("15:04:05")
	}
	return t.Format("15:04")
}

func seconds(s float64) time.Duration { return time.Duration(s * float64(time.Second)) }

// zoneName writes the offset of a clock that is not UTC: "UTC+01:00".
func zoneName(t time.Time) string {
	if _, offset := t.Zone(); offset == 0 {
		return ""
	}
	return t.Format("UTC-07:00")
}
