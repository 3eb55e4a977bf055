package tune

import (
	"fmt"
	"math"
	"regexp"
	"strconv"
	"strings"
)

// timeUnits are the units of time as people write them, in lower case, in s.
// They are those of the durations on the command line.
var timeUnits = map[string]float64{}

func init() {
	for words, unit := range map[string]float64{
		"ns": 1e-9, "us µs μs": 1e-6, "ms msec msecs millisecond milliseconds": 1e-3,
		"s sec secs second seconds": 1, "m min mins minute minutes": 60, "h hr hrs hour hours": 3600,
	} {
		for _, word := range strings.Fields(words) {
			timeUnits[word] = unit
		}
	}
}

// longestTime is that of the command line, s.
const longestTime = math.MaxInt64 * 1e-9

var timePart = regexp.MustCompile(`^\s*([0-9]+\.?[0-9]*|\.[0-9]+)\s*(\pL+)\.?\s*`)

// timeOf reads 45s, 250ms, 2m, 25min, 2h, 1m30s, and the same with words and
// blanks, as seconds. The sign stays: what a time cannot be is said of the
// setting.
func timeOf(text string) (float64, error) {
	text = strings.TrimSpace(text)
	if _, err := strconv.ParseFloat(text, 64); err == nil {
		return 0, fmt.Errorf("%s has no unit: write %ss, %sms or %smin", text, text, text, text)
	}
	rest, negative := strings.CutPrefix(strings.TrimPrefix(text, "+"), "-")
	sum := 0.0
	for first := true; first || rest != ""; first = false {
		part := timePart.FindStringSubmatch(rest)
		if part == nil {
			return 0, noTime(text)
		}
		unit, known := timeUnits[strings.ToLower(part[2])]
		v, err := strconv.ParseFloat(part[1], 64)
		if !known || err != nil {
			return 0, noTime(text)
		}
		sum += v * unit
		rest = rest[len(part[0]):]
	}
	if sum >= longestTime {
		return 0, fmt.Errorf("%q is longer than 290 years", text)
	}
	sum = math.Round(sum*1e9) / 1e9 // whole nanoseconds, so that 300ms is 0.3
	if negative {
		sum = -sum
	}
	return sum, nil
}

func noTime(text string) error {
	return fmt.Errorf("%q is no time: write it as 45s, 250ms, 2min or 1h", text)
}
