package validate

import (
	"context"
	"errors"
	"fmt"
	"math"
	"runtime"
	"slices"
	"time"

	"lagwright/data"
	"lagwright/fit"
)

// TrackOptions says how a history of runs is judged.
type TrackOptions struct {
	FalseAlarm float64               // chance of any alarm on a history without change; 0 means 0.05
	Workers    int                   // runs fitted at a time; 0 means one a core; the result does not depend on it
	Progress   func(done, total int) // called from one goroutine at a time; nil means not
}

// ErrFewRuns is wrapped when fewer than two runs could be fitted.
var ErrFewRuns = errors.New("a history needs at least two fitted runs")

// Track fits one structure to each run and tests every parameter for a step
// and for a slope over the runs. Without a structure in fo it takes the one
// that most runs choose for themselves (of equals the simpler). Runs are
// ordered by their clock where all have one, else as given. A run that cannot
// be fitted, or whose fit fixes no gain, is listed in Failed and does not stop
// the others; so is one that holds the same recording as another. Runs in
// different units are refused: the error wraps [fit.ErrUnlike].
func Track(ctx context.Context, runs []*data.Run, fo fit.Options, o TrackOptions) (*Drift, error) {
	if o.FalseAlarm == 0 {
		o.FalseAlarm = 0.05
	}
	if !(o.FalseAlarm > 0 && o.FalseAlarm < 1) {
		return nil, fmt.Errorf("false alarm rate %g: give a share between 0 and 1, such as 0.05", o.FalseAlarm)
	}
	if err := alike(runs); err != nil {
		return nil, err
	}
	if o.Workers <= 0 {
		o.Workers = runtime.GOMAXPROCS(0)
	}
	fo.Workers, fo.Progress = 1, nil // the runs are fitted side by side
	fo.Plants = -1                   // no use for plausible plants here
	if fo.Structure == "auto" {
		fo.Structure = ""
	}
	runs, twins, warnings := withoutTwins(runs)
	all, structure, err := fitAlike(ctx, runs, fo, o)
	if err != nil {
		return nil, err
	}
	d := &Drift{Schema: DriftSchema, Tool: fo.Tool, Structure: structure, Confidence: fo.Confidence, FalseAlarm: o.FalseAlarm,
		Warnings: append([]string{}, warnings...), Failed: append([]FailedRun{}, twins...), Cautions: driftCautions()}
	if d.Confidence == 0 {
		d.Confidence = 0.95
	}
	var fitted []estimate
	for _, e := range all {
		if e.err != nil {
			d.Failed = append(d.Failed, FailedRun{e.run.title(), e.err.Error()})
			continue
		}
		if why := e.unusable(); why != "" {
			d.Failed = append(d.Failed, FailedRun{e.run.title(), why})
			continue
		}
		fitted = append(fitted, e)
	}
	if len(fitted) < 2 {
		return nil, fmt.Errorf("%w: %d of %d could be%s", ErrFewRuns, len(fitted), len(runs)+len(twins), firstReason(d.Failed))
	}
	d.judge(fitted, uint64(fo.Rand))
	return d, nil
}

// alike refuses runs in other units: their parameters cannot stand in one
// column, and most likely they are of other heaters.
func alike(runs []*data.Run) error {
	for _, run := range runs {
		if a, b := runs[0].Units, run.Units; a.Input != b.Input || a.Temperature != b.Temperature {
			return fmt.Errorf("%w: %s is in %s and %s, %s in %s and %s; a history is that of one heater: track each heater by itself, or bring its logs to the same units with --input-unit, --temp-unit",
				fit.ErrUnlike, runTitle(runs[0]), data.ShownUnit(a.Input), data.ShownUnit(a.Temperature), runTitle(run), data.ShownUnit(b.Input), data.ShownUnit(b.Temperature))
		}
	}
	return nil
}

func runTitle(run *data.Run) string {
	return DriftRun{File: clean(run.Source.File), Name: clean(run.Source.Name)}.title()
}

func firstReason(failed []FailedRun) string {
	if len(failed) == 0 {
		return ""
	}
	return fmt.Sprintf(" (%s: %s)", clean(failed[0].File), failed[0].Reason)
}

// An estimate is the outcome of one run's fit.
type estimate struct {
	run        DriftRun
	start      time.Time
	selected   string
	span       float64 // s
	parameters []fit.Parameter
	err        error
}

