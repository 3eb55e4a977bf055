package main

import (
	"errors"
	"io"
	"path/filepath"
	"strings"

	"github.com/spf13/cobra"

	"lagwright/cmd/lagwright/internal/report"
	"lagwright/data"
	"lagwright/fit"
	"lagwright/tune"
)

// plotFlag is --plot, on every command that computes.
type plotFlag struct{ path string }

func (p *plotFlag) add(cmd *cobra.Command, shows string) {
	valueFlag(cmd.Flags(), &p.path, "plot", "FILE", "", "draw "+shows+", as .svg, .png or .pdf", plotName)
}

func plotName(s string) (string, error) {
	switch strings.ToLower(filepath.Ext(s)) {
	case ".svg", ".png", ".pdf":
		return s, nil
	}
	return "", errors.New("want a name that ends in .svg, .png or .pdf")
}

// write draws the figure where --plot asks for one.
func (p *plotFlag) write(c *console, draw func() (*report.Figure, error)) error {
	if p.path == "" {
		return nil
	}
	figure, err := draw()
	if err != nil {
		return err
	}
	return c.writeFile(p.path, func(w io.Writer) error { return figure.Write(w, p.path) })
}

// fitFigure draws the first run of a card with its fit.
func fitFigure(card *fit.Card, run *data.Run) (*report.Figure, error) {
	curves, err := card.Curves(run, 0)
	if err != nil {
		return nil, err
	}
	model, _ := card.Model(card.Selected)
	return report.LogFigure(run, curves, model), nil
}

// stepFigure draws the loop's answer to a setpoint step.
func stepFigure(card *fit.Card, gains *tune.Gains) (*report.Figure, error) {
	loop, err := report.LoopOf(card, gains)
	if err != nil {
		return nil, err
	}
	if loop.Step == nil {
		return nil, answerNof("the loop is unstable on the best fit: there is no step response to draw")
	}
	return report.StepFigure(loop.Step, gains), nil
}
