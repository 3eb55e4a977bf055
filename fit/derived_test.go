package fit

import (
	"math"
	"testing"

	"lagwright/data"
)

// With an unknown instant of the bump the total delay is as much later, and as much
// less known, as the dead time.
func TestTotalDelayKnowsTheInstant(t *testing.T) {
	runs := []*data.Run{twoLags().run(1)}
	of := func(instant string) Derived {
		for _, d := range fitted1(t, runs, Options{Structure: "chain2", BumpInstant: instant}).Derived {
			if d.Name == "total_delay" {
				return d
			}
		}
		t.Fatal("no total delay")
		return Derived{}
	}
	row, unknown := of("row"), of("unknown")
	h := medianInterval(runs[0].T)
	if got := unknown.Value - row.Value; math.Abs(got-h/2) > 1e-6 {
		t.Errorf("the total delay moves by %g s, half a row is %g s", got, h/2)
	}
	if wider := (*unknown.High - *unknown.Low) - (*row.High - *row.Low); wider < 0.3*h || wider > h {
		t.Errorf("the interval of the total delay is %g s wider, a row is %g s", wider, h)
	}
}
