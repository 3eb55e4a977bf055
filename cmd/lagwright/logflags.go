package main

import (
	"cmp"
	"context"
	"errors"
	"io/fs"
	"os"
	"path/filepath"
	"strings"
	"sync"

	"github.com/spf13/cobra"

	"lagwright/cmd/lagwright/internal/heap"
	"lagwright/data"
	"lagwright/fit"
)

// logFlags say how to read a log. They are the same on every command that
// reads one.
type logFlags struct {
	options     data.Options
	inputLaw    string
	bumpInstant string
	known       []data.Columns // see columnsOf
	mentioned   *sync.Once
}

func (l *logFlags) add(cmd *cobra.Command) {
	fs, o := cmd.Flags(), &l.options
	fs.StringVar(&o.TimeCol, "time-col", "", "`NAME` of the time column (with --long: of the tag)")
	fs.StringVar(&o.InputCol, "input-col", "", "`NAME` of the heater's input")
	fs.StringVar(&o.TempCol, "temp-col", "", "`NAME` of the outlet temperature")
	fs.StringVar(&o.SetpointCol, "setpoint-col", "", "`NAME` of the setpoint")
	fs.StringVar(&o.ModeCol, "mode-col", "", "`NAME` of the column that says auto or manual")
	fs.StringVar(&o.AirflowCol, "airflow-col", "", "`NAME` of the airflow")
	fs.StringVar(&o.InletCol, "inlet-col", "", "`NAME` of the inlet temperature")
	fs.StringVar(&o.ColdCol, "cold-col", "", "`NAME` of the cold junction's temperature (thermocouple logged in mV)")
	fs.StringVar(&o.RunCol, "run-col", "", "`NAME` of the column that tells several runs in a file apart")
	fs.BoolVar(&o.Long, "long", false, "rows are time, tag, value")
	choiceFlag(cmd, &o.InputUnit, "input-unit", "", "unit of the input, where the file is silent or wrong", "V", "%", "mA")
	choiceFlag(cmd, &o.TempUnit, "temp-unit", "", "unit of the temperature, where the file is silent or wrong", "C", "F", "K", "mV")
	choiceFlagFunc(cmd, &o.Thermocouple, "thermocouple", "TYPE", "", "type of a thermocouple logged in mV: B E J K N R S T", strings.Split("BEJKNRST", ""))
	l.addSpans(cmd)
	choiceFlag(cmd, &l.inputLaw, "input-law", "linear", "power: the rise follows the input squared (RMS volts on a resistance)", "linear", "power")
	valueFlag(fs, &o.Cycle, "cycle", "DURATION", "", "cycle of a drive that switches on and off: its mean over a cycle is the input", duration)
	fs.StringVar(&o.TimeFormat, "time-format", "", "`LAYOUT` of the clock, such as 'dd/MM/yyyy HH:mm:ss'")
	fs.StringVar(&o.From, "from", "", "keep the log from this `TIME`: clock time or seconds")
	fs.StringVar(&o.To, "to", "", "keep the log up to this `TIME`: clock time or seconds")
	fs.BoolVar(&o.RemoveSpikes, "remove-spikes", false, "take isolated spikes of temperature out instead of only flagging them")
	choiceFlag(cmd, &l.bumpInstant, "bump-instant", "row", "row: a row's input holds from its time stamp on; unknown: anywhere in the sampling interval", "row", "unknown")
}

// addSpans defines the two flags that stand on gains as well.
func (l *logFlags) addSpans(cmd *cobra.Command) {
	optionalFlag(cmd.Flags(), &l.options.InputSpan, "input-span", "SPAN", "span of the input, such as 0..10V: scales mA and percent", span)
	optionalFlag(cmd.Flags(), &l.options.TempSpan, "temp-span", "SPAN", "span of the temperature, such as 0..200C", span)
}

// expand resolves files, folders and globs.
func (l *logFlags) expand(args []string) ([]string, error) {
	files, err := data.Expand(args)
	if err != nil {
		return nil, inputError{err}
	}
	return files, nil
}

