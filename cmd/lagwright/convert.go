package main

import (
	"errors"
	"io"

	"github.com/spf13/cobra"

	"lagwright/tune"
)

type convertOptions struct {
	form     string
	spelling spellingFlags
	spans    logFlags // --input-span and --temp-span only
}

func newConvert(c *console) *cobra.Command {
	var o convertOptions
	cmd := &cobra.Command{
		Use:   "convert GAINS",
		Short: "The same controller in another form or other units",
		Long: `Writes gains in the form and units a controller takes. The loop stays the same;
what has no exact counterpart is refused, with the nearest that has one.
Percent gains and a proportional band need both spans.
` + exitHelp,
		Example: `  lagwright convert gains.json --form parallel
  lagwright convert gains.json --form series --minutes --repeats
  lagwright convert gains.json --band --input-span 0..10V --temp-span 0..200C`,
		Args: needArgs(1, 1, "lagwright convert gains.json --form parallel"),
		RunE: func(cmd *cobra.Command, args []string) error { return runConvert(c, &o, args[0]) },
	}
	choiceFlag(cmd, &o.form, "form", "", "form of the controller; as it is where not given", tune.Ideal, tune.Parallel, tune.Series)
	o.spelling.add(cmd)
	o.spans.addSpans(cmd)
	return cmd
}

func runConvert(c *console, o *convertOptions, path string) error {
	if err := c.refuseOverwriting([]string{path}, c.output); err != nil {
		return err
	}
	gains, err := c.readGains(path, "V")
	if err != nil {
		return err
	}
	form := o.form
	if form == "" {
		form = gains.Form
	}
	converted, err := tune.Convert(gains, form, o.spelling.with(&o.spans))
	if impossible := (*tune.NoSeriesError)(nil); errors.As(err, &impossible) {
		return answerNo{err}
	}
	if err != nil { // a spelling that lacks something
		return usageError{err}
	}
	return c.deliver(entered{converted})
}

// entered shows what is entered at the controller, without the table of
// candidates that the gains were chosen from.
type entered struct{ *tune.Gains }

func (e entered) WriteText(w io.Writer) error {
	g := *e.Gains
	g.Candidates = nil
	return g.WriteText(w)
}
