package report

import (
	"fmt"
	"math"
	"strings"

	"lagwright/cmd/lagwright/internal/format"
	"lagwright/fit"
)

// heater answers: what is this heater?
func heater(b *Bundle) *section {
	m := b.model()
	if m == nil {
		return nil
	}
	s := &section{ID: "heater", Title: "What is this heater?", Lead: structureWords(m.Structure)}
	s.Blocks = append(s.Blocks,
		block{Table: parameterTable(b.Card, m)},
		block{Figure: picturesOf(IntervalFigure(m, b.Card.Profiles, b.Card.Confidence))},
	)
	if len(b.Card.Derived) > 0 {
		s.Blocks = append(s.Blocks, block{Table: derivedTable(b.Card)})
	}
	if len(b.Card.Models) > 1 {
		s.Blocks = append(s.Blocks, block{Table: structureTable(b.Card)})
	}
	s.Blocks = append(s.Blocks, block{Table: measuredTable(b.Card, m)})
	return s
}

// structureWords says what a structure is.
func structureWords(name string) string {
	switch {
	case name == "fopdt":
		return "A gain, one lag and a dead time (fopdt) describe it."
	case name == "ipdt":
		return "The record shows no plateau: a slope and a dead time (ipdt) describe it."
	case strings.HasPrefix(name, "chain"):
		return fmt.Sprintf("A gain, %s lags in a row and a dead time (%s) describe it.", strings.TrimPrefix(name, "chain"), name)
	case strings.HasPrefix(name, "equal"):
		return fmt.Sprintf("A gain, %s equal lags in a row and a dead time (%s) describe it.", strings.TrimPrefix(name, "equal"), name)
	}
	return "The model is of structure " + name + "."
}

func parameterTable(c *fit.Card, m *fit.Model) *table {
	t := &table{
		Caption: fmt.Sprintf("Parameters of the %s model with their %s intervals", m.Structure, format.Percent(c.Confidence)),
		Head:    []string{"Parameter", "Value", "Unit", "Interval"},
	}
	for _, p := range m.Parameters {
		interval := format.Interval(p.Value, p.Low, p.High)
		if p.Fixed {
			interval = "fixed by hand"
		}
		t.Rows = append(t.Rows, []cell{head(parameterName(p.Name)), num(bare(p.Value, p.Low, p.High, p.Fixed)), text(format.Unit(p.Unit)), num(interval)})
	}
	return t
}

// bare is an estimate's number with the digits its bound deserves, alone.
func bare(v float64, low, high *float64, fixed bool) string {
	if fixed {
		return format.Short(v, 6)
	}
	s, _, _ := strings.Cut(format.Value(v, low, high, ""), " ")
	return s
}

func derivedTable(c *fit.Card) *table {
	t := &table{Caption: "What follows from them", Head: []string{"Quantity", "Value", "Unit", "Interval"}}
	for _, d := range c.Derived {
		t.Rows = append(t.Rows, []cell{head(parameterName(d.Name)), num(bare(d.Value, d.Low, d.High, false)), text(format.Unit(d.Unit)), num(format.Interval(d.Value, d.Low, d.High))})
	}
	return t
}

func structureTable(c *fit.Card) *table {
	t := &table{
		Caption: "Every structure tried: AICc and BIC over the least; within 2 the log cannot tell structures apart",
		Head:    []string{"Structure", "AICc", "BIC", "RMSE", "Fit", "Ljung-Box p", "Chosen"},
	}
	aicc, bic := math.Inf(1), math.Inf(1)
	for _, m := range c.Models {
		aicc, bic = math.Min(aicc, m.AICc), math.Min(bic, m.BIC)
	}
	for _, m := range c.Models {
		chosen := cell{}
		if m.Structure == c.Selected {
			chosen = cell{Text: "chosen", Kind: "good"}
		}
		t.Rows = append(t.Rows, []cell{
			head(m.Structure), num(fmt.Sprintf("%.1f", m.AICc-aicc)), num(fmt.Sprintf("%.1f", m.BIC-bic)),
			num(format.Amount(m.RMSE, kelvin(c.Units.Temperature), 3)), num(format.Short(m.FitPercent, 4) + " %"),
			num(format.Short(m.Residuals.LjungBoxP, 2)), chosen,
		})
	}
	return t
}

// measuredTable says where the model holds and what it assumes.
func measuredTable(c *fit.Card, m *fit.Model) *table {
	t := &table{Caption: "Where it was measured, and how", Head: []string{"Subject", "As measured"}}
	add := func(name, value string) { t.Rows = append(t.Rows, []cell{head(name), text(value)}) }
	between := func(r [2]float64, unit string) string {
		return format.Short(r[0], 4) + " to " + format.Amount(r[1], unit, 4)
	}
	add("Input", between(c.Range.Input, c.Units.Input))
	add("Temperature", between(c.Range.Temperature, c.Units.Temperature))
	if a := c.Conditions.Airflow; a != nil {
		add("Airflow", between(*a, ""))
	}
	if in := c.Conditions.Inlet; in != nil {
		add("Inlet temperature", between(*in, c.Units.Temperature))
	}
	law := "the rise follows the input (linear)"
	if c.InputLaw == "power" {
		law = "the rise follows the input squared (power)"
	}
	add("Input law", law)
	add("Start", map[string]string{"rest": "at rest at the first row", "earlier": "at rest at an earlier input", "free": "not at rest; the state is estimated"}[c.Initial])
	add("Noise", noiseWords(m.Noise, kelvin(c.Units.Temperature)))
	add("Samples", format.Thousands(m.Samples))
	return t
}

func noiseWords(n fit.Noise, unit string) string {
	s := "sd " + format.Amount(n.SD, unit, 2)
	if n.CorrelationTime > 0 {
		s += fmt.Sprintf(", correlated over %s, white part %s", format.Duration(n.CorrelationTime), format.Amount(n.WhiteSD, unit, 2))
	}
	if n.WanderSD > 0 {
		s += fmt.Sprintf("; wanders by sd %s over the log", format.Amount(n.WanderSD, unit, 2))
	}
	return s
}
