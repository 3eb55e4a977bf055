package main

import (
	"cmp"
	"context"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"reflect"
	"strings"

	"github.com/spf13/cobra"

	"lagwright/cmd/lagwright/internal/format"
	"lagwright/cmd/lagwright/internal/report"
	"lagwright/data"
	"lagwright/fit"
	"lagwright/tune"
	"lagwright/validate"
)

type validateOptions struct {
	log         logFlags
	requirement requirementFlags
	gains       []string
	loggedGains string
	options     validate.Options
	plot        plotFlag
}

func newValidate(c *console) *cobra.Command {
	var o validateOptions
	cmd := &cobra.Command{
		Use:   "validate CARD... LOG... --gains FILE",
		Short: "Replay of past runs under proposed gains",
		Long: `Computes past runs again with other gains in the loop: what the plant does not
explain of a run is its disturbance, and the loop is closed on every plausible
plant with that disturbance. Logs are files, folders and globs. A log that
cannot be replayed is listed and does not stop the others.

With --logged-gains each run is first replayed under the gains it was made
with; one that is not reproduced names the side that failed: do not trust this
model here, or the logged gains are not reproduced. A run may begin in the
middle of a move: what is left of that move is told, not judged.
Gains are a file, or written out with their units: kc=0.4V/K,ti=12s and, where
they differ from the defaults of a gains file, td, filter, form, weight, scan,
min, max, rate, resolution; for P control kc and bias.
With -o, a journal beside the output keeps what is done; after a break, the
same command with --resume goes on. Several cards, or several --gains, give a
table of the runs with the results side by side.
` + exitHelp,
		Example: `  lagwright validate card.json runs/ --gains gains.json -o replay.json
  lagwright validate card.json may.csv --gains new.json --logged-gains old.json
  lagwright validate card.json may.csv --gains new.json \
    --logged-gains kc=0.4V/K,ti=12s,scan=100ms,max=10V
  lagwright validate card.json "runs/*.parquet" --gains new.json -o t.parquet
  lagwright validate card.json runs/ --gains pi.json --gains pid.json`,
		Args: needArgs(2, -1, "lagwright validate card.json runs/ --gains gains.json"),
		RunE: func(cmd *cobra.Command, args []string) error { return runValidate(cmd.Context(), c, &o, args) },
	}
	fs := cmd.Flags()
	fs.StringArrayVar(&o.gains, "gains", nil, "`FILE` of the proposed gains, or the gains written out; may be repeated to compare")
	fs.StringVar(&o.loggedGains, "logged-gains", "", "`FILE` of the gains in force when the logs were made, or these gains written out")
	optionalFlag(fs, &o.options.Setpoint, "setpoint", "TEMP", "setpoint of the whole run, where the log has none, °C (or 203F)", temperature)
	fs.BoolVar(&o.options.Resume, "resume", false, "go on after a break: runs already in the output are taken over")
	valueFlag(fs, &o.options.Confidence, "confidence", "PERCENT", "95%", "level of the bands", share)
	o.requirement.add(cmd)
	optionalFlag(fs, &o.options.RunLimits.Deviation, "deviation", "DEGREES", "largest distance from the setpoint that a run may show, setpoint moves aside, K (or 9F)", positiveDifference)
	optionalFlag(fs, &o.options.RunLimits.IAE, "iae", "NUMBER", "largest error area of a run: degrees off the setpoint, times seconds", errorArea)
	o.log.add(cmd)
	o.plot.add(cmd, "the judged run furthest from the requirement, logged against proposed")
	return cmd
}

// errorArea reads 50 or 50K*s.
func errorArea(s string) (float64, error) {
	digits, unit := cutUnit(s)
	v, err := bareNumber(digits)
	if unit = strings.NewReplacer("*", "", "·", "", " ", "").Replace(unit); err != nil || unit != "" && unit != "Ks" {
		return 0, errors.New("want an area in K*s, such as 50")
	}
	if v <= 0 {
		return 0, errors.New("want a number above zero")
	}
	return v, nil
}

