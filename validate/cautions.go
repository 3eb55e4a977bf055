package validate

import "fmt"

// cautions that go with a replay.
func cautions(p *plan) []string {
	c := p.card.Range
	return []string{
		"A replay is a computation, not a test: it holds as far as the model does, and the model holds near where it was measured.",
		fmt.Sprintf("The card was measured at inputs of %s to %s and temperatures of %s to %s.",
			number(c.Input[0]), quantity(c.Input[1], p.units.input), number(c.Temperature[0]), quantity(c.Temperature[1], p.units.temperature)),
		"Start new gains with the output limited and a small setpoint step, stay with the heater and be ready to switch off.",
		"An independent over-temperature cut-out and the airflow interlock stay in service.",
		"The outlet sensor does not see the element's sheath, which runs hotter, the more so at low flow.",
		"Local codes, the makers' instructions and licensed practice come first.",
	}
}
