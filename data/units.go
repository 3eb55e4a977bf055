package data

import (
	"slices"
	"strings"
	"sync"
)

// unitless is the unit of a column that nobody knows the unit of.
const unitless = "unit"

// unitNames holds the ways a unit is written, in lower case, by its
// canonical name.
var unitNames = []struct {
	unit string
	ways []string
}{
	{"V", []string{"v", "volt", "volts", "vdc", "vac", "в", "вольт", "vrms", "v rms", "v dc", "v ac", "v(rms)"}},
	{"mV", []string{"mv", "millivolt", "millivolts"}},
	{"kV", []string{"kv", "kilovolt", "kilovolts"}},
	{"%", []string{"%", "pct", "percent", "prozent", "perc", "% duty", "pourcent"}},
	{"mA", []string{"ma", "milliamp", "milliamps", "milliampere", "ма"}},
	{"W", []string{"w", "watt", "watts", "вт"}},
	{"kW", []string{"kw", "kilowatt", "квт"}},
	{"degC", []string{"°c", "ºc", "˚c", "℃", "degc", "deg c", "deg. c", "c", "celsius", "grad c", "gradc", "° c", "degrees c", "øc", "â°c", "\ufffdc", "?c", "°с", "oc", "degree c", "deg.c", "celcius", "centigrade", "°celsius", "deg celsius", "degrees celsius", "grad celsius"}},
	{"degF", []string{"°f", "ºf", "˚f", "℉", "degf", "deg f", "deg. f", "f", "fahrenheit", "° f", "degrees f", "degree f", "deg.f", "°fahrenheit", "degrees fahrenheit", "øf", "â°f", "\ufffdf", "?f"}},
	{"K", []string{"k", "kelvin"}},
	{"°", []string{"°", "º", "˚"}}, // of temperature, nobody knows which

	{"ns", []string{"ns"}},
	{"us", []string{"us", "µs", "μs", "usec", "micros", "microsecond", "microseconds"}},
	{"ms", []string{"ms", "мс", "msec", "msecs", "毫秒", "ミリ秒", "millis", "millisecond", "milliseconds", "millisekunden"}},
	{"s", []string{"s", "с", "сек", "sec", "secs", "秒", "second", "seconds", "sek", "sekunden", "secondes", "segundos", "secondi", "seconden"}},
	{"min", []string{"min", "mn", "мин", "mins", "分", "分钟", "minute", "minutes", "minuten", "minutos", "minuti"}},
	{"h", []string{"h", "ч", "hr", "hrs", "hour", "hours", "std", "stunden", "heures", "horas", "ore"}},
	{"d", []string{"d", "day", "days", "tage", "jours"}},
}

// unitOfName is unitNames turned round.
var unitOfName = sync.OnceValue(func() map[string]string {
	names := make(map[string]string, 10*len(unitNames))
	for _, u := range unitNames {
		for _, way := range u.ways {
			names[way] = u.unit
		}
	}
	return names
})

// timeUnits gives the nanoseconds in a unit of time.
var timeUnits = map[string]uint64{
	"ns": 1, "us": 1e3, "ms": 1e6, "s": nsSecond, "min": nsMinute, "h": nsHour, "d": nsDay,
}

// prefixed are the units that a meter changes by itself, by the thousandths of
// the base unit that they hold.
var prefixed = map[string]struct {
	base       string
	thousandth float64
}{"mV": {"V", 1}, "V": {"V", 1e3}, "kV": {"V", 1e6}, "W": {"W", 1e3}, "kW": {"W", 1e6}}

// inUnit is a value given in a unit told in another of the same quantity.
func inUnit(v float64, from, to string) (same float64, known bool) {
	a, b := prefixed[from], prefixed[to]
	if a.base == "" || a.base != b.base {
		return 0, false
	}
	if a.thousandth < b.thousandth { // a quotient of whole powers of ten is rounded once
		return v / (b.thousandth / a.thousandth), true
	}
	return v * (a.thousandth / b.thousandth), true
}