func runValidate(ctx context.Context, c *console, o *validateOptions, args []string) error {
	if err := o.check(c); err != nil {
		return err
	}
	inputs := append(append([]string{o.loggedGains}, o.gains...), args...)
	if err := o.refuseOverwriting(c, inputs); err != nil {
		return err
	}
	cardPaths, logs, err := splitCards(args)
	if err != nil {
		return err
	}
	files, err := o.log.listed(logs)
	if err != nil {
		return err
	}
	if len(cardPaths) > 1 || len(o.gains) > 1 {
		return o.compare(ctx, c, cardPaths, files)
	}
	replay, err := o.replay(ctx, c, cardPaths[0], o.gains[0], files, c.toFile())
	if err != nil {
		return err
	}
	if err := o.deliver(c, replay); err != nil {
		return err
	}
	if err := removeJournal(c); err != nil {
		return err
	}
	if err := o.plot.write(c, func() (*report.Figure, error) { return replayFigure(replay) }); err != nil {
		return err
	}
	return replayVerdict(replay)
}

// refuseOverwriting spares inputs and logs. An older table of runs has the
// ending of a log, and may be written again.
func (o *validateOptions) refuseOverwriting(c *console, inputs []string) error {
	if isTable(c.output) && holdsRuns(c.output) {
		if err := refuseInputs(inputs, c.output, o.plot.path); err != nil {
			return err
		}
		return refuseUnwritable(c.output, o.plot.path)
	}
	return c.refuseOverwriting(inputs, c.output, o.plot.path)
}

// splitCards parts the cards, which come first, from the logs.
func splitCards(args []string) (cards, logs []string, err error) {
	for n, path := range args {
		kind, _, err := lagwrightFile(path)
		if err != nil {
			return nil, nil, err
		}
		if kind != "card" && n > 0 {
			return args[:n], args[n:], nil
		}
	}
	return nil, nil, usageErrorf("no log among the arguments: lagwright validate card.json runs/ --gains gains.json")
}

// replay replays all files with one card and one set of gains.
func (o *validateOptions) replay(ctx context.Context, c *console, cardPath, gainsPath string, files []string, journal bool) (*validate.Replay, error) {
	card, err := c.readCard(cardPath)
	if err != nil {
		return nil, err
	}
	gains, err := c.gainsOf("--gains", gainsPath, card)
	if err != nil {
		return nil, err
	}
	options, err := o.with(c, card, gains)
	if err != nil {
		return nil, err
	}
	if journal {
		if err := o.withJournal(c, &options); err != nil {
			return nil, err
		}
	}
	log := o.log
	log.columnsOf(card)
	progress, clear := c.progress("replaying")
	defer clear()
	options.Progress = progress
	read := func(ctx context.Context, file string) ([]*data.Run, error) { return log.read(ctx, c, file) }
	replay, err := validate.ReplayFiles(ctx, card, files, read, gains, options)
	if ctx.Err() != nil && journal {
		return nil, resumable{err}
	}
	if err != nil {
		return nil, inputError{err}
	}
	if len(replay.Runs) == 0 && len(replay.Failed) > 0 {
		return nil, inputErrorf("none of %s can be replayed: %s", format.Count(len(replay.Failed), "log", "logs"), replay.Failed[0].Words())
	}
	return replay, nil
}

// gainsOf reads a file of gains, or gains written out in the units of the card.
// These are said again in full, with what was left to the defaults.
func (c *console) gainsOf(flag, text string, card *fit.Card) (*tune.Gains, error) {
	if _, err := os.Stat(text); err == nil || !tune.WrittenOut(text) {
		return c.readGains(text, cmp.Or(card.Units.Input, "V"))
	}
	g, err := tune.ParseGains(text, tune.GainUnits{Input: card.Units.Input, Temperature: card.Units.Temperature})
	if err != nil {
		return nil, usageErrorf("%s: %w", flag, err)
	}
	c.note("%s: %s", flag, g.InWords())
	return g, nil
}

