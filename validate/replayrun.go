package validate

import (
	"context"
	"errors"
	"fmt"
	"math"
	"sync"
	"sync/atomic"
	"time"

	"lagwright/data"
	"lagwright/ident"
)

// replayRun replays one run on every plausible plant, shared out among the
// runners. The result does not depend on their number.
func (p *plan) replayRun(ctx context.Context, run *data.Run, runners []*runner) (RunReplay, error) {
	out := RunReplay{
		File: run.Source.File, Name: run.Source.Name, SHA256: run.Source.SHA256,
		Rows: len(run.T), Start: startText(run.Start), Reasons: []string{}, Warnings: []string{},
	}
	if err := p.checkUnits(run); err != nil {
		return out, err
	}
	courses, warnings, err := p.courses(run)
	if err != nil {
		return out, err
	}
	m := p.yardstick(run)
	logged := measureLogged(courses, m, hasValue(run.Setpoint) && !p.byHand(run))
	e, err := p.ensemble(ctx, courses, m, runners)
	if err != nil {
		return out, err
	}
	if p.logged != nil {
		if out.BackTest, err = p.backTest(ctx, run, courses); err != nil {
			return out, err
		}
	}
	p.conclude(&out, run, e)
	out.Logged, out.HandOver = logged.metrics(), handOverOf(courses, e.figures, logged)
	out.Warnings = append(append(out.Warnings, warnings...), p.warnings(run, courses, e, out.HandOver)...)
	if p.traces {
		out.Trace = e.trace(courses, p.options.Confidence)
	}
	return out, nil
}

func startText(t time.Time) *string {
	if t.IsZero() {
		return nil
	}
	s := t.Format(time.RFC3339Nano)
	return &s
}

func (p *plan) checkUnits(run *data.Run) error {
	for _, u := range []struct{ what, run, card string }{
		{"input", run.Units.Input, p.units.input},
		{"temperature", run.Units.Temperature, p.units.temperature},
	} {
		if u.run != "" && u.card != "" && u.run != u.card {
			return fmt.Errorf("the %s is in %s, the card's in %s: read the log with the unit or span of the card", u.what, u.run, u.card)
		}
	}
	return nil
}

// courses prepares the unbroken segments of a run and says what was left out.
func (p *plan) courses(run *data.Run) (out []*course, warnings []string, err error) {
	parts, dropped := segments(run)
	if len(parts) == 0 {
		return nil, nil, fmt.Errorf("no unbroken part of %d rows with a temperature", minSegment)
	}
	bridged := 0
	for _, s := range parts {
		c, err := newCourseAt(run, s, p, len(out) > 0)
		if err != nil {
			return nil, nil, err
		}
		out = append(out, c)
		bridged += s.bridged
	}
	if len(parts) > 1 {
		warnings = append(warnings, fmt.Sprintf("the recording is broken: %d parts are replayed each for itself, starting from the log", len(parts)))
	}
	if dropped > 0 {
		warnings = append(warnings, fmt.Sprintf("%d of %d rows are left out: no temperature, or parts of fewer than %d rows", dropped, len(run.T), minSegment))
	}
	if bridged > 0 {
		warnings = append(warnings, bridgedWords(bridged))
	}
	return out, warnings, nil
}

func bridgedWords(n int) string {
	if n == 1 {
		return "1 missing temperature is bridged by a straight line"
	}
	return fmt.Sprintf("%d missing temperatures are bridged by straight lines (at most %d in a row)", n, maxBridge)
}

// measureLogged measures the log itself. Against a setpoint that was not in
// force when it was recorded there is no error to measure.
func measureLogged(courses []*course, m yardstick, followed bool) figures {
	f := noFigures()
	for _, c := range courses {
		s := c.signal(c.y, c.u)
		if !followed {
			s.r = nil
		}
		f.add(s, m)
	}
	return f
}

// An ensemble is one run replayed on all plausible plants.
type ensemble struct {
	figures []figures // by plant
	quiet   []*course // without noise and loads, by course; nil where no setpoint moves
	rows    [][]int   // rows kept for bands, by course
	y, u    []float64 // at the kept rows: plants side by side, row after row
}

// ensemble replays the courses on every plant. Series are kept only when
// traces are wanted, and then only at rows that show every extreme of the log
// and of the best-fit plant's replay.
func (p *plan) ensemble(ctx context.Context, courses []*course, m yardstick, runners []*runner) (*ensemble, error) {
	e := &ensemble{figures: make([]figures, len(p.plants)), quiet: p.quietCourses(courses, m)}
	if p.traces {
		if err := e.choose(p, courses); err != nil {
			return nil, err
		}
	}
	var next atomic.Int64
	var wait sync.WaitGroup
	errs := make([]error, len(runners))
	for w, r := range runners {
		wait.Go(func() {
			defer func() { // a panic here would pass by the one of attempt
				if r := recover(); r != nil {
					errs[w] = fmt.Errorf("internal error: %v", r)
				}
			}()
			for errs[w] == nil && ctx.Err() == nil {
				k := int(next.Add(1)) - 1
				if k >= len(p.plants) {
					return
				}
				errs[w] = e.one(p, courses, m, r, k)
			}
		})
	}
	wait.Wait()
	return e, errors.Join(ctx.Err(), errors.Join(errs...))
}

// one replays all courses on plant k, as recorded and for the setpoint alone.
func (e *ensemble) one(p *plan, courses []*course, m yardstick, r *runner, k int) error {
	f, still := noFigures(), noFigures()
	ranAway := false
	at := 0
	for i, c := range courses {
		y, u := r.buffers(len(c.t))
		if quiet := e.quiet[i]; quiet != nil {
			quiet = p.on(r.plants[k], quiet, c)
			if err := r.replay(quiet, k, y, u); err != nil {
				return err
			}
			ranAway = ranAway || math.IsInf(y[len(y)-1], 1)
			still.add(quiet.signal(y, u), m.quiet())
		}
		if err := r.replay(c, k, y, u); err != nil {
			return err
		}
		ranAway = ranAway || math.IsInf(y[len(y)-1], 1)
		f.add(c.signal(y, u), m)
		if e.rows == nil {
			continue
		}
		for _, row := range e.rows[i] {
			e.y[at*len(e.figures)+k], e.u[at*len(e.figures)+k] = y[row], u[row]
			at++
		}
	}
	f.judgeQuiet(still)
	e.figures[k] = f
	if ranAway {
		e.figures[k] = runawayFigures()
	}
	return nil
}

// choose picks the rows at which the series are kept.
func (e *ensemble) choose(p *plan, courses []*course) error {
	r := newRunner(p.law, p.gains, []ident.Plant{p.best})
	kept := 0
	for _, c := range courses {
		y, u := r.buffers(len(c.t))
		if err := r.replay(c, 0, y, u); err != nil {
			return err
		}
		rows := thin(maxTrace/len(courses), c.y, y)
		e.rows = append(e.rows, rows)
		kept += len(rows)
	}
	e.y = make([]float64, kept*len(p.plants))
	e.u = make([]float64, kept*len(p.plants))
	return nil
}
