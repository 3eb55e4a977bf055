package validate

import (
	"context"
	"errors"
	"fmt"
	"path/filepath"
	"strings"
	"sync"
	"sync/atomic"

	"lagwright/data"
	"lagwright/fit"
	"lagwright/tune"
)

// ReplayRuns replays runs under the gains on every plausible plant of the
// card. A run that cannot be replayed is listed in Failed with its reason and
// does not stop the others; an error means that card, gains or options are
// wrong, or that ctx was cancelled. The result does not depend on o.Workers.
func ReplayRuns(ctx context.Context, card *fit.Card, runs []*data.Run, gains *tune.Gains, o Options) (*Replay, error) {
	p, err := newPlan(card, gains, o)
	if err != nil {
		return nil, err
	}
	done := make([]doneLog, len(runs))
	teams := p.teams(len(runs))
	err = share(ctx, len(runs), len(teams), o.Progress, func(w, i int) error {
		done[i] = p.attempt(ctx, runs[i].Source.File, runs[i:i+1], teams[w])
		return ctx.Err()
	})
	if err != nil {
		return nil, err
	}
	r := p.assemble(done)
	return r, p.addTraces(ctx, r, done, func(i int) ([]*data.Run, error) { return runs[i : i+1], nil })
}

// ReplayFiles is ReplayRuns for files: read turns one file into its runs. Only
// the files that the workers are at are in memory, and about 2 kB of result a
// run. With o.Journal each file that is done is recorded there, so that a
// process that was killed goes on with o.Resume; the caller removes the
// journal after it has written the result. The result, down to its bytes, is
// the same with and without a break.
func ReplayFiles(ctx context.Context, card *fit.Card, files []string, read func(ctx context.Context, file string) ([]*data.Run, error),
	gains *tune.Gains, o Options) (result *Replay, err error) {
	p, err := newPlan(card, gains, o)
	if err != nil {
		return nil, err
	}
	known := p.previous()
	var j *journal
	if o.Journal != "" {
		key, err := p.key()
		if err != nil {
			return nil, err
		}
		var found map[logID]doneLog
		if j, found, err = openJournal(o.Journal, key, o.Resume); err != nil {
			return nil, err
		}
		defer func() { err = errors.Join(err, j.close()) }()
		for id, d := range found {
			known[id] = d
		}
	}
	done := make([]doneLog, len(files))
	teams := p.teams(len(files))
	err = share(ctx, len(files), len(teams), o.Progress, func(w, i int) error {
		var id logID
		identified := false
		if j != nil || len(known) > 0 { // hashing is a read of its own
			id, identified = identify(files[i])
		}
		if d, ok := known[id]; ok && identified {
			done[i] = d
			return nil
		}
		done[i] = p.replayFile(ctx, files[i], read, teams[w])
		if ctx.Err() != nil {
			return ctx.Err()
		}
		if j == nil || !identified {
			return nil
		}
		done[i].File, done[i].SHA256 = id.file, id.sha
		return j.append(done[i])
	})
	if err != nil {
		return nil, err
	}
	r := p.assemble(done)
	return r, p.addTraces(ctx, r, done, func(i int) ([]*data.Run, error) { return read(ctx, files[i]) })
}

// previous lists the logs of an earlier result that was computed with the
// same card, gains and options.
func (p *plan) previous() map[logID]doneLog {
	known := map[logID]doneLog{}
	old := p.options.Previous
	if !p.options.Resume || old == nil || !p.sameAs(old) {
		return known
	}
	for _, run := range old.Runs {
		run.Trace = nil // made anew for the runs that are now the worst
		id := logID{run.File, run.SHA256}
		d := known[id]
		d.File, d.SHA256 = run.File, run.SHA256
		d.Runs = append(d.Runs, run)
		known[id] = d
	}
	for _, failed := range old.Failed { // a log of which a run failed is done again
		for id := range known {
			if strings.HasPrefix(failed.File, id.file) { // the file, or a run in it
				delete(known, id)
			}
		}
	}
	return known
}

