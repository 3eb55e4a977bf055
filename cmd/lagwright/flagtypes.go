package main

import (
	"errors"
	"fmt"
	"regexp"
	"slices"
	"strconv"
	"strings"
	"sync"

	"github.com/spf13/cobra"
	"github.com/spf13/pflag"

	"lagwright/data"
)

// parsed is a flag whose text goes through a function.
type parsed struct {
	kind string // the value's name in the help
	text string
	set  func(string) error
}

func (p *parsed) Set(s string) error {
	if err := p.set(s); err != nil {
		return err
	}
	p.text = s
	return nil
}
func (p *parsed) String() string { return p.text }
func (p *parsed) Type() string   { return p.kind }

// valueFlag defines a flag that parse turns into *dst. shown is the default as
// the help shows it.
func valueFlag[T any](fs *pflag.FlagSet, dst *T, name, kind, shown, usage string, parse func(string) (T, error)) {
	fs.Var(&parsed{kind: kind, text: shown, set: func(s string) (err error) {
		v, err := parse(s)
		if err == nil {
			*dst = v
		}
		return err
	}}, name, usage)
}

// optionalFlag defines a flag that leaves *dst nil until it is given.
func optionalFlag[T any](fs *pflag.FlagSet, dst **T, name, kind, usage string, parse func(string) (T, error)) {
	valueFlag(fs, dst, name, kind, "", usage, func(s string) (*T, error) {
		v, err := parse(s)
		return &v, err
	})
}

// choiceFlag defines a flag that takes one of a few words, shown where not given.
func choiceFlag(cmd *cobra.Command, dst *string, name, shown, usage string, words ...string) {
	choiceFlagFunc(cmd, dst, name, strings.Join(words, "|"), shown, usage, words)
}

// choiceFlagFunc is choiceFlag with a name in place of lists too long to show.
func choiceFlagFunc(cmd *cobra.Command, dst *string, name, kind, shown, usage string, words []string) {
	*dst = shown
	valueFlag(cmd.Flags(), dst, name, kind, shown, usage, func(s string) (string, error) {
		if !slices.Contains(words, s) {
			return "", fmt.Errorf("want one of %s", strings.Join(words, ", "))
		}
		return s, nil
	})
	// The error says that the flag is defined twice, which the test of the tree shows.
	_ = cmd.RegisterFlagCompletionFunc(name, cobra.FixedCompletions(words, cobra.ShellCompDirectiveNoFileComp))
}

// temperature reads 300, 300C, 572F or 573K as °C.
func temperature(s string) (float64, error) {
	text, unit := cutDegrees(s)
	v, err := bareNumber(text)
	if err != nil {
		return 0, errors.New("want a temperature such as 95, 95C or 203F")
	}
	switch unit {
	case "F":
		v = (v - 32) / 1.8
	case "K":
		v -= 273.15
	}
	return v, nil
}

// difference reads 5, 5K, 5C or 9F as a difference in K.
func difference(s string) (float64, error) {
	text, unit := cutDegrees(s)
	v, err := bareNumber(text)
	if err != nil {
		return 0, errors.New("want a difference of temperature such as 5, 5K or 9F")
	}
	if unit == "F" {
		v /= 1.8
	}
	return v, nil
}

func positiveDifference(s string) (float64, error) {
	v, err := difference(s)
	if err == nil && v <= 0 {
		err = errors.New("want a difference above zero")
	}
	return v, err
}

// cutDegrees takes the unit of a temperature off: C, F, K or none.
func cutDegrees(s string) (number, unit string) {
	s = strings.TrimSpace(s)
	for _, u := range []string{"C", "F", "K"} {
		if text, ok := strings.CutSuffix(strings.ToUpper(s), u); ok {
			return strings.TrimSpace(strings.TrimSuffix(strings.TrimSuffix(text, "DEG"), "°")), u
		}
	}
	return s, ""
}

func wholeNumber(s string) (int64, error) {
	v, err := strconv.ParseInt(s, 10, 64)
	if err != nil {
		err = errors.New("want a whole number such as 7")
	}
	return v, err
}

// count reads a whole number from 1 to a million.
func count(s string) (int, error) {
	v, err := strconv.Atoi(s)
	if err != nil || v < 1 || v > 1e6 {
		return 0, errors.New("want a whole number from 1 on")
	}
	return v, nil
}

// percent reads 5% as 5. A bare number above 1 is taken for percent; between 0
// and 1 it could be either.
func percent(s string) (float64, error) {
	digits, signed := strings.CutSuffix(strings.TrimSpace(s), "%")
	v, err := bareNumber(digits)
	switch {
	case err != nil || v < 0:
		return 0, errors.New("want a percentage such as 5%")
	case !signed && v > 0 && v <= 1:
		return 0, fmt.Errorf("is it %s%% or %s%%? write the percent sign", digits, strconv.FormatFloat(100*v, 'g', 10, 64))
	}
	return v, nil
}

// share reads 95% or 0.95 as 0.95; it lies strictly between 0 and 1.
func share(s string) (float64, error) {
	digits, signed := strings.CutSuffix(strings.TrimSpace(s), "%")
	v, err := bareNumber(digits)
	if signed || v > 1 {
		v /= 100
	}
	if err != nil || v <= 0 || v >= 1 {
		return 0, errors.New("want a percentage above 0% and below 100%, such as 95%")
	}
	return v, nil
}

var spanText = sync.OnceValue(func() *regexp.Regexp {
	return regexp.MustCompile(`^\s*([-+0-9.eE]+?)\s*\.\.\s*([-+]?[0-9.]+(?:[eE][-+]?[0-9]+)?)\s*([^\s\d].*)?$`)
})

// span reads 0..10V, 4..20mA, -20..180C.
func span(s string) (data.Span, error) {
	bad := errors.New("want low..high with a unit, such as 0..10V or 0..200C")
	m := spanText().FindStringSubmatch(s)
	if m == nil {
		return data.Span{}, bad
	}
	low, errLow := bareNumber(m[1])
	high, errHigh := bareNumber(m[2])
	if errLow != nil || errHigh != nil {
		return data.Span{}, bad
	}
	if low >= high {
		return data.Span{}, errors.New("want the low end first, and the high end above it")
	}
	return data.Span{Low: low, High: high, Unit: strings.TrimSpace(m[3])}, nil
}
