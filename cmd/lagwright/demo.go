package main

import (
	"bytes"
	"context"
	"io"
	"path/filepath"

	"github.com/spf13/cobra"

	"lagwright/cmd/lagwright/internal/atomicfile"
	"lagwright/cmd/lagwright/internal/demo"
	"lagwright/data"
	"lagwright/tune"
)

// demoFolder is where the demo leaves its results, in the current folder.
const demoFolder = "lagwright-demo"

func newDemo(c *console) *cobra.Command {
	return &cobra.Command{
		Use:   "demo",
		Short: "The whole job on a built-in log; writes a folder to open",
		Long: `Fits the bump test of an invented process-air heater on a drying line, tunes
for a stated requirement, and replays two earlier runs under the new gains.
Writes the folder ` + demoFolder + ` (-o names another): the logs, card.json,
gains.json, replay.json, report.html and the figures.
` + exitHelp,
		Example: "  lagwright demo",
		Args:    needArgs(0, 0, "lagwright demo"),
		RunE:    func(cmd *cobra.Command, args []string) error { return runDemo(cmd.Context(), c) },
	}
}

func runDemo(ctx context.Context, c *console) error {
	logs, err := demo.Logs()
	if err != nil {
		return err
	}
	more := []string{"gains-in-force.json"}
	for _, l := range logs {
		more = append(more, l.Name+".csv")
	}
	folder, err := c.outputFolder(demoFolder, more...)
	if err != nil {
		return err
	}
	var runs []*data.Run
	for _, l := range logs {
		run, err := readDemo(ctx, l)
		if err != nil {
			return err
		}
		runs = append(runs, run)
	}
	flags := demoFlags()
	inForce := demo.GainsInForce()
	j, err := c.work(ctx, flags, runs[:1], runs[1:], inForce)
	if err != nil {
		return err
	}
	err = j.writeFolder(folder, "lagwright demo", func(dir string) error {
		for _, l := range logs {
			if err := atomicfile.Write(filepath.Join(dir, l.Name+".csv"), l.WriteCSV); err != nil {
				return err
			}
		}
		return atomicfile.Write(filepath.Join(dir, "gains-in-force.json"), inForce.WriteJSON)
	})
	if err != nil {
		return err
	}
	return j.finish(c, folder)
}

// readDemo takes a log the way a file goes: written as CSV and read again,
// columns and units recognised.
func readDemo(ctx context.Context, l demo.Log) (*data.Run, error) {
	var b bytes.Buffer
	if err := l.WriteCSV(&b); err != nil {
		return nil, err
	}
	runs, err := data.Read(ctx, "-", data.Options{Stdin: io.Reader(&b)})
	if err != nil {
		return nil, err
	}
	runs[0].Source.File = l.Name + ".csv"
	return runs[0], nil
}

// demoFlags are the flags a user would give for the demo's heater.
func demoFlags() *jobFlags {
	settling, overshoot, low, high, scan := 100.0, 10.0, 0.0, 10.0, 1.0
	var f jobFlags
	f.tune.requirement.requirement = tune.Requirement{
		Settling: &settling, Overshoot: &overshoot, InputMin: &low, InputMax: &high, Scan: scan,
	}
	f.tune.options.Controller = "pi"
	return &f
}