func (r DriftRun) title() string {
	if r.Name == "" {
		return r.File
	}
	return r.File + ", run " + r.Name
}

// fitAlike fits every run, and again with the common structure where a run
// chose another.
func fitAlike(ctx context.Context, runs []*data.Run, fo fit.Options, o TrackOptions) ([]estimate, string, error) {
	all := make([]estimate, len(runs))
	fitOne := func(structure string) func(int, int) error {
		return func(_, i int) error {
			if structure != "" && (all[i].err != nil || all[i].selected == structure) {
				return ctx.Err()
			}
			chosen := fo
			if structure != "" {
				chosen.Structure = structure
			}
			all[i] = fitRun(ctx, runs[i], chosen)
			return ctx.Err()
		}
	}
	if err := share(ctx, len(runs), o.Workers, o.Progress, fitOne("")); err != nil {
		return nil, "", err
	}
	structure := fo.Structure
	if structure == "" {
		structure = commonest(all)
	}
	return all, structure, share(ctx, len(runs), o.Workers, nil, fitOne(structure))
}

func fitRun(ctx context.Context, run *data.Run, fo fit.Options) estimate {
	e := estimate{
		run:   DriftRun{File: run.Source.File, Name: run.Source.Name, SHA256: run.Source.SHA256, Start: startText(run.Start)},
		start: run.Start,
	}
	if n := len(run.T); n > 0 {
		e.span = run.T[n-1] - run.T[0]
	}
	card, err := fit.Fit(ctx, []*data.Run{run}, fo)
	if err != nil {
		e.err = err
		return e
	}
	e.selected = card.Selected
	if m, ok := card.Model(card.Selected); ok {
		e.parameters = m.Parameters
	}
	return e
}

// commonest returns the structure that most fits chose; of equals the one
// with fewer parameters.
func commonest(all []estimate) string {
	votes, size := map[string]int{}, map[string]int{}
	best := ""
	for _, e := range all {
		if e.err != nil || e.unusable() != "" {
			continue
		}
		s := e.selected
		votes[s]++
		size[s] = len(e.parameters)
	}
	for s, n := range votes {
		switch {
		case best == "" || n > votes[best]:
			best = s
		case n == votes[best] && (size[s] < size[best] || size[s] == size[best] && s < best):
			best = s
		}
	}
	return best
}

// judge orders the runs, tests their parameters and words what was found.
func (d *Drift) judge(fitted []estimate, rand uint64) {
	d.Clock = !slices.ContainsFunc(fitted, func(e estimate) bool { return e.start.IsZero() })
	if d.Clock {
		slices.SortStableFunc(fitted, func(a, b estimate) int { return a.start.Compare(b.start) })
	} else {
		d.Warnings = append(d.Warnings, "not every run has a date: the runs are taken in the order given, one apart")
	}
	for i, e := range fitted {
		e.run.Day = float64(i)
		if d.Clock {
			e.run.Day = e.start.Sub(fitted[0].start).Hours() / 24
		}
		d.Runs = append(d.Runs, e.run)
	}
	tracks := d.tracks(fitted)
	tests := 0
	for _, tr := range tracks {
		tests += tr.tests()
	}
	for i, tr := range tracks {
		p := tr.judge(d, tests, newRand(rand, uint64(i)))
		d.Alarm = d.Alarm || p.Alarm
		d.Parameters = append(d.Parameters, p)
		d.Warnings = append(d.Warnings, tr.apart(d)...)
	}
	if len(d.Runs) < honestRuns {
		d.Warnings = append(d.Warnings, fmt.Sprintf("%d runs are too few to show how far runs scatter when nothing changes: the tests believe the intervals of the fits", len(d.Runs)))
	}
	d.Hints = hints(d.Parameters)
}

// driftCautions go with every drift.
func driftCautions() []string {
	return []string{
		"An alarm says that a fitted number changed, not why; a hint is a place to look first, not a diagnosis.",
		"Gain, lags and dead time change with airflow, inlet temperature and operating point: compare runs made alike.",
		"Each look at a growing history is a test of its own: the false alarm rate holds for one look.",
	}
}

// bad tells a number that is none.
func bad(x float64) bool { return math.IsNaN(x) || math.IsInf(x, 0) }
