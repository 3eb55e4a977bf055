package validate

import (
	"lagwright/fit"
	"lagwright/tune"
)

// cautions that go with a replay.
func cautions(p *plan) []string {
	var out []string
	if !p.gains.MadeFrom(p.cardID) {
		out = append(out, "The gains were made from another card: what their file promises is of that one.")
	}
	return append(out,
		"A replay is a computation, not a test: it holds as far as the model does.",
		p.card.CautionRange(),
		tune.CautionStart,
		fit.CautionCutOut,
		fit.CautionSheath,
		fit.CautionCodes,
	)
}
