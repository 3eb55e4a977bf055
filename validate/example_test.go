package validate_test

import (
	"context"
	"fmt"
	"log"
	"math"

	"lagwright/data"
	"lagwright/fit"
	"lagwright/ident"
	"lagwright/tune"
	"lagwright/validate"
)

// dryerCard is a card as package fit makes it, cut to what a replay needs:
// the process-air heater of a drying line, 8 K/V.
func dryerCard() *fit.Card {
	plant := func(gain, lag, dead float64) []float64 { return []float64{gain, lag, dead} }
	best := plant(8, 12, 2)
	return &fit.Card{
		Schema: fit.CardSchema, InputLaw: "linear", Selected: "fopdt", Confidence: 0.95,
		Units: fit.CardUnits{Time: "s", Input: "V", Temperature: "degC"},
		Range: fit.CardRange{Input: [2]float64{2, 8}, Temperature: [2]float64{40, 110}},
		Models: []fit.Model{{Structure: "fopdt", Parameters: []fit.Parameter{
			{Name: "gain", Unit: "K/V", Value: best[0]}, {Name: "lag1", Unit: "s", Value: best[1]}, {Name: "dead_time", Unit: "s", Value: best[2]},
		}}},
		Plants: fit.Plants{Structure: "fopdt", Parameters: []string{"gain", "lag1", "dead_time"},
			Values: [][]float64{best, plant(7.7, 11.4, 2.1), plant(8.3, 12.5, 1.9)}},
	}
}

// dryerRun is a run of that heater in manual at 5 V with a load at 100 s, and
// the setpoint that was wanted.
func dryerRun() *data.Run {
	run := &data.Run{Source: data.Source{File: "dryer-0412.csv"}, Units: data.Units{Time: "s", Input: "V", Temperature: "degC"}}
	for i := range 400 {
		t := 0.5 * float64(i)
		load := 0.0
		if t > 100 {
			load = -6 * (1 - math.Exp(-(t-100)/8))
		}
		run.T, run.U = append(run.T, t), append(run.U, 5)
		run.Y, run.Setpoint = append(run.Y, 70+load), append(run.Setpoint, 70)
	}
	return run
}

// What PI control would have made of a load that manual operation let through.
func ExampleReplayRuns() {
	ti, ceiling := 12.0, 75.0
	gains := &tune.Gains{
		Schema: tune.GainsSchema, Controller: "pi", Form: "ideal", Kc: 0.35, Ti: &ti, SetpointWeight: 1, Action: "reverse", Scan: 0.5,
		Units: tune.GainUnits{Input: "V", Temperature: "degC"}, Requirement: tune.Requirement{TempMax: &ceiling},
	}
	replay, err := validate.ReplayRuns(context.Background(), dryerCard(), []*data.Run{dryerRun()}, gains, validate.Options{})
	if err != nil {
		log.Fatal(err)
	}
	run := replay.Runs[0]
	fmt.Printf("largest deviation: logged %.1f K, replayed %.1f K\n", *run.Logged.Deviation, *run.Proposed.Median.Deviation)
	fmt.Printf("stays under %.0f °C on %.0f%% of the plausible plants: %v\n", ceiling, 100*run.Probability, run.Meets)
	// Output:
	// largest deviation: logged 6.0 K, replayed 2.2 K
	// stays under 75 °C on 100% of the plausible plants: true
}

// Two gains on the same runs, side by side.
func ExampleCompare() {
	var replays []*validate.Replay
	for _, kc := range []float64{0.1, 0.35} {
		ti := 12.0
		gains := &tune.Gains{
			Schema: tune.GainsSchema, Controller: "pi", Form: "ideal", Kc: kc, Ti: &ti, SetpointWeight: 1, Action: "reverse", Scan: 0.5,
			Units: tune.GainUnits{Input: "V", Temperature: "degC"},
		}
		r, err := validate.ReplayRuns(context.Background(), dryerCard(), []*data.Run{dryerRun()}, gains, validate.Options{})
		if err != nil {
			log.Fatal(err)
		}
		replays = append(replays, r)
	}
	table, err := validate.Compare([]string{"cautious", "brisk"}, replays)
	if err != nil {
		log.Fatal(err)
	}
	for _, row := range table.Rows {
		for k, cell := range row.Cells {
			fmt.Printf("%s, %s: IAE %.0f K·s\n", row.File, table.Columns[k], *cell.Proposed.Median.IAE)
		}
	}
	// Output:
	// dryer-0412.csv, cautious: IAE 90 K·s
	// dryer-0412.csv, brisk: IAE 26 K·s
}

// The gain of a heater over eight bump tests, the last four after a tenth of
// its element stopped heating.
func ExampleTrack() {
	st, err := ident.ParseStructure("fopdt")
	if err != nil {
		log.Fatal(err)
	}
	var runs []*data.Run
	for month := range 8 {
		gain := 8.0
		if month >= 4 {
			gain = 7.2
		}
		runs = append(runs, bumpTest(st, gain, month))
	}
	drift, err := validate.Track(context.Background(), runs, fit.Options{Structure: "fopdt", Noise: "white", Initial: "rest", Drift: "none"}, validate.TrackOptions{})
	if err != nil {
		log.Fatal(err)
	}
	gain := drift.Parameters[0]
	fmt.Printf("%s: alarm %v, %.0f%% from run %d on\n", gain.Name, gain.Alarm, *gain.Step.Percent, *gain.Step.Run+1)
	fmt.Println(drift.Hints[0])
	// Output:
	// gain: alarm true, -10% from run 5 on
	// The gain fell while dead time and lags did not change: look at the element and its supply, not at the airflow, since less or more air would have moved dead time or lags too. A hint where to look first, not a diagnosis.
}

// bumpTest is a bump from 4 to 6 V on a first-order heater with a little
// noise that repeats itself from run to run.
func bumpTest(st ident.Structure, gain float64, month int) *data.Run {
	run := &data.Run{Source: data.Source{File: fmt.Sprintf("bump-%02d.csv", month+1)}, Units: data.Units{Time: "s", Input: "V", Temperature: "degC"}}
	for i := range 300 {
		run.T = append(run.T, 0.5*float64(i))
		run.U = append(run.U, 4+2*float64(min(1, i/60)))
	}
	rise := ident.NewSimulator(run.T, ident.HeldInput(run.T, run.U, ident.Linear)).Response(nil, st, []float64{12}, 2)
	for i := range rise {
		noise := 0.2 * math.Sin(12.9898*float64(i*i+7*month*i+month))
		run.Y = append(run.Y, 60+gain*rise[i]+noise)
	}
	run.Quality.MedianInterval = 0.5
	return run
}
