package validate

import "lagwright/data"

// A log is taken as made by hand if the controller was in automatic on no more
// than this share of its rows; without a mode, if its input is changed, but at no
// more than so many rows and no more than this share of them. Common practice,
// no source.
const (
	handShare = 0.05
	handMoves = 10
)

// byHand tells a run whose input nobody's controller moved, such as a bump
// test: its logged setpoint was not followed.
func (p *plan) byHand(run *data.Run) bool {
	if len(run.Auto) > 0 {
		return manualShare(run) >= 1-handShare
	}
	if p.logged != nil { // a controller is said to have been in charge
		return false
	}
	changes := 0
	for k := 1; k < len(run.U); k++ {
		if run.U[k] != run.U[k-1] {
			changes++
		}
	}
	return changes > 0 && changes <= handMoves && float64(changes) <= handShare*float64(len(run.U))
}

// setpointGiven tells that the caller gave the setpoint or step to judge by.
func (p *plan) setpointGiven() bool {
	return p.options.Setpoint != nil || p.options.SetpointStep != nil
}

// unfollowed says why a run shows nothing of the requirement, "" where it does.
func (p *plan) unfollowed(run *data.Run) string {
	const cure = "; --setpoint-step makes a step to judge by"
	switch {
	case p.setpointGiven():
		return ""
	case !hasValue(run.Setpoint):
		return "the log has no setpoint" + cure
	case len(run.Auto) > 0 && p.byHand(run):
		return "logged in manual, where no setpoint is followed" + cure
	case p.byHand(run):
		return "the input was set by hand, so no setpoint was followed" + cure
	}
	return ""
}