// listed is expand for logs that are worked on one by one. A file that is not there stays in the list, so that it
// is named with the others that cannot be read and does not stop the rest.
func (l *logFlags) listed(args []string) ([]string, error) {
	var out []string
	for _, arg := range args {
		if _, err := os.Stat(arg); errors.Is(err, fs.ErrNotExist) && !strings.ContainsAny(arg, "*?[") {
			out = append(out, arg)
			continue
		}
		files, err := l.expand([]string{arg})
		if err != nil {
			return nil, err
		}
		out = append(out, files...)
	}
	return out, nil
}

// readAll reads every file; the first that cannot be read stops it.
func (l *logFlags) readAll(ctx context.Context, c *console, args []string) ([]*data.Run, error) {
	heap.Widen()
	files, err := l.expand(args)
	if err != nil {
		return nil, err
	}
	var runs []*data.Run
	for _, file := range files {
		more, err := l.read(ctx, c, file)
		if err != nil {
			return nil, err
		}
		runs = append(runs, more...)
	}
	return runs, nil
}

// manyRows are rows that collections of the heap are fitted to.
const manyRows = 200_000

func (l *logFlags) read(ctx context.Context, c *console, file string) ([]*data.Run, error) {
	runs, err := l.readAsKnown(ctx, c, file)
	rows := 0
	for _, r := range runs {
		rows += len(r.T)
	}
	if rows >= manyRows {
		heap.Narrow()
	}
	return runs, err
}

// readAsKnown reads a file by the columns of the card's log, if it has them.
func (l *logFlags) readAsKnown(ctx context.Context, c *console, file string) ([]*data.Run, error) {
	o := l.options
	o.Stdin = c.in
	for _, known := range l.known {
		if file == "-" {
			break // can be read only once
		}
		// The logger that made the card's log most likely made this one.
		if runs, err := data.Read(ctx, file, withColumns(o, known)); err == nil && len(runs) > 0 {
			l.mentioned.Do(func() { mentionColumns(ctx, c, file, o, runs[0].Source.Columns) })
			return runs, nil
		}
	}
	runs, err := data.Read(ctx, file, o)
	if err != nil {
		return nil, inputError{err}
	}
	return runs, nil
}

// columnsOf tries the columns of the card's log where the command line names
// none: all of them, or the three that every log has.
func (l *logFlags) columnsOf(card *fit.Card) {
	if len(card.Source) == 0 {
		return
	}
	c := card.Source[0].Columns
	three := data.Columns{Time: c["time"], Input: c["input"], Temperature: c["temperature"]}
	all := three
	all.Setpoint, all.Mode, all.Airflow, all.Inlet = c["setpoint"], c["mode"], c["airflow"], c["inlet"]
	l.known, l.mentioned = []data.Columns{all}, new(sync.Once)
	if all != three {
		l.known = append(l.known, three)
	}
}

// mentionColumns says which columns the card named, where the log alone would
// have left them open or had others taken.
func mentionColumns(ctx context.Context, c *console, file string, o data.Options, used data.Columns) {
	var own data.Columns
	if runs, err := data.Read(ctx, file, o); err == nil && len(runs) > 0 {
		own = runs[0].Source.Columns
	}
	var names []string
	for _, n := range [][2]string{
		{used.Time, own.Time}, {used.Input, own.Input}, {used.Temperature, own.Temperature},
		{used.Setpoint, own.Setpoint}, {used.Mode, own.Mode}, {used.Airflow, own.Airflow}, {used.Inlet, own.Inlet},
	} {
		if n[0] != "" && n[0] != n[1] {
			names = append(names, n[0])
		}
	}
	if own != (data.Columns{}) && len(names) == 0 {
		return
	}
	c.note("%s: columns as in the card: %s", filepath.Base(file), strings.Join(names, ", "))
}

// withColumns names the columns that o leaves open.
func withColumns(o data.Options, c data.Columns) data.Options {
	o.TimeCol = cmp.Or(o.TimeCol, c.Time)
	o.InputCol = cmp.Or(o.InputCol, c.Input)
	o.TempCol = cmp.Or(o.TempCol, c.Temperature)
	o.SetpointCol = cmp.Or(o.SetpointCol, c.Setpoint)
	o.ModeCol = cmp.Or(o.ModeCol, c.Mode)
	o.AirflowCol = cmp.Or(o.AirflowCol, c.Airflow)
	o.InletCol = cmp.Or(o.InletCol, c.Inlet)
	return o
}
