package fit

import (
	"fmt"
	"math"
	"strconv"
	"strings"
	"unicode"
)

// figure writes v with so many significant digits, without zeros at the end
// and without an exponent between 0.001 and a million.
func figure(v float64, digits int) string {
	s, power, _ := strings.Cut(exactFigure(v, digits), "e")
	if strings.Contains(s, ".") {
		s = strings.TrimRight(strings.TrimRight(s, "0"), ".")
	}
	if power != "" {
		s += "e" + power
	}
	return s
}

// probability is a p-value with its sign: "= 0.21", and of a very small one only that it is.
func probability(p float64) string {
	if p < 1e-4 {
		return "below 0.0001"
	}
	return "= " + figure(p, 2)
}

// plusMinus is a relative bound in percent, "±2.3 %"; what is known better than
// to 0.01 % is not told finer.
func plusMinus(percent float64) string { return "±" + figure(math.Max(percent, 0.01), 2) + " %" }

// nothing is the size below which a number is rounding, in any unit people use.
const nothing = 1e-9

// exactFigure is figure with the zeros at the end.
func exactFigure(v float64, digits int) string {
	a := math.Abs(v)
	switch {
	case math.IsNaN(v) || math.IsInf(v, 0):
		return "-"
	case a < nothing:
		return "0"
	case a < 1e-3 || a >= 1e6:
		return exponent(v, digits-1)
	}
	return strconv.FormatFloat(v, 'f', max(digits-1-magnitude(a, digits), 0), 64)
}

// exponent writes v with so many decimals and a short exponent, 4.2e-5.
func exponent(v float64, decimals int) string {
	m, e, _ := strings.Cut(strconv.FormatFloat(v, 'e', decimals, 64), "e")
	n, _ := strconv.Atoi(e)
	return m + "e" + strconv.Itoa(n)
}

// magnitude is the power of ten of the first digit of a after rounding to the
// given digits.
func magnitude(a float64, digits int) int {
	if a == 0 {
		return 0
	}
	_, exp, _ := strings.Cut(strconv.FormatFloat(a, 'e', digits-1, 64), "e")
	n, _ := strconv.Atoi(exp)
	return n
}

// written is an estimate in words: the value with as many decimals as its
// bound deserves, ±half where the interval is even, and the interval.
type written struct{ value, half, interval string }

// mostDigits is how many digits of an estimate are written, however well the
// log knows it: no thermocouple knows more.
const mostDigits = 6

// write gives the half-width two significant digits (GUM, JCGM 100:2008, 7.2.6: at
// most two usually suffice) and the value and the ends as many decimals. low
// and high are nil where the log sets no bound.
func write(v float64, low, high *float64, fixed bool) written {
	switch {
	case fixed:
		return written{figure(v, 6), "", "known, not fitted"}
	case low == nil && high == nil:
		return written{figure(v, 3), "", "no bound"}
	case low == nil && *high-v < few(v), high == nil && v-*low < few(v):
		w := written{figure(v, 3), "", ""}
		if low == nil {
			w.interval = "at most " + figure(*high, 3)
		} else {
			w.interval = "at least " + figure(*low, 3)
		}
		return w
	case low == nil:
		f := decimal(*high - v)
		return written{f(v), "", "at most " + f(*high)}
	case high == nil:
		f := decimal(v - *low)
		return written{f(v), "", "at least " + f(*low)}
	}
	half := (*high - *low) / 2
	switch {
	case math.Max(math.Abs(v), half) < nothing:
		return written{"0", "", "0 to 9 decimals"}
	case half < math.Abs(v)*math.Pow10(-mostDigits):
		return written{figure(v, mostDigits), "", fmt.Sprintf("exact to %d digits", mostDigits)}
	}
	f := decimal(half)
	w := written{f(v), "", f(*low) + " to " + f(*high)}
	if math.Abs(*high+*low-2*v) <= 0.2*half { // else ± would misstate it
		w.half = "± " + f(half)
	}
	return w
}

// few is a distance below which a one-sided bound cannot be told from the value.
func few(v float64) float64 { return 1e-3 * math.Abs(v) }

// decimal returns a format with the decimals that give the width two
// significant digits; very small numbers get an exponent.
func decimal(width float64) func(float64) string {
	width = math.Abs(width)
	if width == 0 {
		return func(v float64) string { return figure(v, 6) }
	}
	places := 1 - magnitude(width, 2)
	if places > 6 {
		return func(v float64) string {
			return exponent(v, max(magnitude(math.Abs(v), 2)+places, 1))
		}
	}
	return func(v float64) string { return strconv.FormatFloat(v, 'f', max(places, 0), 64) }
}

// quantity is a number with its unit.
func quantity(v float64, unit string, digits int) string {
	return strings.TrimSpace(figure(v, digits) + " " + shownUnit(unit))
}

// shownUnit writes a unit of the card as people do.
func shownUnit(unit string) string {
	return strings.ReplaceAll(strings.ReplaceAll(printable(unit), "degC", "°C"), "degF", "°F")
}

// duration writes seconds in the units that fit.
func duration(s float64) string {
	switch {
	case s < 1 && s > 0:
		return figure(s*1000, 3) + " ms"
	case s < 120:
		return figure(s, 3) + " s"
	case s < 7200:
		return figure(s/60, 3) + " min"
	case s < 48*3600:
		return figure(s/3600, 3) + " h"
	}
	return figure(s/86400, 3) + " d"
}

// counted is a whole number with its noun.
func counted(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return fmt.Sprintf("%d %s", n, many)
}

// printable shows text from a file without what would steer a terminal.
func printable(s string) string {
	return strings.Map(func(r rune) rune {
		if unicode.IsPrint(r) {
			return r
		}
		return '·'
	}, s)
}
