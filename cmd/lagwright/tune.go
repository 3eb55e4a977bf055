package main

import (
	"context"
	"io"
	"os"
	"path/filepath"
	"strings"

	"github.com/spf13/cobra"

	"lagwright/cmd/lagwright/internal/report"
	"lagwright/fit"
	"lagwright/tune"
)

type tuneOptions struct {
	tune  tuneFlags
	spans logFlags // --input-span and --temp-span only
	plot  plotFlag
	whole bool
}

func newTune(c *console) *cobra.Command {
	var o tuneOptions
	cmd := &cobra.Command{
		Use:   "tune CARD...",
		Short: "Gains that hold for every plausible plant",
		Long: `Chooses gains from a model card: the best load rejection (smallest IAE) that
meets the requirement on the plausible plants, not only on the best fit. With
no requirement, Ms is held to 1.6. Several cards give one set, safe for all.
The setpoint weight is 1; rules that have another are listed with it.
P control leaves a permanent offset: it is listed, and taken only where it is
asked for with --controller p.
When nothing meets the requirement the nearest miss is written, with what
binds and which settling time, overshoot or other limit could be had instead;
that is exit code 4.
` + exitHelp,
		Example: `  lagwright tune card.json --settling 60s --overshoot 5% -o gains.json
  lagwright tune card.json --controller pi --ms 1.5 --input-max 10 --scan 100ms
  lagwright tune card.json --rule simc --json`,
		Args: needArgs(1, -1, "lagwright tune card.json -o gains.json"),
		RunE: func(cmd *cobra.Command, args []string) error { return runTune(cmd.Context(), c, &o, args) },
	}
	o.tune.add(cmd)
	o.spans.addSpans(cmd)
	cmd.Flags().BoolVar(&o.whole, "verbose", false, "list everything that was tried, all published rules too")
	o.plot.add(cmd, "the loop's answer to a setpoint step over the plausible plants")
	return cmd
}

func runTune(ctx context.Context, c *console, o *tuneOptions, args []string) error {
	if err := o.tune.requirement.check(); err != nil {
		return err
	}
	if err := c.refuseOverwriting(args, c.output, o.plot.path); err != nil {
		return err
	}
	var cards []*fit.Card
	for _, path := range args {
		card, err := c.readCard(path)
		if err != nil {
			return cardError(path, err)
		}
		cards = append(cards, card)
	}
	gains, err := tune.Tune(ctx, cards, o.tune.requirement.requirement, o.tune.with(c, &o.spans))
	if err != nil {
		return tuneError(err)
	}
	var out result = gains
	if o.whole {
		out = wholeGains{gains}
	}
	if err := c.deliver(out); err != nil {
		return err
	}
	if err := o.plot.write(c, func() (*report.Figure, error) { return stepFigure(cards[0], gains) }); err != nil {
		return err
	}
	return gainsVerdict(gains)
}

// wholeGains show everything that was tried.
type wholeGains struct{ *tune.Gains }

func (g wholeGains) WriteText(w io.Writer) error { return g.WriteWholeText(w) }

// cardError says what to do with a file that is no model card.
func cardError(path string, err error) error {
	name := filepath.Base(path)
	switch kind, _, _ := lagwrightFile(path); {
	case kind != "" && kind != "card":
		return inputErrorf("%s is a file of %s, not a model card: give the card that lagwright fit wrote", name, kind)
	case kind == "" && table(path):
		return inputErrorf("%s is not a model card; if it is a log, fit it first: lagwright fit %s -o card.json", name, name)
	}
	return err
}

// table tells a file that may be a log from one that is no file or was meant
// to be JSON.
func table(path string) bool {
	f, err := os.Open(path)
	if err != nil {
		return false
	}
	defer f.Close()
	var first [1]byte
	_, err = io.ReadFull(f, first[:])
	return err == nil && first[0] != '{'
}

// gainsVerdict is nil where the gains meet the requirement.
func gainsVerdict(g *tune.Gains) error {
	if g.Meets {
		return nil
	}
	return answerNof("the requirement is not met: %s", strings.Join(g.Reasons, "; "))
}
