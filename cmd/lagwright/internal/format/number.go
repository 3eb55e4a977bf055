// Package format writes numbers, units and foreign text for people: on the
// terminal and on the page alike. Numbers carry as many digits as their
// bound deserves; text from files is shown literally and can neither move the
// cursor nor turn the line around. It computes nothing.
package format

import (
	"math"
	"strconv"
	"strings"
)

// nothing is the size below which a number is rounding, in any unit people use.
const nothing = 1e-9

// Number writes v with the given significant digits, without an exponent
// between 0.001 and a million and without losing whole digits: Number(1234.5,
// 3) is "1235". Zeros at the end stay, for they say how exact the number is.
// What is not finite is "-", what is too small to mean anything "0".
func Number(v float64, digits int) string {
	switch {
	case math.IsNaN(v) || math.IsInf(v, 0):
		return "-"
	case math.Abs(v) < nothing:
		return "0"
	}
	if a := math.Abs(v); a >= 1e6 || a < 1e-3 {
		return exponent(strconv.FormatFloat(v, 'e', digits-1, 64))
	}
	return fixed(v, digits-1-magnitude(v, digits))
}

// Short is Number without the zeros at the end.
func Short(v float64, digits int) string {
	s := Number(v, digits)
	if !strings.Contains(s, ".") || strings.Contains(s, "e") {
		return s
	}
	return strings.TrimRight(strings.TrimRight(s, "0"), ".")
}

// magnitude is the power of ten of v's first digit after rounding to the
// given digits, so that 9.996 counts as 10 with three digits.
func magnitude(v float64, digits int) int {
	s := strconv.FormatFloat(math.Abs(v), 'e', max(digits-1, 0), 64)
	_, exp, _ := strings.Cut(s, "e")
	n, _ := strconv.Atoi(exp)
	return n
}

// fixed writes v with the given number of decimals, none when negative.
func fixed(v float64, decimals int) string {
	s := strconv.FormatFloat(v, 'f', max(decimals, 0), 64)
	if strings.Trim(s, "-0.") == "" {
		return strings.TrimPrefix(s, "-") // no minus zero
	}
	return s
}

// exponent shortens Go's e+06 to e6.
func exponent(s string) string {
	m, e, _ := strings.Cut(s, "e")
	n, _ := strconv.Atoi(e)
	return m + "e" + strconv.Itoa(n)
}
