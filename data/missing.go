package data

import (
	"bytes"
	"fmt"
	"math"
	"slices"
	"strings"
	"sync"
	"unicode/utf8"
)

// badWords are what loggers and historians write in place of a number.
var badWords = []string{
	"OPEN", "OL", "OVER", "OVERRANGE", "OVER RANGE", "OVERFLOW", "OVLD", "OVRNG", "UNDER", "UNDERRANGE", "UNDER RANGE",
	"NAN", "-NAN", "NA", "N/A", "#N/A", "#NA", "NULL", "NONE", "NIL", "(NULL)", "INF", "+INF", "-INF", "INFINITY", "1.#INF", "1.#QNAN",
	"BAD", "BAD INPUT", "BAD DATA", "BAD QUALITY", "INVALID", "ERR", "ERROR", "#ERR", "#VALUE!", "#DIV/0!", "#REF!", "#NUM!", "#NAME?",
	"FAIL", "FAILED", "FAULT", "BURNOUT", "BURN-OUT", "BREAK", "SENSOR BREAK", "SHORT", "NO DATA", "NODATA", "NO SIGNAL", "I/O TIMEOUT",
	"COMM FAIL", "OFFLINE", "OFF-SCAN", "PT CREATED", "SHUTDOWN", "CONFIGURE", "MISSING", "?", "*", "UNCERTAIN",
	"N/C", "NC", "OVRFLW", "OVFL", "OVERLOAD", "UNDERFLOW", "LIMIT", "BURN", "B.OUT", "BOUT", "TC OPEN", "OPEN TC", "OPEN CIRCUIT", "NO SENSOR", "NOT CONNECTED",
	"DISCONNECTED", "UNPLUGGED", "SENSOR ERROR", "SENSOR ERR", "SENSOR FAULT", "INPUT ERROR", "BAD VALUE", "BADVAL", "NOT AVAILABLE", "HHHH", "LLLL", "UUUU", "1.#IND", "-1.#IND", "-1.#QNAN",
	"FEHLER", "OFFEN", "BRUCH", "ERREUR", "ABIERTO", "APERTO", "OUVERT", "ERRORE", "FOUT", "OUT OF RANGE", "UNAVAILABLE", "UNKNOWN", "+OVER", "-OVER", "+OL", "-OL",
}

// isBadWord tells them quickly.
var isBadWord = sync.OnceValue(func() map[string]bool {
	set := make(map[string]bool, len(badWords))
	for _, w := range badWords {
		set[w] = true
	}
	return set
})

// missingKind tells what stands in a cell in place of a number: "blank", a
// known word in capitals, dashes and the like as
// written, or the text itself. known is false for text
// that is none of the usual words.
func missingKind(cell []byte) (kind string, known bool) {
	if kind, known = knownMissing(cell); known {
		return kind, true
	}
	if cell = bytes.Trim(trimBlanks(cell), `"`); len(cell) > longestWord {
		return "other text", false
	}
	return fmt.Sprintf("text %q", decodeName(cell)), false
}

// longestWord bounds the words that are looked up and shown, bytes.
const longestWord = 40

// knownMissing is missingKind for the usual words; kind is "" for other text.
func knownMissing(cell []byte) (kind string, known bool) {
	cell = bytes.Trim(trimBlanks(cell), `"`)
	if len(cell) == 0 {
		return "blank", true
	}
	marks := len(bytes.Trim(cell, "-_.*+#")) == 0 && !bytes.Equal(cell, []byte("*"))
	switch {
	case marks && len(cell) > longestWord:
		return "----", true
	case marks:
		return string(cell), true
	case len(cell) > longestWord:
		return "", false
	}
	word := strings.ToUpper(decodeName(cell))
	if isBadWord()[word] {
		return word, true
	}
	if word = strings.Trim(word, "[]()<>*! "); isBadWord()[word] {
		return word, true
	}
	return "", false
}

// maxKinds bounds how many kinds of missing values are told apart.
const maxKinds = 50

