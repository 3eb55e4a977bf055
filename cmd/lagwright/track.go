package main

import (
	"context"
	"path/filepath"

	"github.com/spf13/cobra"

	"lagwright/cmd/lagwright/internal/format"
	"lagwright/cmd/lagwright/internal/report"
	"lagwright/data"
	"lagwright/validate"
)

type trackOptions struct {
	log  logFlags
	fit  fitFlags
	plot plotFlag
}

func newTrack(c *console) *cobra.Command {
	var o trackOptions
	cmd := &cobra.Command{
		Use:   "track LOG...",
		Short: "Parameters run by run, with bounds: what drifted?",
		Long: `Fits the same structure to each run and puts gain, lags and dead time beside the
dates, with intervals; tests for a step and for a slope with few false alarms
over the whole history, and says in plain words what changed and where to look.
Logs are files, folders and globs.
` + exitHelp,
		Example: `  lagwright track bumps/ --structure chain2 -o drift.json
  lagwright track 'bumps/*.parquet' --plot drift.svg`,
		Args: needArgs(1, -1, "lagwright track bumps/"),
		RunE: func(cmd *cobra.Command, args []string) error { return runTrack(cmd.Context(), c, &o, args) },
	}
	o.log.add(cmd)
	o.fit.add(cmd)
	o.plot.add(cmd, "the parameters over the runs")
	return cmd
}

func runTrack(ctx context.Context, c *console, o *trackOptions, args []string) error {
	if err := c.refuseOverwriting(args, c.output, o.plot.path); err != nil {
		return err
	}
	files, err := o.log.listed(args)
	if err != nil {
		return err
	}
	runs, failed := o.readEach(ctx, c, files)
	if err := ctx.Err(); err != nil {
		return err
	}
	switch {
	case len(runs) == 0 && len(failed) == 1:
		return inputErrorf("%s", failed[0].Reason)
	case len(runs) == 0 && len(failed) > 1:
		return inputErrorf("none of %d files can be read, the first: %s", len(failed), failed[0].Reason)
	}
	options, err := o.fit.with(c, &o.log, nil)
	if err != nil {
		return err
	}
	progress, clear := c.progress("fitting")
	drift, err := validate.Track(ctx, runs, options, validate.TrackOptions{Workers: c.workers, Progress: progress})
	clear()
	switch {
	case err != nil && len(failed) > 0:
		return inputErrorf("%w; %s cannot be read, the first: %s", err, format.Count(len(failed), "file", "files"), failed[0].Reason)
	case err != nil:
		return fitError(err)
	}
	drift.Failed = append(failed, drift.Failed...)
	if err := c.deliver(drift); err != nil {
		return err
	}
	return o.plot.write(c, func() (*report.Figure, error) { return report.DriftFigure(drift), nil })
}

// readEach reads every file; one that cannot be read is listed and does not
// stop the others.
func (o *trackOptions) readEach(ctx context.Context, c *console, files []string) (runs []*data.Run, failed []validate.FailedRun) {
	for _, file := range files {
		more, err := o.log.read(ctx, c, file)
		if err != nil {
			failed = append(failed, validate.FailedRun{File: filepath.Base(file), Reason: err.Error()})
			continue
		}
		runs = append(runs, more...)
	}
	return runs, failed
}
