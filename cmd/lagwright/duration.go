package main

import (
	"errors"
	"fmt"
	"strings"
	"time"

	"lagwright/tune"
)

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
	d, err := tune.ParseTime(s)
	switch {
	case errors.Is(err, tune.ErrNoTime):
		return 0, errors.New("want a duration such as 45s, 250ms, 2min or 1h")
	case negative:
		return 0, errors.New("want a duration that is not negative")
	case err != nil:
		return 0, errors.New("want a duration below 290 years")
	}
	return d, nil
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