// sameAs tells whether the runs of an earlier result can be taken over.
func (p *plan) sameAs(old *Replay) bool {
	mine, err1 := p.key()
	return err1 == nil && old.Key == mine
}

func (p *plan) replayFile(ctx context.Context, file string, read func(context.Context, string) ([]*data.Run, error), team []*runner) (d doneLog) {
	defer recovered(&d, file)
	runs, err := read(ctx, file)
	if err != nil {
		return doneLog{Failed: []FailedRun{{filepath.Base(file), err.Error()}}}
	}
	return p.attempt(ctx, file, runs, team)
}

// attempt replays runs and lists those that cannot be.
func (p *plan) attempt(ctx context.Context, file string, runs []*data.Run, team []*runner) (d doneLog) {
	defer recovered(&d, file)
	d.Runs = []RunReplay{}
	for _, run := range runs {
		out, err := p.replayRun(ctx, run, team)
		if err != nil {
			name := filepath.Base(file)
			if run.Source.Name != "" {
				name += ", run " + run.Source.Name
			}
			d.Failed = append(d.Failed, FailedRun{name, err.Error()})
			continue
		}
		d.Runs = append(d.Runs, out)
	}
	return d
}

// recovered turns a panic over one log into a failed log: it must not take
// the others down.
func recovered(d *doneLog, file string) {
	if r := recover(); r != nil {
		d.Failed = append(d.Failed, FailedRun{filepath.Base(file), fmt.Sprintf("internal error: %v", r)})
	}
}

// teams gives each worker its runners. Many logs are shared out one to a
// worker; where there are fewer logs than workers, the plants of each are.
func (p *plan) teams(logs int) [][]*runner {
	workers := max(1, min(p.options.Workers, logs))
	each := max(1, p.options.Workers/workers)
	out := make([][]*runner, workers)
	for w := range out {
		for range each {
			out[w] = append(out[w], newRunner(p.law, p.gains, p.plants))
		}
	}
	return out
}

// share calls do(worker, i) for every i < n from the workers, and progress
// after each. It stops at the first error.
func share(ctx context.Context, n, workers int, progress func(done, total int), do func(w, i int) error) error {
	ctx, stop := context.WithCancelCause(ctx)
	defer stop(nil)
	var next atomic.Int64
	var wait sync.WaitGroup
	var mu sync.Mutex
	done := 0
	for w := range workers {
		wait.Go(func() {
			for ctx.Err() == nil {
				i := int(next.Add(1)) - 1
				if i >= n {
					return
				}
				if err := do(w, i); err != nil {
					stop(err)
					return
				}
				mu.Lock()
				done++
				if progress != nil {
					progress(done, n)
				}
				mu.Unlock()
			}
		})
	}
	wait.Wait()
	return context.Cause(ctx)
}

// assemble puts the results in the order of the logs and sums them up.
func (p *plan) assemble(done []doneLog) *Replay {
	key, _ := p.key() // newPlan has made it once
	r := &Replay{
		Schema: ReplaySchema, Tool: p.options.Tool, Card: p.cardID, Key: key, Gains: *p.gains, Requirement: p.options.Requirement, RunLimits: p.options.RunLimits,
		Plants: len(p.plants), Confidence: p.options.Confidence, Runs: []RunReplay{}, Failed: []FailedRun{}, Cautions: cautions(p),
	}
	for _, d := range done {
		r.Runs = append(r.Runs, d.Runs...)
		r.Failed = append(r.Failed, d.Failed...)
	}
	r.sum(len(p.asked) > 0)
	return r
}

// sum fills the summary.
func (r *Replay) sum(asked bool) {
	s := Summary{Runs: len(r.Runs), Failed: len(r.Failed)}
	for _, run := range r.Runs {
		if run.Judged {
			s.Judged++
		}
		if run.Judged && run.Meets {
			s.Meeting++
		}
		if run.BackTest != nil && !run.BackTest.Reproduced {
			s.Distrusted++
		}
	}
	s.Meets = s.Meeting == s.Judged && (s.Judged > 0 || !asked)
	if s.Judged > 0 {
		s.ShareMeets = float64(s.Meeting) / float64(s.Judged)
	}
	r.Summary = s
}
