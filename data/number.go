package data

import (
	"bytes"
	"math"
	"math/bits"
	"strconv"
	"unicode"
)

// decimal is a number as written: ±mant·10^exp. It is exact unless digits
// were dropped because there were more than 19 of them.
type decimal struct {
	mant    uint64
	exp     int
	neg     bool
	dropped bool
}

// mostDigits is how many digits always fit in 64 bits.
const mostDigits = 19

// scanDecimal reads [+-]digits[point digits][e[+-]digits] from the start of b
// and returns the index of the first byte after it. ok is false when there is
// no digit. Anything that only a programming language would call a number
// (0x10, 1_000, Inf, NaN) is not one here.
func scanDecimal(b []byte, point byte) (d decimal, next int, ok bool) {
	i := 0
	if len(b) > 0 && (b[0] == '-' || b[0] == '+') {
		d.neg = b[0] == '-'
		i = 1
	}
	first := i
	for ; i < len(b) && b[i]-'0' <= 9; i++ {
		d.mant = d.mant*10 + uint64(b[i]-'0')
	}
	digits := i - first
	if i < len(b) && b[i] == point {
		i++
		first = i
		for ; i < len(b) && b[i]-'0' <= 9; i++ {
			d.mant = d.mant*10 + uint64(b[i]-'0')
		}
		d.exp = first - i
		digits -= d.exp
	}
	if digits == 0 {
		return decimal{}, 0, false
	}
	if digits > mostDigits {
		d.mant, d.exp = 0, 0
		d.digits(b[:i], point)
	}
	if i < len(b) && b[i]|0x20 == 'e' {
		if e, n := scanExponent(b[i:]); n > 0 {
			d.exp += e
			i += n
		}
	}
	return d, i, true
}

// digits reads the digits of a long number again, and drops those beyond 64
// bits.
func (d *decimal) digits(b []byte, point byte) {
	decimals := 0
	for _, c := range b {
		switch {
		case c == point:
			decimals = 1
		case c-'0' <= 9:
			d.digit(c-'0', decimals)
		}
	}
}

// digit appends one digit; decimals is 1 after the decimal point, else 0.
func (d *decimal) digit(c byte, decimals int) {
	const most = (math.MaxUint64 - 9) / 10
	if d.mant > most || d.dropped {
		d.dropped = d.dropped || c != 0
		d.exp += 1 - decimals
		return
	}
	d.mant = d.mant*10 + uint64(c)
	d.exp -= decimals
}

// scanExponent reads e[+-]digits and returns its length, 0 when b does not
// begin with a whole exponent.
func scanExponent(b []byte) (exp, n int) {
	i := 1
	neg := false
	if i < len(b) && (b[i] == '-' || b[i] == '+') {
		neg = b[i] == '-'
		i++
	}
	first := i
	for ; i < len(b) && b[i]-'0' <= 9; i++ {
		if exp < 10000 {
			exp = exp*10 + int(b[i]-'0')
		}
	}
	if i == first {
		return 0, 0
	}
	if neg {
		exp = -exp
	}
	return exp, i
}

var pow10 = [...]float64{1e0, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11,
	1e12, 1e13, 1e14, 1e15, 1e16, 1e17, 1e18, 1e19, 1e20, 1e21, 1e22}

// float returns the nearest float64, with text (the digits d was read from)
// for the cases where one rounding would not be enough. An integer below 2^53
// and a power of ten up to 10^22 are both exact, so their product or quotient
// is rounded once (W. D. Clinger, How to read floating point numbers
// accurately, 1990). ok is false when the number is too large for a float64.
func (d decimal) float(text []byte, point byte) (v float64, ok bool) {
	switch {
	case !d.dropped && d.mant < 1<<53 && -len(pow10) < d.exp && d.exp <= 0:
		v = float64(d.mant) / pow10[-d.exp]
	case !d.dropped && d.mant < 1<<53 && 0 < d.exp && d.exp < len(pow10):
		v = float64(d.mant) * pow10[d.exp]
	default:
		if point != '.' {
			text = bytes.Replace(text, []byte{point}, []byte{'.'}, 1)
		}
		v, err := strconv.ParseFloat(string(text), 64)
		return v, err == nil
	}
	if d.neg {
		v = -v
	}
	return v, true
}

// scaled returns the number times unit, rounded to an integer.
func (d decimal) scaled(unit uint64) (int64, bool) {
	hi, lo := bits.Mul64(d.mant, unit)
	exp := d.exp
	for ; exp > 0; exp-- {
		over, h := bits.Mul64(hi, 10)
		carry, l := bits.Mul64(lo, 10)
		hi, lo = h+carry, l
		if over != 0 || hi != 0 {
			return 0, d.mant == 0
		}
	}
	if exp < -38 {
		return 0, true
	}
	for ; exp < -19; exp++ { // one digit at a time; such long fractions are rare
		var r uint64
		hi, r = hi/10, hi%10
		lo, _ = bits.Div64(r, lo, 10)
	}
	div := pow10u[-exp]
	if hi >= div {
		return 0, false
	}
	q, r := bits.Div64(hi, lo, div)
	if r >= div-r && r > 0 {
		q++
	}
	if q > math.MaxInt64 {
		return 0, false
	}
	if d.neg {
		return -int64(q), true
	}
	return int64(q), true
}

var pow10u = func() (p [20]uint64) {
	p[0] = 1
	for i := 1; i < len(p); i++ {
		p[i] = p[i-1] * 10
	}
	return p
}()

// numberFormat says how a file writes its numbers.
type numberFormat struct {
	point byte // decimal mark: '.' or ','
}

// parse reads a whole cell as a number: plain, with thousands marks, or with
// a typographic minus. Blanks around it, and behind its sign, do not matter.
func (f numberFormat) parse(cell []byte) (float64, bool) {
	cell = trimBlanks(cell)
	if d, n, ok := scanDecimal(cell, f.point); ok && n == len(cell) {
		return d.float(cell, f.point)
	}
	plain, ok := f.withoutMarks(cell)
	if !ok {
		return 0, false
	}
	d, n, ok := scanDecimal(plain, f.point)
	if !ok || n != len(plain) {
		return 0, false
	}
	return d.float(plain, f.point)
}

// trimBlanks removes spaces and tabs, the no-break space and what cannot be seen
// from both ends.
func trimBlanks(b []byte) []byte {
	for len(b) > 0 && (b[0] == ' ' || b[0] == '\t') {
		b = b[1:]
	}
	for len(b) > 0 && (b[len(b)-1] == ' ' || b[len(b)-1] == '\t') {
		b = b[:len(b)-1]
	}
	if len(b) > 0 && (b[0] >= 0x80 || b[len(b)-1] >= 0x80) {
		return bytes.TrimFunc(b, func(r rune) bool { return unicode.IsSpace(r) || isInvisible(r) })
	}
	return b
}

// isInvisible tells the marks of writing direction and of bytes, which come
// along when text is copied.
func isInvisible(r rune) bool {
	return r == '\u200b' || r == '\u200e' || r == '\u200f' || '\u202a' <= r && r <= '\u202e' || r == '\u2060' || r == '\ufeff'
}
