package main

import (
	"context"
	"fmt"
	"io"
	"strings"

	"github.com/spf13/cobra"

	"lagwright/cmd/lagwright/internal/terminal"
)

// Main runs one command line and returns its exit code. Answers go to out,
// everything else to errOut.
func Main(ctx context.Context, args []string, in io.Reader, out, errOut io.Writer) int {
	if _, terminal := terminal.Width(out); !terminal {
		out = &pipe{to: out}
	}
	c := &console{in: in, out: out, errOut: errOut, args: args}
	root := newRoot(c)
	var working bool
	markWorking(root, &working)
	root.SetArgs(args)
	root.SetIn(in)
	root.SetOut(out)
	root.SetErr(errOut)
	err := root.ExecuteContext(ctx)
	if err == nil {
		return exitDone
	}
	if !working { // the fault was found before the command began
		err = asUsage(err, root, args)
	}
	c.complain(ctx, err)
	return exitCode(err)
}

func newRoot(c *console) *cobra.Command {
	root := &cobra.Command{
		Use:   "lagwright",
		Short: "Heater bump tests: models with bounds, gains that hold, replays of past runs",
		Long: `Lagwright reads the log of a heater's bump test and gives a model with honest
bounds, gains that hold for every plant the log cannot rule out, and a replay
of past runs under those gains.

Start with: lagwright demo`,
		Version:           version(),
		SilenceErrors:     true,
		SilenceUsage:      true,
		CompletionOptions: cobra.CompletionOptions{DisableDefaultCmd: true},
		// Suggestions are made by asUsage, in one line.
		DisableSuggestions: true,
	}
	root.PersistentPreRunE = func(cmd *cobra.Command, _ []string) error {
		c.flags = cmd.Flags()
		return checkUnitless(c.flags)
	}
	root.SetVersionTemplate("lagwright {{.Version}}\n")
	root.SetHelpCommand(newHelp())
	c.addFlags(root.PersistentFlags())
	root.AddCommand(
		newDemo(c),
		newRun(c),
		newCheck(c),
		newFit(c),
		newTune(c),
		newValidate(c),
		newTrack(c),
		newPlan(c),
		newConvert(c),
		newReport(c),
		newVersion(c),
		newCompletion(c),
		newMan(c),
	)
	cobra.EnableCommandSorting = false // in the order of the work
	root.SetUsageTemplate(strings.ReplaceAll(root.UsageTemplate(), ".FlagUsages", ".FlagUsagesWrapped 80"))
	// --help shows flags in the order they are declared: by subject.
	root.PersistentFlags().SortFlags = false
	for _, sub := range root.Commands() {
		sub.Flags().SortFlags = false
	}
	return root
}

// markWorking makes every command note that its work has begun: an error
// before that is a fault of the command line, wherever cobra finds it.
func markWorking(cmd *cobra.Command, working *bool) {
	if run := cmd.RunE; run != nil {
		cmd.RunE = func(cmd *cobra.Command, args []string) error {
			*working = true
			return run(cmd, args)
		}
	}
	for _, sub := range cmd.Commands() {
		markWorking(sub, working)
	}
}

// asUsage makes cobra's finding a usage error that names the command probably
// meant, or where to look.
func asUsage(err error, root *cobra.Command, args []string) error {
	if _, ok := err.(usageError); ok {
		return err
	}
	cmd, rest, findErr := root.Find(args)
	if findErr != nil {
		cmd, rest = root, args
	}
	if findErr != nil && len(rest) > 0 {
		root.SuggestionsMinimumDistance = 2
		if near := root.SuggestionsFor(rest[0]); len(near) > 0 {
			return usageErrorf("%w; did you mean %q?", err, strings.Join(near, `" or "`))
		}
	}
	return usageErrorf("%w; see %s --help", err, cmd.CommandPath())
}

// newHelp is cobra's help command, except that an unknown topic is an error.
func newHelp() *cobra.Command {
	return &cobra.Command{
		Use:   "help [COMMAND]",
		Short: "Help about any command",
		RunE: func(cmd *cobra.Command, args []string) error {
			topic, rest, err := cmd.Root().Find(args)
			if err != nil || len(rest) > 0 {
				return usageErrorf("unknown command %q; see lagwright --help", strings.Join(args, " "))
			}
			topic.InitDefaultHelpFlag()
			return topic.Help()
		},
	}
}

// needArgs refuses a command line with fewer than min or more than max (if
// not negative) arguments, with an example of the right one.
func needArgs(min, max int, example string) cobra.PositionalArgs {
	return func(cmd *cobra.Command, args []string) error {
		if len(args) < min {
			return fmt.Errorf("%s needs more: %s", cmd.Name(), example)
		}
		if max == 0 && len(args) > 0 {
			return fmt.Errorf("%s takes no arguments, but %q was given", cmd.Name(), args[0])
		}
		if max > 0 && len(args) > max {
			return fmt.Errorf("%s takes no more than %d: %q is too much: %s", cmd.Name(), max, args[max], example)
		}
		return nil
	}
}
