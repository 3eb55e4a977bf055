package main

import (
	"errors"
	"strings"

	"github.com/spf13/cobra"

	"lagwright/fit"
)

type planOptions struct {
	options   fit.PlanOptions
	guess     fit.Guess
	inputUnit string
}

// guessFlags are what a plan without a card needs to know.
var guessFlags = []string{"gain", "lag", "dead-time", "noise", "operating-input", "operating-temp"}

func newPlan(c *console) *cobra.Command {
	var o planOptions
	cmd := &cobra.Command{
		Use:   "plan [CARD]",
		Short: "The next bump: size, duration, sampling for a wanted bound",
		Long: `Proposes the next bump test from what a card knows of plant and noise: the
smallest step whose answer is expected to give the wanted bounds, how long to
hold it, how fast to log, and the highest temperature it would reach. A rough
card, from a first short bump, will do.

Without a card it plans the first bump from a guess: --gain, --lag, --dead-time,
--noise, and --operating-input and --operating-temp to start from. The highest
temperature then allows for a gain half as large again as guessed.
` + exitHelp,
		Example: `  lagwright plan card.json
  lagwright plan card.json --gain-within 3% --temp-max 120 --input-max 8
  lagwright plan --gain 12 --lag 40s --dead-time 5s --noise 0.2 \
      --operating-input 4 --operating-temp 70 --temp-max 120`,
		Args: needArgs(0, 1, "lagwright plan card.json"),
		RunE: func(cmd *cobra.Command, args []string) error { return runPlan(cmd, c, &o, args) },
	}
	fs, p, g := cmd.Flags(), &o.options, &o.guess
	valueFlag(fs, &p.Gain, "gain-within", "PERCENT", "10%", "wanted half-width of the gain's interval", share)
	valueFlag(fs, &p.Lags, "lags-within", "PERCENT", "10%", "wanted half-width of the sum of lags", share)
	valueFlag(fs, &p.DeadTime, "dead-time-within", "PERCENT", "5%", "wanted half-width of the dead time, as a share of dead time and lags together", share)
	optionalFlag(fs, &p.Input, "operating-input", "NUMBER", "input to bump from; the middle of the card's range where not given", number)
	optionalFlag(fs, &p.InputMin, "input-min", "NUMBER", "lowest input allowed", number)
	optionalFlag(fs, &p.InputMax, "input-max", "NUMBER", "highest input allowed", number)
	optionalFlag(fs, &p.TempMax, "temp-max", "TEMP", "temperature that must never be passed, °C (or 203F)", temperature)
	valueFlag(fs, &p.Sampling, "sampling", "DURATION", "", "the logger's shortest interval", positiveSeconds)
	valueFlag(fs, &g.Gain, "gain", "NUMBER", "", "without a card: guessed gain, K per unit of input", guessedGain)
	valueFlag(fs, &g.Lag, "lag", "DURATION", "", "without a card: guessed lag", positiveSeconds)
	valueFlag(fs, &g.DeadTime, "dead-time", "DURATION", "", "without a card: guessed dead time", seconds)
	valueFlag(fs, &g.Noise, "noise", "DEGREES", "", "without a card: scatter of the temperature at rest, one standard deviation, K (or 0.3F)", positiveDifference)
	valueFlag(fs, &g.Temperature, "operating-temp", "TEMP", "", "without a card: temperature at the operating input, °C (or 203F)", temperature)
	choiceFlag(cmd, &o.inputUnit, "input-unit", "V", "without a card: unit of the input", "V", "%", "mA")
	return cmd
}

func runPlan(cmd *cobra.Command, c *console, o *planOptions, args []string) error {
	if err := c.refuseOverwriting(args, c.output); err != nil {
		return err
	}
	o.options.Tool = tool()
	plan, err := o.plan(cmd, c, args)
	switch {
	case errors.Is(err, fit.ErrOption):
		return usageErrorf("%w (--operating-input)", err)
	case err != nil:
		return err
	}
	if err := c.deliver(plan); err != nil {
		return err
	}
	if !plan.Meets {
		return answerNof("the wanted bounds cannot be expected: %s", strings.Join(plan.Reasons, "; "))
	}
	return nil
}

// plan plans from the card, or from a guess where there is none.
func (o *planOptions) plan(cmd *cobra.Command, c *console, args []string) (*fit.Plan, error) {
	var given, missing []string
	for _, name := range guessFlags {
		if cmd.Flags().Changed(name) {
			given = append(given, "--"+name)
		} else {
			missing = append(missing, "--"+name)
		}
	}
	if len(args) == 0 {
		if len(missing) > 0 {
			return nil, usageErrorf("give a card, or guess the heater for its first bump: %s missing", strings.Join(missing, ", "))
		}
		if err := c.agreeOnInput("the heater guessed (--input-unit)", o.inputUnit); err != nil {
			return nil, err
		}
		o.guess.Units = fit.CardUnits{Time: "s", Input: o.inputUnit, Temperature: "degC"}
		return fit.PlanFirst(o.guess, o.options)
	}
	for _, flag := range given {
		if flag != "--operating-input" {
			return nil, usageErrorf("%s is a guess, which the card takes the place of; leave one of them out", flag)
		}
	}
	card, err := c.readCard(args[0])
	if err != nil {
		return nil, err
	}
	plan, err := fit.PlanBump(card, o.options)
	if err != nil && !errors.Is(err, fit.ErrOption) {
		return nil, inputError{err}
	}
	return plan, err
}

// guessedGain reads a gain; a heater that answers not at all needs no plan.
func guessedGain(s string) (float64, error) {
	v, err := inputNumber(s, "K/", "", "12")
	if err == nil && v == 0 {
		err = errors.New("want a number other than zero")
	}
	return v, err
}
