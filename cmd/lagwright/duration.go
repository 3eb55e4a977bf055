package main

import (
	"errors"
	"fmt"
	"math"
	"regexp"
	"strings"
	"time"
)

// durationUnits are the units of time as people write them, in lower case.
var durationUnits = map[string]time.Duration{}

func init() {
	for unit, words := range map[time.Duration]string{
		time.Nanosecond: "ns", time.Microsecond: "us µs μs", time.Millisecond: "ms msec msecs millisecond milliseconds",
		time.Second: "s sec secs second seconds", time.Minute: "m min mins minute minutes", time.Hour: "h hr hrs hour hours",
	} {
		for _, word := range strings.Fields(words) {
			durationUnits[word] = unit
		}
	}
}

var durationPart = regexp.MustCompile(`^\s*([0-9]+\.?[0-9]*|\.[0-9]+)\s*(\pL+)\.?\s*`)

// duration reads 45s, 250ms, 2m, 1h, 1m30s, and the same with words and blanks:
// 20 min, 100sec, 2 hours.
func duration(s string) (time.Duration, error) {
	rest, negative := strings.CutPrefix(strings.TrimPrefix(strings.TrimSpace(s), "+"), "-")
	if v, err := bareNumber(rest); err == nil {
		if v == 0 {
			return 0, nil
		}
		return 0, fmt.Errorf("want a unit: %ss, %sms or %smin", s, s, s)
	}
	sum := 0.0 // ns
	for first := true; first || rest != ""; first = false {
		part := durationPart.FindStringSubmatch(rest)
		if part == nil {
			return 0, errors.New("want a duration such as 45s, 250ms, 2min or 1h")
		}
		unit, known := durationUnits[strings.ToLower(part[2])]
		v, err := bareNumber(part[1])
		if !known || err != nil {
			return 0, errors.New("want a duration such as 45s, 250ms, 2min or 1h")
		}
		sum += v * float64(unit)
		rest = rest[len(part[0]):]
	}
	switch {
	case negative:
		return 0, errors.New("want a duration that is not negative")
	case sum >= math.MaxInt64:
		return 0, errors.New("want a duration below 290 years")
	}
	return time.Duration(math.Round(sum)), nil
}

// seconds reads a duration as seconds.
func seconds(s string) (float64, error) {
	d, err := duration(s)
	return d.Seconds(), err
}

func positiveSeconds(s string) (float64, error) {
	v, err := seconds(s)
	if err == nil && v == 0 {
		err = errors.New("want a duration above zero")
	}
	return v, err
}
