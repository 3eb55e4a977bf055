package main

import (
	"errors"
	"fmt"
	"math"
	"regexp"
	"strconv"
	"strings"
	"sync"

	"github.com/spf13/pflag"
)

// inputUnits are the units an input may have, as people write them.
var inputUnits = map[string]string{
	"V": "V", "v": "V", "volt": "V", "volts": "V", "Volt": "V", "Volts": "V",
	"%": "%", "percent": "%", "Percent": "%", "pct": "%",
	"mA": "mA", "ma": "mA", "MA": "mA",
}

// inputFlags are the flags whose number is one of the input, each with what its
// unit has around that of the input.
var inputFlags = map[string]struct{ before, after string }{
	"input-min": {}, "input-max": {}, "operating-input": {}, "input-rate": {after: "/s"}, "gain": {before: "K/"},
}

// unitless are flags read by number all the same.
var unitless = map[string]string{"damping": "0.7", "ms": "1.6"}

var leadingNumber = sync.OnceValue(func() *regexp.Regexp {
	return regexp.MustCompile(`^[-+]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][-+]?[0-9]+)?`)
})

// cutUnit parts a number from what stands behind it.
func cutUnit(s string) (number, unit string) {
	s = strings.TrimSpace(s)
	number = leadingNumber().FindString(s)
	return number, strings.TrimSpace(s[len(number):])
}

// inputNumber reads a number with the unit of the input, which has before and
// after around it, or without. Whether it is the unit of the log is not known
// here, see agreeOnInput.
func inputNumber(s, before, after, example string) (float64, error) {
	digits, unit := cutUnit(s)
	v, err := bareNumber(digits)
	if err == nil && unit != "" {
		_, err = inputUnit(unit, before, after)
	}
	if err != nil {
		return 0, fmt.Errorf("want a number such as %s, with the unit of the input (%sV%s, %s%%%s, %smA%s) or without", example, before, after, before, after, before, after)
	}
	return v, nil
}

// inputUnit takes away what stands around the unit of the input.
func inputUnit(unit, before, after string) (string, error) {
	inner, front := strings.CutPrefix(unit, before)
	inner, back := strings.CutSuffix(inner, after)
	known, ok := inputUnits[strings.TrimSpace(inner)]
	if !front || !back || !ok {
		return "", fmt.Errorf("unit %q is not one of the input", unit)
	}
	return known, nil
}

// number reads a finite number, with the unit of the input or without.
func number(s string) (float64, error) { return inputNumber(s, "", "", "0.5") }

// positiveNumber reads a rate of the input above zero.
func positiveNumber(s string) (float64, error) {
	v, err := inputNumber(s, "", "/s", "0.5")
	if err == nil && v <= 0 {
		err = errors.New("want a number above zero")
	}
	return v, err
}

// bareNumber reads a finite number with no unit.
func bareNumber(s string) (float64, error) {
	v, err := strconv.ParseFloat(strings.TrimSpace(s), 64)
	if err != nil || math.IsNaN(v) || math.IsInf(v, 0) || strings.ContainsAny(s, "_xXpP") {
		return 0, errors.New("want a number such as 0.5")
	}
	return v, nil
}

// checkUnitless refuses a unit on a flag that has none.
func checkUnitless(flags *pflag.FlagSet) error {
	for name, example := range unitless {
		if f := flags.Lookup(name); f != nil && f.Changed {
			if _, unit := cutUnit(f.Value.String()); unit != "" {
				return usageErrorf("--%s %s: want a number such as %s, without a unit", name, f.Value, example)
			}
		}
	}
	return nil
}

// agreeOnInput holds the units that were typed against the unit of the input of
// a card or a log, once it is known.
func (c *console) agreeOnInput(of, unit string) (err error) {
	if c.flags == nil || unit == "" {
		return nil
	}
	c.flags.VisitAll(func(f *pflag.Flag) {
		form, ok := inputFlags[f.Name]
		if !ok || !f.Changed || err != nil {
			return
		}
		_, typed := cutUnit(f.Value.String())
		if typed == "" {
			return
		}
		if got, wrong := inputUnit(typed, form.before, form.after); wrong == nil && got != unit {
			err = usageErrorf("--%s %s is in %s, but the input of %s is in %s; give it in %s", f.Name, f.Value, got, of, unit, form.before+unit+form.after)
		}
	})
	return err
}
