package validate

import (
	"lagwright/fit"
	"lagwright/tune"
)

// cautions that go with a replay.
func cautions(p *plan) []string {
	return []string{
		"A replay is a computation, not a test: it holds as far as the model does.",
		p.card.CautionRange(),
		tune.CautionStart,
		fit.CautionCutOut,
		fit.CautionSheath,
		fit.CautionCodes,
	}
}
