package validate

import (
	"context"
	"slices"

	"lagwright/data"
)

// maxTraced is the most runs that get a trace: the series of 10,000 runs
// would fill the memory, and nobody looks at more than the worst.
const maxTraced = 12

// addTraces replays the worst runs once more and keeps their series. read
// gives the runs of log i again.
func (p *plan) addTraces(ctx context.Context, r *Replay, done []doneLog, read func(i int) ([]*data.Run, error)) error {
	if !p.options.Traces {
		return nil
	}
	worst := r.worstFirst()
	worst = worst[:min(maxTraced, len(worst))]
	q := *p
	q.traces, q.logged = true, nil
	team := q.teams(1)[0]
	next := 0 // r.Runs holds the runs of the logs one after another
	for i, d := range done {
		mine := r.Runs[next : next+len(d.Runs)]
		next += len(d.Runs)
		if !slices.ContainsFunc(worst, func(w *RunReplay) bool { return within(w, mine) }) {
			continue
		}
		runs, err := read(i)
		if err != nil {
			return err
		}
		for k := range mine {
			run := slices.IndexFunc(runs, func(run *data.Run) bool { return run.Source.Name == mine[k].Name })
			if run < 0 || !slices.Contains(worst, &mine[k]) {
				continue
			}
			traced, err := q.replayRun(ctx, runs[run], team)
			if err != nil {
				return err
			}
			mine[k].Trace = traced.Trace
		}
	}
	return ctx.Err()
}

func within(w *RunReplay, runs []RunReplay) bool {
	for k := range runs {
		if w == &runs[k] {
			return true
		}
	}
	return false
}

// maxTrace is the most rows of a trace.
const maxTrace = 2400

// thin returns the rows to keep of series of equal length: all when they are
// few, else of every stretch its first row and those of each series' least
// and greatest value, and the last row.
func thin(limit int, series ...[]float64) []int {
	n := len(series[0])
	if n <= limit {
		rows := make([]int, n)
		for i := range rows {
			rows[i] = i
		}
		return rows
	}
	stretches := max(1, (limit-1)/(1+2*len(series)))
	var rows []int
	for b := range stretches {
		lo, hi := b*n/stretches, (b+1)*n/stretches
		rows = append(rows, lo)
		for _, s := range series {
			least, greatest := lo, lo
			for i := lo; i < hi; i++ {
				if s[i] < s[least] {
					least = i
				}
				if s[i] > s[greatest] {
					greatest = i
				}
			}
			rows = append(rows, least, greatest)
		}
	}
	rows = append(rows, n-1)
	slices.Sort(rows)
	return slices.Compact(rows)
}

// trace writes the kept rows as series with their bands. Between two segments
// stands one row of nulls, which breaks a drawn line.
func (e *ensemble) trace(courses []*course, level float64) *Trace {
	tr := &Trace{}
	n := len(e.figures)
	at := 0
	for i, c := range courses {
		if i > 0 {
			before := courses[i-1]
			tr.add((before.t[len(before.t)-1]+c.t[0])/2, nil, nil, nil, nil, nil, nil, nil, nil, nil)
		}
		for _, row := range e.rows[i] {
			y := spreadOf(e.y[at*n:(at+1)*n], level)
			u := spreadOf(e.u[at*n:(at+1)*n], level)
			tr.add(c.t[row], &c.r[row], &c.y[row], &c.u[row],
				finite(y.median), finite(y.low), finite(y.high), finite(u.median), finite(u.low), finite(u.high))
			at++
		}
	}
	return tr
}

func (tr *Trace) add(t float64, setpoint, logged, loggedIn, median, low, high, medianIn, lowIn, highIn *float64) {
	tr.T = append(tr.T, t)
	for _, s := range []struct {
		to *[]*float64
		v  *float64
	}{
		{&tr.Setpoint, setpoint}, {&tr.Logged, logged}, {&tr.LoggedIn, loggedIn},
		{&tr.Median, median}, {&tr.Low, low}, {&tr.High, high},
		{&tr.MedianIn, medianIn}, {&tr.LowIn, lowIn}, {&tr.HighIn, highIn},
	} {
		*s.to = append(*s.to, s.v)
	}
}
