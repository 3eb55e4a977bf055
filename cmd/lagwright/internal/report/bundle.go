package report

import (
	"lagwright/data"
	"lagwright/fit"
	"lagwright/tune"
	"lagwright/validate"
)

// Bundle is all that a page can show. What is nil or empty is absent from the
// page; a bundle of a card alone, or of runs alone, makes a page of its own.
type Bundle struct {
	Runs   []*data.Run
	Curves []*fit.Curves      // the card's model beside each of Runs; nil where there is none
	Checks []*fit.CheckReport // beside each of Runs; nil where there is none
	Card   *fit.Card
	Gains  *tune.Gains
	Replay *validate.Replay
	Drift  *validate.Drift

	Loop *Loop // what Gains do on Card's plants; nil: Page gathers it

	loopError string // why there are no curves of the loop

	Tool    string // name and version of the program
	Command string // what makes this page again, as typed
}

// model is the card's selected model, nil without one.
func (b *Bundle) model() *fit.Model {
	if b.Card == nil {
		return nil
	}
	for i := range b.Card.Models {
		if b.Card.Models[i].Structure == b.Card.Selected {
			return &b.Card.Models[i]
		}
	}
	return nil
}

// curves are those of a run, nil where there are none.
func (b *Bundle) curves(run int) *fit.Curves {
	if run < len(b.Curves) {
		return b.Curves[run]
	}
	return nil
}

// check is that of a run, nil where there is none.
func (b *Bundle) check(run int) *fit.CheckReport {
	if run < len(b.Checks) {
		return b.Checks[run]
	}
	return nil
}
