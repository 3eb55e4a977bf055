package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"strings"

	"github.com/spf13/cobra"

	"lagwright/cmd/lagwright/internal/report"
	"lagwright/data"
	"lagwright/tune"
	"lagwright/validate"
)

type validateOptions struct {
	log         logFlags
	requirement requirementFlags
	gains       string
	loggedGains string
	options     validate.Options
	plot        plotFlag
}

func newValidate(c *console) *cobra.Command {
	var o validateOptions
	cmd := &cobra.Command{
		Use:   "validate CARD LOG... --gains FILE",
		Short: "Replay of past runs under proposed gains",
		Long: `Computes past runs again with other gains in the loop: what the plant does not
explain of a run is its disturbance, and the loop is closed on every plausible
plant with that disturbance. Logs are files, folders and globs. A log that
cannot be replayed is listed and does not stop the others.

With --logged-gains each run is first replayed under the gains it was made
with; one that is not reproduced says: do not trust this model here.
With -o, a journal beside the output keeps what is done; after a break, the
same command with --resume goes on.
` + exitHelp,
		Example: `  lagwright validate card.json runs/ --gains gains.json -o replay.json
  lagwright validate card.json startup.csv --gains gains.json --logged-gains old.json
  lagwright validate card.json 'runs/*.parquet' --gains gains.json -o runs.parquet`,
		Args: needArgs(2, -1, "lagwright validate card.json runs/ --gains gains.json"),
		RunE: func(cmd *cobra.Command, args []string) error {
			return runValidate(cmd.Context(), c, &o, args[0], args[1:])
		},
	}
	fs := cmd.Flags()
	fs.StringVar(&o.gains, "gains", "", "`FILE` of the proposed gains")
	_ = cmd.MarkFlagRequired("gains")
	fs.StringVar(&o.loggedGains, "logged-gains", "", "`FILE` of the gains in force when the logs were made")
	optionalFlag(fs, &o.options.Setpoint, "setpoint", "NUMBER", "setpoint of the whole run, where the log has none", number)
	fs.BoolVar(&o.options.Resume, "resume", false, "go on after a break: runs already in the output are taken over")
	valueFlag(fs, &o.options.Confidence, "confidence", "PERCENT", "95%", "level of the bands", share)
	o.requirement.add(cmd)
	o.log.add(cmd)
	o.plot.add(cmd, "the run furthest from the requirement, logged against proposed")
	return cmd
}

func runValidate(ctx context.Context, c *console, o *validateOptions, cardPath string, logs []string) error {
	if err := o.check(c); err != nil {
		return err
	}
	inputs := append([]string{cardPath, o.gains, o.loggedGains}, logs...)
	if err := c.refuseOverwriting(inputs, c.output, o.plot.path); err != nil {
		return err
	}
	card, err := c.readCard(cardPath)
	if err != nil {
		return err
	}
	gains, err := c.readGains(o.gains)
	if err != nil {
		return err
	}
	options, err := o.with(c, gains)
	if err != nil {
		return err
	}
	files, err := o.log.expand(logs)
	if err != nil {
		return err
	}
	o.log.columnsOf(card)
	read := func(ctx context.Context, file string) ([]*data.Run, error) { return o.log.read(ctx, c, file) }
	progress, clear := c.progress("replaying")
	options.Progress = progress
	replay, err := validate.ReplayFiles(ctx, card, files, read, gains, options)
	clear()
	if err != nil {
		return inputError{err}
	}
	if len(replay.Runs) == 0 && len(replay.Failed) > 0 {
		return inputErrorf("none of %d logs can be replayed: %s: %s", len(replay.Failed), replay.Failed[0].File, replay.Failed[0].Reason)
	}
	if err := o.deliver(c, replay); err != nil {
		return err
	}
	if options.Journal != "" {
		if err := os.Remove(options.Journal); err != nil && !errors.Is(err, fs.ErrNotExist) {
			return err
		}
	}
	err = o.plot.write(c, func() (*report.Figure, error) {
		worst := worstRun(replay)
		return report.ReplayFigure(worst, &replay.Gains, replay.Requirement), nil
	})
	if err != nil {
		return err
	}
	return replayVerdict(replay)
}

func (o *validateOptions) check(c *console) error {
	if o.options.Resume && !c.toFile() {
		return usageErrorf("--resume needs -o: the output is what it goes on with")
	}
	return o.requirement.check()
}

// with completes the options by what the other flags say.
func (o *validateOptions) with(c *console, gains *tune.Gains) (validate.Options, error) {
	v := o.options
	v.Workers, v.Tool = c.workers, tool()
	v.Requirement = o.requirement.over(gains.Requirement)
	v.Traces = o.plot.path != ""
	if o.loggedGains != "" {
		logged, err := c.readGains(o.loggedGains)
		if err != nil {
			return v, err
		}
		v.LoggedGains = logged
	}
	if !c.toFile() {
		return v, nil
	}
	v.Journal = c.output + ".journal"
	if v.Resume && !isTable(c.output) {
		previous, err := c.readReplay(c.output)
		if err != nil && !errors.Is(err, fs.ErrNotExist) {
			return v, err
		}
		v.Previous = previous
	}
	return v, nil
}

// isTable tells whether the output is to be a Parquet table of the runs.
func isTable(output string) bool {
	return strings.EqualFold(filepath.Ext(output), ".parquet")
}

func (o *validateOptions) deliver(c *console, replay *validate.Replay) error {
	if !isTable(c.output) {
		return c.deliver(replay)
	}
	if err := c.writeFile(c.output, func(w io.Writer) error { return replay.WriteParquet(w) }); err != nil {
		return err
	}
	if c.json {
		return replay.WriteJSON(c.out)
	}
	return c.text(replay.WriteText)
}

// worstRun is the run least likely to meet the requirement.
func worstRun(r *validate.Replay) *validate.RunReplay {
	worst := &r.Runs[0]
	for i := range r.Runs {
		if r.Runs[i].Probability < worst.Probability {
			worst = &r.Runs[i]
		}
	}
	return worst
}

// replayVerdict is nil where every judged run meets the requirement.
func replayVerdict(r *validate.Replay) error {
	s := r.Summary
	if s.Meets {
		return nil
	}
	reason := ""
	if worst := worstRun(r); len(worst.Reasons) > 0 {
		reason = fmt.Sprintf("; %s: %s", worst.File, strings.Join(worst.Reasons, ", "))
	}
	return answerNof("the requirement is met in %d of %d runs%s", s.Meeting, s.Judged, reason)
}
