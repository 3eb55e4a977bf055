package main

import (
	"errors"
	"strings"

	"github.com/spf13/cobra"

	"lagwright/tune"
)

// tuneFlags say how to choose gains.
type tuneFlags struct {
	requirement requirementFlags
	spelling    spellingFlags
	options     tune.Options
}

func (t *tuneFlags) add(cmd *cobra.Command) {
	t.requirement.add(cmd)
	fs, o := cmd.Flags(), &t.options
	choiceFlag(cmd, &o.Controller, "controller", "", "what to tune; the better of pi and pid where not given (p leaves an offset)", "p", "pi", "pid")
	choiceFlagFunc(cmd, &o.Rule, "rule", "NAME", "", "a published rule instead of the synthesis: "+strings.Join(ruleNames(), ", "), ruleNames())
	valueFlag(fs, &o.TauC, "tau-c", "DURATION", "", "closed-loop time constant for rules that leave it open", positiveSeconds)
	valueFlag(fs, &o.Assurance, "assurance", "PERCENT", "95%", "share of plausible plants on which the requirement must hold", share)
	optionalFlag(fs, &o.Operating, "operating-input", "NUMBER", "input about which the heater will run", number)
	t.spelling.add(cmd)
}

func ruleNames() []string {
	var names []string
	for _, r := range tune.Rules() {
		names = append(names, r.Name)
	}
	return names
}

// with completes the options by what stands everywhere.
func (t *tuneFlags) with(c *console, l *logFlags) tune.Options {
	o := t.options
	o.Rand, o.Workers, o.Tool = c.rand, c.workers, tool()
	s := t.spelling.with(l)
	o.InputSpan, o.TempSpan = s.InputSpan, s.TempSpan
	o.Band, o.Rate, o.Minutes = s.Band, s.Rate, s.Minutes
	return o
}

// tuneError tells a card that cannot be used from a wrong option.
func tuneError(err error) error {
	if errors.Is(err, tune.ErrUnusable) {
		return inputError{err}
	}
	return usageError{err}
}

// spellingFlags say in which words and units a controller wants its numbers.
type spellingFlags struct {
	spelling tune.Spelling
}

func (s *spellingFlags) add(cmd *cobra.Command) {
	fs := cmd.Flags()
	fs.BoolVar(&s.spelling.Band, "band", false, "proportional band instead of gain")
	fs.BoolVar(&s.spelling.Rate, "repeats", false, "integral as repeats per time instead of time")
	fs.BoolVar(&s.spelling.Minutes, "minutes", false, "minutes instead of seconds")
}

func (s *spellingFlags) with(l *logFlags) tune.Spelling {
	out := s.spelling
	out.InputSpan, out.TempSpan = l.options.InputSpan, l.options.TempSpan
	return out
}
