package main

import (
	"context"
	"encoding/json"
	"fmt"
	"io"
	"time"

	"github.com/spf13/cobra"

	"lagwright/cmd/lagwright/internal/heap"
	"lagwright/cmd/lagwright/internal/report"
	"lagwright/data"
	"lagwright/fit"
)

type checkOptions struct {
	log       logFlags
	plot      plotFlag
	following bool
	every     time.Duration // between two looks at a log that is followed
}

func newCheck(c *console) *cobra.Command {
	o := checkOptions{every: followEvery}
	cmd := &cobra.Command{
		Use:   "check LOG...",
		Short: "What is in the log; can it support a fit?",
		Long: `Reads a log and says, while you are still on site, what is in it: rows, clock,
gaps, what was mended or left out, noise, drift, every bump, and for gain, lags
and dead time whether this log can give them, with the cure in numbers.

With --follow it watches one log while it grows, says in a line each time the
verdict changes, and ends with the report when everything is good, or at
Ctrl-C.
` + exitHelp,
		Example: `  lagwright check bump.csv
  lagwright check export.csv --temp-col TT-214 --plot log.png
  lagwright check bump.csv --follow
  lagwright check runs/ --json`,
		Args: needArgs(1, -1, "lagwright check bump.csv"),
		RunE: func(cmd *cobra.Command, args []string) error { return runCheck(cmd.Context(), c, &o, args) },
	}
	o.log.add(cmd)
	o.plot.add(cmd, "the first log")
	cmd.Flags().BoolVar(&o.following, "follow", false, "watch one log while it grows, until it is good")
	return cmd
}

// checkSchema is the schema of a check of several runs.
const checkSchema = "lagwright/check/1"

// checks is what is said of several runs.
type checks struct {
	Schema  string             `json:"schema"`
	Reports []*fit.CheckReport `json:"reports"`
}

func runCheck(ctx context.Context, c *console, o *checkOptions, args []string) error {
	if err := c.refuseOverwriting(args, c.output, o.plot.path); err != nil {
		return err
	}
	if o.following {
		if len(args) > 1 || o.plot.path != "" {
			return usageErrorf("--follow watches one log, and draws nothing")
		}
		return o.follow(ctx, c, args[0])
	}
	heap.Widen()
	files, err := o.log.expand(args)
	if err != nil {
		return err
	}
	all := checks{Schema: checkSchema}
	var first *data.Run
	var failed []error
	for _, file := range files {
		runs, reports, err := o.checkFile(ctx, c, file)
		if ctx.Err() != nil {
			return ctx.Err()
		}
		if err != nil {
			failed = append(failed, err)
		}
		if first == nil && len(runs) > 0 {
			first = runs[0]
		}
		all.Reports = append(all.Reports, reports...)
	}
	if len(all.Reports) == 0 {
		return severalFailed(c, failed, len(files))
	}
	if err := c.deliver(&all); err != nil {
		return err
	}
	if err := c.sketchLog(first, nil); err != nil {
		return err
	}
	err = o.plot.write(c, func() (*report.Figure, error) { return report.LogFigure(first, nil, nil), nil })
	if err != nil {
		return err
	}
	return severalFailed(c, failed, len(files))
}

// checkFile checks every run of a file; what could be checked before an error
// is returned with it.
func (o *checkOptions) checkFile(ctx context.Context, c *console, file string) ([]*data.Run, []*fit.CheckReport, error) {
	runs, err := o.log.read(ctx, c, file)
	if err != nil {
		return nil, nil, err
	}
	options, err := new(fitFlags).with(c, &o.log, nil)
	if err != nil {
		return nil, nil, err
	}
	var reports []*fit.CheckReport
	for _, run := range runs {
		r, err := fit.Check(ctx, run, options)
		if err != nil {
			return runs, reports, fitError(err)
		}
		reports = append(reports, r)
	}
	return runs, reports, nil
}

// severalFailed is the error of one log as it is; of several, each gets its
// line and the sum is the error.
func severalFailed(c *console, failed []error, of int) error {
	switch {
	case len(failed) == 0:
		return nil
	case of == 1:
		return failed[0]
	}
	for _, err := range failed {
		fmt.Fprintln(c.errOut, "lagwright: "+oneLine(err.Error()))
	}
	return inputErrorf("%d of %d logs cannot be used", len(failed), of)
}

func (c *checks) WriteJSON(w io.Writer) error {
	e := json.NewEncoder(w)
	e.SetIndent("", "  ")
	return e.Encode(c)
}

func (c *checks) WriteText(w io.Writer) error {
	for i, r := range c.Reports {
		if i > 0 {
			fmt.Fprintln(w)
		}
		if err := r.WriteText(w); err != nil {
			return err
		}
	}
	return nil
}
