package main

import (
	"strings"

	"github.com/spf13/cobra"

	"lagwright/fit"
)

type planOptions struct {
	options fit.PlanOptions
}

func newPlan(c *console) *cobra.Command {
	var o planOptions
	cmd := &cobra.Command{
		Use:   "plan CARD",
		Short: "The next bump: size, duration, sampling for a wanted bound",
		Long: `Proposes the next bump test from what a card knows of plant and noise: the
smallest step whose answer is expected to give the wanted bounds, how long to
hold it, how fast to log, and the highest temperature it would reach. A rough
card, from a first short bump, will do.
` + exitHelp,
		Example: `  lagwright plan card.json
  lagwright plan card.json --gain-within 3% --temp-max 120 --input-max 8`,
		Args: needArgs(1, 1, "lagwright plan card.json"),
		RunE: func(_ *cobra.Command, args []string) error { return runPlan(c, &o, args[0]) },
	}
	fs, p := cmd.Flags(), &o.options
	valueFlag(fs, &p.Gain, "gain-within", "PERCENT", "10%", "wanted half-width of the gain's interval", share)
	valueFlag(fs, &p.Lags, "lags-within", "PERCENT", "10%", "wanted half-width of the sum of lags", share)
	valueFlag(fs, &p.DeadTime, "dead-time-within", "PERCENT", "5%", "wanted half-width of the dead time, as a share of dead time and lags together", share)
	optionalFlag(fs, &p.Input, "operating-input", "NUMBER", "input to bump from; the middle of the card's range where not given", number)
	optionalFlag(fs, &p.InputMin, "input-min", "NUMBER", "lowest input allowed", number)
	optionalFlag(fs, &p.InputMax, "input-max", "NUMBER", "highest input allowed", number)
	optionalFlag(fs, &p.TempMax, "temp-max", "NUMBER", "temperature that must never be passed", number)
	valueFlag(fs, &p.Sampling, "sampling", "DURATION", "", "the logger's shortest interval", positiveSeconds)
	return cmd
}

func runPlan(c *console, o *planOptions, path string) error {
	if err := c.refuseOverwriting([]string{path}, c.output); err != nil {
		return err
	}
	card, err := c.readCard(path)
	if err != nil {
		return err
	}
	options := o.options
	options.Tool = tool()
	plan, err := fit.PlanBump(card, options)
	if err != nil {
		return inputError{err}
	}
	if err := o.within(plan); err != nil {
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

// within refuses a plan that begins or goes outside the limits asked for: it
// would be followed at a live heater.
func (o *planOptions) within(p *fit.Plan) error {
	for _, u := range []float64{p.From, p.To} {
		low, high := o.options.InputMin, o.options.InputMax
		if low != nil && u < *low || high != nil && u > *high {
			return usageErrorf("a bump from %g to %g %s leaves the input limits; give --operating-input inside them", p.From, p.To, p.Units.Input)
		}
	}
	return nil
}
