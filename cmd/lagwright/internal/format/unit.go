package format

import (
	"math"
	"strconv"
	"strings"
)

// Unit writes a unit of a file as people do: degC is °C, V2 is V². No unit is
// long; what is is cut.
func Unit(u string) string {
	const longest = 24
	return Clip(unitNames.Replace(Text(u)), longest)
}

var unitNames = strings.NewReplacer(
	"degC", "°C", "degF", "°F", "^2", "²", "V2", "V²", "%2", "%²", "mA2", "mA²", "*", "·",
)

// Percent writes a share between 0 and 1. It never rounds a share that is
// short of everything up to 100 %, nor one above nothing down to 0 %.
func Percent(share float64) string {
	p := 100 * share
	switch {
	case math.IsNaN(p):
		return "-"
	case p > 99.95 && p < 100:
		return "over 99.9 %"
	case p > 0 && p < 0.05:
		return "under 0.1 %"
	}
	s := strings.TrimSuffix(strconv.FormatFloat(p, 'f', 1, 64), ".0")
	return s + " %"
}

// Duration writes seconds in the two units that fit: "850 ms", "12.5 s",
// "4 min 5 s", "2 h 10 min", "3 d 4 h".
func Duration(seconds float64) string {
	a := math.Abs(seconds)
	switch {
	case math.IsNaN(a) || math.IsInf(a, 0):
		return "-"
	case a == 0:
		return "0 s"
	case a < 0.9995:
		return Short(seconds*1000, 3) + " ms"
	case a < 119.5:
		return Short(seconds, 3) + " s"
	}
	whole := int64(math.Round(a))
	sign := ""
	if seconds < 0 {
		sign = "-"
	}
	switch {
	case whole < 3600:
		return sign + two(whole/60, "min", whole%60, "s")
	case whole < 86400:
		return sign + two(whole/3600, "h", whole%3600/60, "min")
	}
	return sign + two(whole/86400, "d", whole%86400/3600, "h")
}

// TimeUnit is the one unit in which times, of which some may be missing, are
// written beside each other, and its seconds: minutes where the longest has ten,
// hours where it has one.
func TimeUnit(times ...*float64) (unit string, seconds float64) {
	longest := 0.0
	for _, t := range times {
		if t != nil {
			longest = math.Max(longest, *t)
		}
	}
	switch {
	case longest >= 3600:
		return "h", 3600
	case longest >= 600:
		return "min", 60
	}
	return "s", 1
}

func two(big int64, bigUnit string, small int64, smallUnit string) string {
	s := strconv.FormatInt(big, 10) + " " + bigUnit
	if small > 0 {
		s += " " + strconv.FormatInt(small, 10) + " " + smallUnit
	}
	return s
}

// Count writes a whole number with its noun: "1 run", "12 000 rows".
func Count(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return Thousands(n) + " " + many
}

// Thousands parts a whole number from five digits on: 12 000.
func Thousands(n int) string {
	s := strconv.Itoa(n)
	if len(strings.TrimPrefix(s, "-")) < 5 {
		return s
	}
	var b strings.Builder
	for i, r := range s {
		if left := len(s) - i; i > 0 && left%3 == 0 && s[i-1] != '-' {
			b.WriteByte(' ')
		}
		b.WriteRune(r)
	}
	return b.String()
}