// canonicalUnit turns a unit as written into its canonical name; known is
// false when it is none of the units this package converts.
func canonicalUnit(written string) (name string, known bool) {
	w := strings.TrimSpace(written)
	if name, known = unitOfName()[strings.ToLower(w)]; known && w != "MV" && w != "S" && w != "MS" {
		return name, true
	}
	return w, false
}

// fullWidth writes the brackets of Chinese and Japanese names as usual ones.
var fullWidth = strings.NewReplacer("（", "(", "）", ")", "［", "[", "］", "]", "【", "[", "】", "]", "％", "%")

// splitNameUnit separates the unit from the name of a column: "Outlet (°C)",
// "u [V]", "T/degC", "t_s", "Voltage, V", "Temp °C". unit is canonical when
// it is known, as written in brackets when not, "" when there is none.
func splitNameUnit(label string) (name, unit string) {
	label = strings.TrimSpace(fullWidth.Replace(label))
	if u, known := canonicalUnit(label); known && !isSymbol(label) {
		return label, u
	}
	for _, pair := range []string{"[]", "()", "{}", "<>"} {
		open := strings.LastIndexByte(label, pair[0])
		end := strings.LastIndexByte(label, pair[1])
		if open < 0 || end < open {
			continue
		}
		inside := label[open+1 : end]
		u, known := canonicalUnit(inside)
		if known || end == len(label)-1 && open > 0 && pair == "[]" {
			return strings.TrimSpace(label[:open] + label[end+1:]), u
		}
	}
	for _, sep := range []string{"/", ",", "_", " ", "-", "."} {
		i := strings.LastIndex(label, sep)
		if i <= 0 {
			continue
		}
		u, known := canonicalUnit(label[i+len(sep):])
		if sep == "/" && isFlowUnit(label[:i]) {
			break
		}
		if known && (sep != "." || len(u) > 1) {
			return strings.TrimSpace(label[:i]), u
		}
	}
	if name := strings.Trim(label, "% "); name != "" && name != label && strings.Contains(label, "%") { // "CO%", "% output"
		return name, "%"
	}
	if i := strings.IndexAny(label, "°º℃℉"); i > 0 {
		if u, known := canonicalUnit(label[i:]); known {
			return strings.TrimSpace(label[:i]), u
		}
	}
	return label, ""
}

// isSymbol tells the names of units that are names of quantities as well: mv is
// the manipulated variable, w the setpoint, c and k could be anything.
func isSymbol(label string) bool {
	return len(label) == 1 && !strings.Contains("VCFs%", label) || strings.EqualFold(label, "mV")
}

// isFlowUnit tells that a name ends like the first half of m3/h or kg/s.
func isFlowUnit(name string) bool {
	parts := strings.FieldsFunc(strings.ToLower(name), func(r rune) bool { return strings.ContainsRune(" _-([,", r) })
	return len(parts) > 1 && slices.Contains([]string{"m", "m3", "m³", "nm3", "nm³", "kg", "g", "l", "ft", "ft3"}, parts[len(parts)-1])
}

// unitCell reads a cell of a unit row: "V", "[V]", "(degC)", "°F".
func unitCell(cell string) (unit string, known bool) {
	c := strings.TrimSpace(cell)
	if len(c) > 2 && strings.ContainsRune("[(<{", rune(c[0])) {
		inside, known := canonicalUnit(c[1 : len(c)-1])
		return inside, known || c[0] == '['
	}
	return canonicalUnit(c)
}

// unitOption turns the value of --input-unit or --temp-unit into a unit.
func unitOption(written string) string {
	u, _ := canonicalUnit(written)
	return u
}

// ShownUnit is the unit of a [Run] as people write it: °C for degC.
func ShownUnit(unit string) string {
	switch unit {
	case "degC":
		return "°C"
	case "degF":
		return "°F"
	}
	return unit
}
