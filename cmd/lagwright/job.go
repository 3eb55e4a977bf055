package main

import (
	"cmp"
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"

	"github.com/spf13/cobra"

	"lagwright/cmd/lagwright/internal/atomicfile"
	"lagwright/cmd/lagwright/internal/report"
	"lagwright/data"
	"lagwright/fit"
	"lagwright/tune"
	"lagwright/validate"
)

// jobFlags are those of the whole job.
type jobFlags struct {
	log  logFlags
	fit  fitFlags
	tune tuneFlags

	setpoint *float64 // of the replay, where the log has none
}

func (f *jobFlags) add(cmd *cobra.Command) {
	f.log.add(cmd)
	f.fit.add(cmd)
	f.tune.add(cmd)
	optionalFlag(cmd.Flags(), &f.setpoint, "setpoint", "TEMP", "setpoint of the replay, where the log has none, °C (or 203F)", temperature)
}

// job is the whole way from a log to a page.
type job struct {
	bump   []*data.Run // what the model is fitted to
	card   *fit.Card
	gains  *tune.Gains
	replay *validate.Replay
	drift  *validate.Drift
	curves []*fit.Curves      // beside bump
	checks []*fit.CheckReport // beside bump
	loop   *report.Loop
}

// work goes the whole way. past are the runs to replay, made under logged
// gains where those are not nil.
func (c *console) work(ctx context.Context, f *jobFlags, bump, past []*data.Run, logged *tune.Gains) (*job, error) {
	card, err := c.fit(ctx, &f.log, &f.fit, bump)
	if err != nil {
		return nil, err
	}
	j := &job{bump: bump, card: card}
	if err := j.layCurves(); err != nil {
		return nil, err
	}
	options, err := f.fit.with(c, &f.log, nil)
	if err != nil {
		return nil, err
	}
	if err := j.check(ctx, options); err != nil {
		return nil, err
	}
	j.gains, err = tune.Tune(ctx, []*fit.Card{card}, f.tune.requirement.requirement, f.tune.with(c, &f.log))
	if err != nil {
		return nil, tuneError(err)
	}
	if j.loop, err = report.LoopOf(card, j.gains); err != nil {
		return nil, err
	}
	progress, clear := c.progress("replaying")
	defer clear()
	j.replay, err = validate.ReplayRuns(ctx, card, past, j.gains, validate.Options{
		Workers:      c.workers,
		Setpoint:     f.setpoint,
		SetpointStep: f.tune.requirement.requirement.SetpointStep,
		LoggedGains:  logged,
		Requirement:  j.gains.Requirement,
		Confidence:   f.fit.options.Confidence,
		Traces:       true,
		Tool:         tool(),
		Progress:     progress,
	})
	if err != nil {
		return nil, inputError{err}
	}
	return j, nil
}

// layCurves lays the model beside every run it was fitted to.
func (j *job) layCurves() error {
	for i, run := range j.bump {
		curves, err := j.card.Curves(run, i)
		if err != nil {
			return inputError{err}
		}
		j.curves = append(j.curves, curves)
	}
	return nil
}

// check judges every run it was fitted to. A run that is no bump test on its
// own, one of several fitted together for instance, goes without a verdict.
func (j *job) check(ctx context.Context, o fit.Options) error {
	for _, run := range j.bump {
		r, err := fit.Check(ctx, run, o)
		switch {
		case ctx.Err() != nil:
			return ctx.Err()
		case errors.Is(err, fit.ErrOption):
			return fitError(err)
		case err != nil:
			r = nil
		}
		j.checks = append(j.checks, r)
	}
	return nil
}

// outputFolder is the folder that a whole job writes; that it can be one is
// found out before the work. more are names it holds besides the usual ones.
func (c *console) outputFolder(usual string, more ...string) (string, error) {
	folder := cmp.Or(c.output, usual)
	if folder == "-" {
		return "", usageErrorf("-o names the folder to write; a folder cannot go to standard output")
	}
	if info, err := os.Stat(folder); err == nil && !info.IsDir() {
		return "", fmt.Errorf("%s exists and is not a folder; name another with -o", folder)
	}
	if err := c.refuseSpreading(folder, more...); err != nil {
		return "", err
	}
	return folder, unwritable(atomicfile.CheckFolder(folder))
}

// writeFolder puts everything the job made into a folder, whole or not at all.
func (j *job) writeFolder(folder, command string, more func(dir string) error) error {
	return atomicfile.Folder(folder, func(dir string) error {
		for name, write := range map[string]func(io.Writer) error{
			"card.json":   j.card.WriteJSON,
			"gains.json":  j.gains.WriteJSON,
			"replay.json": j.replay.WriteJSON,
			"report.html": func(w io.Writer) error { return report.Page(w, j.bundle(command)) },
		} {
			if err := atomicfile.Write(filepath.Join(dir, name), write); err != nil {
				return err
			}
		}
		for _, figure := range j.figures() {
			name := figure.Name + ".svg"
			err := atomicfile.Write(filepath.Join(dir, name), func(w io.Writer) error { return figure.Write(w, name) })
			if err != nil {
				return err
			}
		}
		if more == nil {
			return nil
		}
		return more(dir)
	})
}

func (j *job) bundle(command string) report.Bundle {
	return report.Bundle{
		Runs: j.bump, Curves: j.curves, Checks: j.checks, Card: j.card, Gains: j.gains, Replay: j.replay, Drift: j.drift,
		Loop: j.loop, Tool: tool(), Command: command,
	}
}

// figures are those of the page, as files of their own.
func (j *job) figures() []*report.Figure {
	model, _ := j.card.Model(j.card.Selected)
	figures := []*report.Figure{
		report.LogFigure(j.bump[0], j.curves[0], model),
		report.ResidualFigure(j.bump[0], j.curves[0], model),
		report.IntervalFigure(model, j.card.Profiles, j.card.Confidence),
	}
	figures = append(figures, report.LoopFigures(j.loop, j.gains)...)
	for i := range j.replay.Runs {
		run := &j.replay.Runs[i]
		figure := report.ReplayFigure(run, &j.replay.Gains, j.replay.Requirement)
		figure.Name = fmt.Sprintf("%s-%d", figure.Name, i+1)
		figures = append(figures, figure)
	}
	return figures
}