func (o *validateOptions) check(c *console) error {
	if len(o.gains) == 0 {
		return usageErrorf("validate needs the gains to replay the runs with: --gains gains.json, or written out: --gains kc=0.4V/K,ti=12s")
	}
	if o.options.Resume && len(o.gains) > 1 {
		return usageErrorf("--resume goes on with one card and one set of gains, not with a comparison")
	}
	if o.options.Resume && !c.toFile() {
		return usageErrorf("--resume needs -o: it goes on beside the output")
	}
	return o.requirement.check()
}

// with completes the options by what the other flags say.
func (o *validateOptions) with(c *console, card *fit.Card, gains *tune.Gains) (validate.Options, error) {
	v := o.options
	v.Workers, v.Tool = c.workers, tool()
	v.SetpointStep = o.requirement.requirement.SetpointStep
	v.Requirement = o.requirement.over(gains.Requirement)
	v.Traces = o.plot.path != ""
	if o.loggedGains == "" {
		return v, nil
	}
	var err error
	v.LoggedGains, err = c.gainsOf("--logged-gains", o.loggedGains, card)
	return v, err
}

// withJournal keeps what is done beside the output, and with --resume takes
// over what the output holds.
func (o *validateOptions) withJournal(c *console, v *validate.Options) error {
	v.Journal = journalOf(c.output)
	if !v.Resume || isTable(c.output) {
		return nil
	}
	previous, err := c.readReplay(c.output)
	if errors.Is(err, fs.ErrNotExist) {
		return nil
	}
	v.Previous = previous
	return err
}

func journalOf(output string) string { return output + ".journal" }

// removeJournal ends the journal when the result is in place.
func removeJournal(c *console) error {
	if !c.toFile() {
		return nil
	}
	err := os.Remove(journalOf(c.output))
	if errors.Is(err, fs.ErrNotExist) {
		return nil
	}
	return err
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

// replayFigure draws the run furthest from the requirement.
func replayFigure(r *validate.Replay) (*report.Figure, error) {
	drawn := worstRun(r)
	if drawn == nil {
		drawn = &r.Runs[0]
	}
	if drawn.Trace == nil {
		return nil, fmt.Errorf("%s has no trace to draw", drawn.File)
	}
	return report.ReplayFigure(drawn, &r.Gains, r.Requirement), nil
}

// worstRun is the judged run least likely to meet the requirement; nil where
// none could be judged.
func worstRun(r *validate.Replay) *validate.RunReplay {
	var worst *validate.RunReplay
	for i := range r.Runs {
		run := &r.Runs[i]
		if run.Judged && (worst == nil || run.Probability < worst.Probability) {
			worst = run
		}
	}
	return worst
}

// replayVerdict is nil where every judged run meets the requirement; where none
// could be judged since none shows it, where the gains were tuned to it and meet
// it. A run that should show it and does not is no such run.
func replayVerdict(r *validate.Replay) error {
	s := r.Summary
	if s.Meets {
		return nil
	}
	worst := worstRun(r)
	for i := range r.Runs {
		if run := &r.Runs[i]; worst == nil && run.Undecided() {
			return answerNof("no run could be judged; %s: %s", run.File, strings.Join(run.Reasons, "; "))
		}
	}
	if worst == nil && r.RunLimits == (validate.RunLimits{}) && r.Gains.Meets && reflect.DeepEqual(r.Gains.Requirement, r.Requirement) {
		return nil
	}
	if worst == nil {
		return answerNof("no run shows anything that the requirement asks for; replay a run with a setpoint change")
	}
	reason := ""
	if len(worst.Reasons) > 0 {
		reason = fmt.Sprintf("; %s: %s", worst.File, strings.Join(worst.Reasons, "; "))
	}
	return answerNof("the requirement is met in %d of %d runs%s", s.Meeting, s.Judged, reason)
}
