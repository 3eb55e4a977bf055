package format

import (
	"fmt"
	"math"
)

// Value writes an estimate with its bound and unit. low and high are the ends
// of the interval, nil where the log sets none:
//
//	12.43 ± 0.31 K/V
//	3.2 s (2.6 to 4.9)      the interval is lopsided
//	3.2 s (at least 2.6)    no upper end; "at most" without a lower one
//	3.2 s (no bound)
//
// The half-width of the interval is given two significant digits (GUM,
// JCGM 100:2008, 7.2.6: at most two usually suffice) and the value as many
// decimals. An interval of no width is a number someone fixed: no bound is
// written.
func Value(v float64, low, high *float64, unit string) string {
	switch {
	case low == nil && high == nil:
		return Amount(v, unit, 3) + " (no bound)"
	case low == nil:
		d := decimals(*high - v)
		return join(fixed(v, d), unit) + " (at most " + fixed(*high, d) + ")"
	case high == nil:
		d := decimals(v - *low)
		return join(fixed(v, d), unit) + " (at least " + fixed(*low, d) + ")"
	}
	down, up := v-*low, *high-v
	half := (up + down) / 2
	if half == 0 {
		return join(Short(v, 6), unit)
	}
	if exact(v, half) {
		return join(Short(v, mostDigits), unit) + fmt.Sprintf(" (exact to %d digits)", mostDigits)
	}
	if lopsided(down, up) {
		d := decimals(half)
		return join(fixed(v, d), unit) + " (" + fixed(*low, d) + " to " + fixed(*high, d) + ")"
	}
	if scientific(v, half) {
		return join(Number(v, digitsFor(v, half))+" ± "+Number(half, 2), unit)
	}
	d := decimals(half)
	return join(fixed(v, d)+" ± "+fixed(half, d), unit)
}

// Interval writes the ends of an interval alone: "12.12 to 12.74", "at least
// 12.1", "no bound". The digits match those of [Value].
func Interval(v float64, low, high *float64) string {
	switch {
	case low == nil && high == nil:
		return "no bound"
	case low == nil:
		return "at most " + fixed(*high, decimals(*high-v))
	case high == nil:
		return "at least " + fixed(*low, decimals(v-*low))
	case *low == *high:
		return "fixed"
	}
	half := (*high - *low) / 2
	if exact(v, half) {
		return fmt.Sprintf("exact to %d digits", mostDigits)
	}
	if scientific(v, half) {
		return Number(*low, digitsFor(*low, half)) + " to " + Number(*high, digitsFor(*high, half))
	}
	d := decimals(half)
	return fixed(*low, d) + " to " + fixed(*high, d)
}

// mostDigits is how many digits of an estimate are written, however well it is
// known: no thermocouple knows more.
const mostDigits = 6

// exact tells a bound that does not show in the digits written.
func exact(v, half float64) bool {
	return half < math.Abs(v)*math.Pow10(-mostDigits) || math.Max(math.Abs(v), half) < nothing
}

// scientific tells numbers that read better with an exponent.
func scientific(v, half float64) bool {
	return half < 1e-6 || math.Max(math.Abs(v), half) < 1e-3 || math.Abs(v) >= 1e6
}

// Amount writes a number without a bound: significant digits and unit.
func Amount(v float64, unit string, digits int) string {
	return join(Short(v, digits), unit)
}

// Optional is Amount, or "-" where the figure does not exist.
func Optional(v *float64, unit string, digits int) string {
	if v == nil {
		return "-"
	}
	return Amount(*v, unit, digits)
}

// lopsided tells whether the sides of an interval differ by more than a
// tenth of its half-width, so that ± would misstate it.
func lopsided(down, up float64) bool {
	return down < 0 || up < 0 || math.Abs(up-down) > 0.1*(up+down)
}

// decimals that give a width two significant digits, at most six.
func decimals(width float64) int {
	width = math.Abs(width)
	if width == 0 || math.IsNaN(width) || math.IsInf(width, 0) {
		return 3
	}
	return min(max(1-magnitude(width, 2), 0), 6)
}

// digitsFor gives v as many significant digits as reach the second digit of
// its bound.
func digitsFor(v, half float64) int {
	if v == 0 {
		return 1
	}
	return max(magnitude(v, 3)-magnitude(half, 2)+2, 2)
}

func join(number, unit string) string {
	switch unit {
	case "":
		return number
	case "°":
		return number + unit
	}
	return number + " " + Unit(unit)
}
