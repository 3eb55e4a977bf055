package main

import (
	"cmp"
	"errors"
	"fmt"
	"regexp"
	"strings"
	"sync"

	"github.com/spf13/cobra"

	"lagwright/fit"
	"lagwright/ident"
)

// fitFlags say how to fit.
type fitFlags struct {
	options fit.Options
}

func (f *fitFlags) add(cmd *cobra.Command) {
	fs, o := cmd.Flags(), &f.options
	choiceFlagFunc(cmd, &o.Structure, "structure", "NAME", "", "fit this structure alone: "+strings.Join(structureNames(), ", "), structureNames())
	fs.Var(&parsed{kind: "NAME=VALUE", set: f.fixOne}, "fix", "hold a parameter at a known value, such as lag2=0.05; may be repeated")
	choiceFlag(cmd, &o.Noise, "noise", "auto", "white: plain least squares on the simulated output", "auto", "white")
	choiceFlag(cmd, &o.Drift, "drift", "auto", "linear drift of the baseline", "auto", "none", "linear")
	choiceFlag(cmd, &o.Initial, "initial", "auto", "at rest at the first input; at rest at an unknown earlier input; free states", "auto", "rest", "earlier", "free")
	f.addConfidence(cmd)
	valueFlag(fs, &o.Plants, "plants", "COUNT", "200", "plausible plants kept in the card", count)
}

func (f *fitFlags) addConfidence(cmd *cobra.Command) {
	valueFlag(cmd.Flags(), &f.options.Confidence, "confidence", "PERCENT", "95%", "level of every interval", share)
}

func structureNames() []string {
	var names []string
	for _, s := range ident.Structures() {
		names = append(names, s.String())
	}
	return names
}

var fixName = sync.OnceValue(func() *regexp.Regexp {
	return regexp.MustCompile(`^(gain|lag[1-8]|dead_time)$`)
})

// fixOne reads one NAME=VALUE, or several with commas between.
func (f *fitFlags) fixOne(s string) error {
	for part := range strings.SplitSeq(s, ",") {
		name, text, ok := strings.Cut(strings.TrimSpace(part), "=")
		if !ok || !fixName().MatchString(name) {
			return errors.New("want NAME=VALUE with gain, lag1, lag2, … or dead_time, such as lag2=0.05")
		}
		v, err := fixedValue(name, text)
		if err != nil {
			return fmt.Errorf("%s: %w", name, err)
		}
		if f.options.Fix == nil {
			f.options.Fix = map[string]float64{}
		}
		f.options.Fix[name] = v
	}
	return nil
}

// fixedValue reads the value of a parameter: a time without a unit is seconds.
func fixedValue(name, text string) (float64, error) {
	v, err := bareNumber(text)
	if err == nil || name == "gain" {
		return v, err
	}
	return seconds(text)
}

// with completes the options by what the other flags say.
func (f *fitFlags) with(c *console, l *logFlags, progress func(done, total int)) (fit.Options, error) {
	o := f.options
	law, err := ident.ParseLaw(cmp.Or(l.inputLaw, "linear"))
	if err != nil {
		return o, usageError{err}
	}
	o.Law = law
	o.BumpInstant = l.bumpInstant
	o.Rand, o.Workers, o.Tool = c.rand, c.workers, tool()
	o.Progress = progress
	return o, nil
}

// fitError tells a wrong option from a log that cannot be used.
func fitError(err error) error {
	if errors.Is(err, fit.ErrOption) {
		return usageError{err}
	}
	return inputError{err}
}
