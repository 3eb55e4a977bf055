package main

import (
	"context"
	"path/filepath"
	"strings"

	"github.com/spf13/cobra"
)

type runOptions struct{ job jobFlags }

func newRun(c *console) *cobra.Command {
	var o runOptions
	cmd := &cobra.Command{
		Use:   "run LOG",
		Short: "The whole job on your log: model, gains, replay, page",
		Long: `Reads the log of a bump test, fits, tunes and replays it under the new gains,
and writes a folder named after the log (-o names another) with card.json,
gains.json, replay.json, report.html and the figures. A log without setpoint is
replayed with a step of a quarter of the range of temperature it shows. A log
made in manual, or without setpoint, is judged only by --setpoint or
--setpoint-step.
` + exitHelp,
		Example: `  lagwright run bump.csv --settling 60s --overshoot 5% --input-max 10
  lagwright run export.csv --time-col t_s --input-col u --temp-col y -o oven3`,
		Args: needArgs(1, 1, "lagwright run bump.csv"),
		RunE: func(cmd *cobra.Command, args []string) error { return runRun(cmd.Context(), c, &o, args[0]) },
	}
	o.job.add(cmd)
	return cmd
}

func runRun(ctx context.Context, c *console, o *runOptions, log string) error {
	if err := o.job.tune.requirement.check(); err != nil {
		return err
	}
	folder, err := c.outputFolder(folderFor(log))
	if err != nil {
		return err
	}
	runs, err := o.job.log.readAll(ctx, c, []string{log})
	if err != nil {
		return err
	}
	for _, run := range runs {
		if err := c.agreeOnInput(run.Source.File, run.Units.Input); err != nil {
			return err
		}
	}
	j, err := c.work(ctx, &o.job, runs, runs, nil)
	if err != nil {
		return err
	}
	if err := j.writeFolder(folder, commandLine(c.args), nil); err != nil {
		return err
	}
	return j.finish(c, folder)
}

// folderFor names the folder after the log, without its endings.
func folderFor(log string) string {
	if log == "-" {
		return "lagwright-run"
	}
	base := filepath.Base(log)
	for _, ending := range []string{".gz", ".zst"} {
		base = strings.TrimSuffix(base, ending)
	}
	name := strings.TrimSuffix(base, filepath.Ext(base))
	if name == "" || name == base {
		return base + "-lagwright" // never the name of the log itself
	}
	return name
}
