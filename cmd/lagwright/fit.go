package main

import (
	"context"

	"github.com/spf13/cobra"

	"lagwright/cmd/lagwright/internal/report"
	"lagwright/data"
	"lagwright/fit"
)

type fitOptions struct {
	log  logFlags
	fit  fitFlags
	plot plotFlag
}

func newFit(c *console) *cobra.Command {
	var o fitOptions
	cmd := &cobra.Command{
		Use:   "fit LOG...",
		Short: "Models with bounds from the log of a bump test",
		Long: `Fits lag chains to a log and writes a model card: every structure tried, gain,
lags and dead time with their intervals, the noise, a sample of plausible
plants, warnings. Several logs give one joint fit: the same plant, each log
with its own baseline, drift and noise.
` + exitHelp,
		Example: `  lagwright fit bump.csv -o card.json
  lagwright fit bump.csv --structure chain2 --fix lag2=0.8 --plot fit.svg
  lagwright fit monday.csv tuesday.parquet --confidence 90% --json`,
		Args: needArgs(1, -1, "lagwright fit bump.csv -o card.json"),
		RunE: func(cmd *cobra.Command, args []string) error { return runFit(cmd.Context(), c, &o, args) },
	}
	o.log.add(cmd)
	o.fit.add(cmd)
	o.plot.add(cmd, "the log, the fit and its band")
	return cmd
}

func runFit(ctx context.Context, c *console, o *fitOptions, args []string) error {
	if err := c.refuseOverwriting(args, c.output, o.plot.path); err != nil {
		return err
	}
	runs, err := o.log.readAll(ctx, c, args)
	if err != nil {
		return err
	}
	card, err := c.fit(ctx, &o.log, &o.fit, runs)
	if err != nil {
		return err
	}
	if err := c.deliver(card); err != nil {
		return err
	}
	if err := c.sketchFit(card, runs[0]); err != nil {
		return err
	}
	return o.plot.write(c, func() (*report.Figure, error) { return fitFigure(card, runs[0]) })
}

// fit fits with a progress bar.
func (c *console) fit(ctx context.Context, l *logFlags, f *fitFlags, runs []*data.Run) (*fit.Card, error) {
	progress, clear := c.progress("fitting")
	defer clear()
	options, err := f.with(c, l, progress)
	if err != nil {
		return nil, err
	}
	card, err := fit.Fit(ctx, runs, options)
	if err != nil {
		return nil, fitError(err)
	}
	return card, nil
}
