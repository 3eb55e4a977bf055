package tune

import (
	"errors"
	"fmt"
	"math"
	"regexp"
	"strconv"
	"strings"
	"sync"
	"time"
)

// timeUnits are the units of time as people write them, in lower case.
var timeUnits = map[string]time.Duration{}

func init() {
	for unit, words := range map[time.Duration]string{
		time.Nanosecond: "ns", time.Microsecond: "us µs μs", time.Millisecond: "ms msec msecs millisecond milliseconds",
		time.Second: "s sec secs second seconds", time.Minute: "m min mins minute minutes", time.Hour: "h hr hrs hour hours",
	} {
		for _, word := range strings.Fields(words) {
			timeUnits[word] = unit
		}
	}
}

// What a text is that [ParseTime] does not read.
var (
	ErrNoTime   = errors.New("no time")
	ErrLongTime = errors.New("longer than 290 years")
)

var timePart = sync.OnceValue(func() *regexp.Regexp {
	return regexp.MustCompile(`^\s*([0-9]+\.?[0-9]*|\.[0-9]+)\s*(\pL+)\.?\s*`)
})

// ParseTime reads a time as the command line and gains written out have it: 45s, 250ms,
// 2m, 25min, 2h, 1m30s, and the same with words and blanks. A sign in front stays. The
// error wraps [ErrNoTime], also of a number without a unit, or [ErrLongTime].
func ParseTime(text string) (time.Duration, error) {
	rest, negative := strings.CutPrefix(strings.TrimPrefix(strings.TrimSpace(text), "+"), "-")
	sum := 0.0 // ns
	for first := true; first || rest != ""; first = false {
		part := timePart().FindStringSubmatch(rest)
		if part == nil {
			return 0, fmt.Errorf("%q: %w", text, ErrNoTime)
		}
		unit, known := timeUnits[strings.ToLower(part[2])]
		v, err := strconv.ParseFloat(part[1], 64)
		if !known || err != nil {
			return 0, fmt.Errorf("%q: %w", text, ErrNoTime)
		}
		sum += v * float64(unit)
		rest = rest[len(part[0]):]
	}
	if sum >= math.MaxInt64 {
		return 0, fmt.Errorf("%q: %w", text, ErrLongTime)
	}
	if negative {
		sum = -sum
	}
	return time.Duration(math.Round(sum)), nil
}

// timeOf reads a time of gains written out as seconds. The sign stays: what a time
// cannot be is said of the setting.
func timeOf(text string) (float64, error) {
	text = strings.TrimSpace(text)
	if _, err := strconv.ParseFloat(text, 64); err == nil {
		return 0, fmt.Errorf("%s has no unit: write %ss, %sms or %smin", text, text, text, text)
	}
	d, err := ParseTime(text)
	switch {
	case errors.Is(err, ErrNoTime):
		return 0, fmt.Errorf("%q is no time: write it as 45s, 250ms, 2min or 1h", text)
	case err != nil:
		return 0, fmt.Errorf("%q is %w", text, ErrLongTime)
	}
	return float64(d) / float64(time.Second), nil
}
