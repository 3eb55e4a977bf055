package main

import (
	"fmt"

	"lagwright/cmd/lagwright/internal/format"
	"lagwright/cmd/lagwright/internal/sketch"
	"lagwright/cmd/lagwright/internal/terminal"
	"lagwright/data"
	"lagwright/fit"
)

// A sketch is drawn from this width on, and never wider than the other.
const (
	sketchFrom = 100
	sketchUpTo = 140
)

// sketchLog draws a run, with the fit where there is one, on a terminal that
// is wide enough; elsewhere nothing.
func (c *console) sketchLog(run *data.Run, curves *fit.Curves) error {
	width, ok := c.sketchWidth()
	if !ok {
		return nil
	}
	temperature := sketch.Panel{
		Title:  fmt.Sprintf("temperature, %s", format.Unit(run.Units.Temperature)),
		Height: 9,
		Series: []sketch.Series{{T: run.T, Y: run.Y}},
	}
	if curves != nil {
		temperature.Title += ": log and fit"
		temperature.Series = append(temperature.Series, sketch.Series{T: curves.T, Y: curves.Fitted, Ink: "36"})
	}
	input := sketch.Panel{
		Title:  fmt.Sprintf("input, %s", format.Unit(run.Units.Input)),
		Height: 3,
		Series: []sketch.Series{{T: run.T, Y: run.U, Hold: true}},
	}
	fmt.Fprintln(c.out)
	return sketch.Draw(c.out, width, terminal.Colour(c.out), temperature, input)
}

// sketchFit draws a run with the card's fit.
func (c *console) sketchFit(card *fit.Card, run *data.Run) error {
	if _, ok := c.sketchWidth(); !ok {
		return nil // spare the work
	}
	curves, err := card.Curves(run, 0)
	if err != nil {
		return err
	}
	return c.sketchLog(run, curves)
}

func (c *console) sketchWidth() (int, bool) {
	width, ok := terminal.Width(c.out)
	return min(width, sketchUpTo), ok && width >= sketchFrom && !c.quiet && !c.json
}
