package main

import (
	"bytes"
	"context"
	"io"

	"github.com/spf13/cobra"

	"lagwright/cmd/lagwright/internal/report"
	"lagwright/cmd/lagwright/internal/terminal"
	"lagwright/fit"
	"lagwright/tune"
	"lagwright/validate"
)

type reportOptions struct {
	log logFlags
}

func newReport(c *console) *cobra.Command {
	var o reportOptions
	cmd := &cobra.Command{
		Use:   "report FILE... -o PAGE",
		Short: "One self-contained page from card, gains, replay, drift, log",
		Long: `Makes one HTML page, without outside resources, from what the other commands
wrote: a model card, gains, a replay, a drift, each recognised by its content.
Give the log as well, and the page shows it with the fit; its columns are found
by the names in the card.
` + exitHelp,
		Example: `  lagwright report card.json gains.json replay.json bump.csv -o report.html
  lagwright report card.json -o card.html`,
		Args: needArgs(1, -1, "lagwright report card.json gains.json -o report.html"),
		RunE: func(cmd *cobra.Command, args []string) error { return runReport(cmd.Context(), c, &o, args) },
	}
	o.log.add(cmd)
	return cmd
}

func runReport(ctx context.Context, c *console, o *reportOptions, args []string) error {
	if c.json {
		return usageErrorf("report makes a page, not JSON; leave --json out")
	}
	if _, watched := terminal.Width(c.out); watched && c.output == "" {
		return usageErrorf("report makes a page for a browser, which a terminal cannot show; name a file, such as -o report.html")
	}
	if err := c.refuseOverwriting(args, c.output); err != nil {
		return err
	}
	var j job
	var logs []string
	for _, path := range args {
		known, err := j.addFile(path)
		if err != nil {
			return err
		}
		if !known {
			logs = append(logs, path)
		}
	}
	if err := j.agree(); err != nil {
		return err
	}
	if len(logs) > 0 {
		if err := j.addLogs(ctx, c, &o.log, logs); err != nil {
			return err
		}
	}
	page := func(w io.Writer) error { return report.Page(w, j.bundle(commandLine(c.args))) }
	if !c.toFile() {
		return page(c.out)
	}
	return c.writeFile(c.output, page)
}

// agree refuses parts of a page that are not about one heater and one set of
// gains.
func (j *job) agree() error {
	if c, g := j.card, j.gains; c != nil && g != nil {
		if g.Units != (tune.GainUnits{Input: c.Units.Input, Temperature: c.Units.Temperature}) {
			return inputErrorf("the gains are in %s/%s, the card is in %s/%s: these are not of one heater", g.Units.Input, g.Units.Temperature, c.Units.Input, c.Units.Temperature)
		}
		id, err := c.Fingerprint()
		if err != nil {
			return err
		}
		if !g.MadeFrom(id) {
			return inputErrorf("the gains were made from another card, and what they say of the heater is of that one: give that card, or tune this one")
		}
	}
	if j.replay == nil {
		return nil
	}
	if err := j.replay.Belongs(j.card, j.gains); err != nil {
		return inputError{err}
	}
	return nil
}

// addLogs reads the logs behind the card, judges them and lays the model
// beside them.
func (j *job) addLogs(ctx context.Context, c *console, l *logFlags, logs []string) error {
	if j.card != nil {
		l.columnsOf(j.card)
	}
	runs, err := l.readAsFitted(ctx, c, j.card, logs)
	if err != nil {
		return err
	}
	j.bump = runs
	options, err := new(fitFlags).with(c, l, nil)
	if err != nil {
		return err
	}
	if j.card != nil {
		options.Law, options.BumpInstant = j.card.Law(), j.card.BumpTime
		if err := j.layCurves(); err != nil {
			return err
		}
	}
	return j.check(ctx, options)
}

// addFile takes in a file that lagwright wrote, and reports false for others.
func (j *job) addFile(path string) (known bool, err error) {
	kind, text, err := lagwrightFile(path)
	if err != nil || kind == "" {
		return false, err
	}
	switch r := bytes.NewReader(text); kind {
	case "card":
		return true, put(&j.card, path, r, fit.ReadCard)
	case "gains":
		return true, put(&j.gains, path, r, tune.ReadGains)
	case "replay":
		return true, put(&j.replay, path, r, validate.ReadReplay)
	case "drift":
		return true, put(&j.drift, path, r, validate.ReadDrift)
	}
	return false, inputErrorf("%s: a %s is nothing that a page can show; give a card, gains, a replay, a drift, logs", path, kind)
}

// put reads a part of the page; two of a kind are one too many.
func put[T any](dst **T, path string, r io.Reader, read func(io.Reader, string) (*T, error)) error {
	if *dst != nil {
		return usageErrorf("%s: a second file of its kind; a page shows one of each", path)
	}
	v, err := read(r, path)
	if err != nil {
		return inputError{err}
	}
	*dst = v
	return nil
}
