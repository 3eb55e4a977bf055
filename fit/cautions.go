package fit

import "fmt"

// Cautions that stand beside every result, in the same words everywhere. Common
// practice, no source.
const (
	CautionCutOut = "Keep the independent over-temperature cut-out and the airflow interlock in service during every test and trial; never bypass them."
	CautionSheath = "The outlet sensor does not see the element's sheath, which runs hotter, the more so at low airflow."
	CautionStay   = "Do not bump toward a limit; stay with the heater, ready to switch it off."
	CautionCodes  = "Local codes, the makers' instructions and licensed practice come first."
)

// CautionRange says where the model holds, with the numbers of the card.
func (c *Card) CautionRange() string {
	in, temp := c.Range.Input, c.Range.Temperature
	return fmt.Sprintf("The model holds near where it was measured: input %s to %s, temperature %s to %s, at the airflow of that day.",
		figure(in[0], 3), quantity(in[1], c.Units.Input, 3), figure(temp[0], 3), quantity(temp[1], c.Units.Temperature, 3))
}

func (c *Card) cautions() []string {
	return []string{CautionCutOut, CautionSheath, c.CautionRange(), CautionStay, CautionCodes}
}
