package fit

import (
	"context"
	"slices"
	"testing"

	"lagwright/data"
)

// TestSwitchedInput judges a log whose ON and OFF input was not averaged over its
// cycle: nothing in it is good, and the card says so; averaged, nothing is said.
func TestSwitchedInput(t *testing.T) {
	f := families()[2]
	run := f.make(3)
	for k := range run.U {
		run.U[k] = 100
		if int(run.T[k])%5 >= 2 {
			run.U[k] = 0
		}
	}
	run.Quality.Notes = []data.Note{{Code: "input-switched", Text: "ON and OFF"}}
	report, err := Check(context.Background(), run, Options{})
	if err != nil {
		t.Fatal(err)
	}
	for _, v := range report.Verdict {
		if v.Verdict == good {
			t.Errorf("%s is said to be good: %s", v.Parameter, v.Reason)
		}
	}
	card, err := Fit(context.Background(), []*data.Run{run}, Options{Structure: "fopdt"})
	if err != nil {
		t.Fatal(err)
	}
	has := func(c *Card) bool {
		return slices.ContainsFunc(c.Warnings, func(w Warning) bool { return w.Code == "switched-input" })
	}
	if !has(card) {
		t.Error("the card does not warn of the switched input")
	}
	run.Quality.Notes = append(run.Quality.Notes, data.Note{Code: "cycle-mean", Text: "averaged"})
	if card, err = Fit(context.Background(), []*data.Run{run}, Options{Structure: "fopdt"}); err != nil || has(card) {
		t.Errorf("averaged over its cycle the input still counts as switched (%v)", err)
	}
}