// count adds n to m[kind], under "other text" once there are too many kinds.
func count(m map[string]int, kind string, n int) {
	if _, seen := m[kind]; !seen && len(m) >= maxKinds {
		kind = "other text"
	}
	m[kind] += n
}

// fillValues are numbers that loggers write where they have no value: rows
// of nines, the ends of 16-bit counts as they are or with one or two decimals,
// those of 32-bit counts and of floating-point numbers, and what a digital
// sensor gives that does not answer (common practice, no source).
var fillValues = []float64{
	9999, -9999, 9999.9, -9999.9, 99999, -99999, 999999, -999999, 999.9, -999.9, 999.99, -999.99, 999, -999,
	32767, -32768, 32766, 3276.7, -3276.8, 327.67, -327.68, 65535, 6553.5, 655.35, 8888, -888, -888.8, 7999, -7999,
	9999.99, 99999.9, 99999.99, 9999999, math.MaxInt32, math.MinInt32, math.MaxUint32, -127,
	1e30, -1e30, 1e31, -1e31, math.MaxFloat64, -math.MaxFloat64, 9.9e37, -9.9e37, 1e38, 3.4028234663852886e38, -3.4028234663852886e38,
}

// smallestFill is below all fill values: most readings need no search.
const smallestFill = 100

// rangeEnds are what an instrument shows for a broken thermocouple: the ends
// of the ranges of the types K, J, T, N, E, R, S and B and of a platinum
// resistor, in degC (the limits of IEC 60584-1 and IEC 60751, from memory).
var rangeEnds = []float64{1372, 1370, 1300, 1200, 1000, 1768, 1820, 850, 760, 400, -200, -210, -270}

// setSentinelsAside makes NaN of the values that stand for "no value" and
// counts them by kind. A sentinel is told from a reading by its distance: it
// lies outside the range of all other values by more than that range (and by
// more than a tenth of itself), so an oven that really was at 999 degrees
// keeps its readings.
func setSentinelsAside(v, sentinels []float64, missing map[string]int) {
	lo, hi, found := rangeWithout(v, sentinels)
	if !found {
		return
	}
	for i, x := range v {
		if !(x < lo || x > hi) || !slices.Contains(sentinels, x) {
			continue
		}
		far := max(hi-lo, 0.1*math.Abs(x))
		if x > hi+far || x < lo-far {
			count(missing, fmt.Sprintf("sentinel %v", x), 1)
			v[i] = math.NaN()
		}
	}
}

// rangeWithout is the range of the values that are no sentinels; found tells
// that there are both such values and sentinels outside their range.
func rangeWithout(v, sentinels []float64) (lo, hi float64, found bool) {
	lo, hi = math.Inf(1), math.Inf(-1)
	for _, x := range v {
		if !(x < lo || x > hi) {
			continue
		}
		if slices.Contains(sentinels, x) {
			found = true
			continue
		}
		lo, hi = min(lo, x), max(hi, x)
	}
	return lo, hi, found && lo <= hi
}

// rareShare is the largest share of rows in which an input can stand at a
// fill value by mistake; a drive that stays longer at 32767 counts means it.
const rareShare = 0.05

// setInputSentinelsAside does the same for an input, which may step to a
// distant value and stay there. Counts are set aside only where they are rare;
// no drive gives 9999 V, % or mA, or a negative fill value.
func setInputSentinelsAside(u []float64, unit string, missing map[string]int) {
	n := 0
	for _, x := range u {
		if math.Abs(x) > smallestFill && slices.Contains(fillValues, x) {
			n++
		}
	}
	switch {
	case n == 0:
	case unit == "V" || unit == "%" || unit == "mA" || float64(n) < rareShare*float64(len(u)):
		setSentinelsAside(u, fillValues, missing)
	default:
		setSentinelsAside(u, slices.DeleteFunc(slices.Clone(fillValues), func(x float64) bool { return 0 < x && x < 1e30 }), missing)
	}
}

// decodeName makes text of bytes from a file: UTF-8 where they are valid,
// else Windows-1252.
func decodeName(b []byte) string {
	if utf8.Valid(b) {
		return string(b)
	}
	return windows1252(b)
}
