package fit

import (
	"fmt"

	"lagwright/data"
)

// cautions are the words that go with a card, with the numbers of this log.
// Common practice, no source, where no standard is named.
func cautions(runs []*data.Run, c *Card) []string {
	return []string{
		"Keep the independent over-temperature cut-out and the airflow interlock in service during every test and trial; never bypass them for a bump.",
		"The outlet sensor does not see the element's sheath, which runs hotter, the more so at low airflow.",
		fmt.Sprintf("The model holds near where it was measured: input %.4g to %s, temperature %.4g to %s, at the airflow of that day.",
			c.Range.Input[0], quantity(c.Range.Input[1], c.Units.Input, 4), c.Range.Temperature[0], quantity(c.Range.Temperature[1], c.Units.Temperature, 4)),
		"Do not bump toward a limit; stay with the heater and be ready to switch it off.",
		"Local codes, the makers' instructions and licensed practice come first.",
	}
}
