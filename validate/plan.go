package validate

import (
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"runtime"

	"lagwright/data"
	"lagwright/fit"
	"lagwright/ident"
	"lagwright/tune"
)

// Options says how runs are replayed. The zero value replays with the
// requirement of the gains and the setpoint of the log.
type Options struct {
	Workers  int      // goroutines; 0 means one a core; the result does not depend on it
	Setpoint *float64 // setpoint of the whole run where the log has none in force
	// SetpointStep at the first row of a run without setpoint is judged. Without
	// it the step of the requirement is replayed, and nothing judged by it.
	SetpointStep *float64
	LoggedGains  *tune.Gains      // gains in force when the logs were made: replay under them first
	Requirement  tune.Requirement // the zero value means that of the gains; its limits and scan time replace those of the gains
	RunLimits    RunLimits        // what is asked of a run beyond the requirement
	Confidence   float64          // level of the bands; 0 means 0.95
	Traces       bool             // add thinned series, for figures, to the worst 12 runs
	Tool         string           // written into the result

	Journal  string                // ReplayFiles: file that records each log that is done; "" means none
	Resume   bool                  // ReplayFiles: go on with the journal, and with Previous
	Previous *Replay               // ReplayFiles with Resume: an earlier result; its runs of unchanged logs are taken over
	Progress func(done, total int) // called from one goroutine at a time; nil means not
}

// RunLimits are asked of a whole run, with its loads and its noise; nil: not
// asked. They belong to runs and not to gains, since both grow with the load
// that a run happens to hold.
type RunLimits struct {
	Deviation *float64 `json:"largest_deviation"` // |r − y| while no setpoint move is being followed, temperature units
	IAE       *float64 `json:"iae"`               // ∫|r − y| dt over the run, temperature units × s
}

type units struct{ input, temperature, difference string }

// A plan is everything that is the same for all runs.
type plan struct {
	card    *fit.Card
	cardID  string // short hash of the card
	gains   *tune.Gains
	logged  *tune.Gains
	options Options

	law    ident.Law
	best   ident.Plant
	plants []ident.Plant
	noise  fit.Noise
	units  units
	asked  []demand
	loop   loopCheck
	traces bool // keep the series of a run
}

func newPlan(card *fit.Card, gains *tune.Gains, o Options) (*plan, error) {
	if card == nil || gains == nil {
		return nil, errors.New("a replay needs a model card and gains")
	}
	if o.Confidence == 0 {
		o.Confidence = 0.95
	}
	if !(o.Confidence > 0 && o.Confidence < 1) {
		return nil, fmt.Errorf("confidence %g: give a share between 0 and 1, such as 0.95", o.Confidence)
	}
	if o.Requirement == (tune.Requirement{}) {
		o.Requirement = gains.Requirement
	}
	if o.Workers <= 0 {
		o.Workers = runtime.GOMAXPROCS(0)
	}
	p := &plan{card: card, options: o, law: card.Law()}
	var err error
	if p.best, p.plants, p.noise, err = cardPlants(card); err != nil {
		return nil, err
	}
	p.gains = limited(gains, o.Requirement, p.law)
	if o.LoggedGains != nil {
		p.logged = limited(o.LoggedGains, tune.Requirement{}, p.law)
	}
	if err := p.checkGains(); err != nil {
		return nil, err
	}
	p.units = units{card.Units.Input, card.Units.Temperature, difference(card.Units.Temperature)}
	p.asked = append(demands(o.Requirement, p.units), o.RunLimits.demands(p.units)...)
	p.loop = p.checkLoop()
	p.cardID, err = card.Fingerprint()
	return p, err
}

// limited returns the gains with the limits and the scan time that the
// requirement gives. Under the power law an input below zero would heat, so a
// controller without a lower limit gets one at zero.
func limited(g *tune.Gains, r tune.Requirement, law ident.Law) *tune.Gains {
	out := *g
	if r.InputMin != nil {
		out.Limits.Min = r.InputMin
	}
	if r.InputMax != nil {
		out.Limits.Max = r.InputMax
	}
	if r.InputRate != nil {
		out.Limits.Rate = r.InputRate
	}
	if r.Scan > 0 {
		out.Scan = r.Scan
	}
	if law == ident.Power && out.Limits.Min == nil {
		zero := 0.0
		out.Limits.Min = &zero
	}
	return &out
}

// checkGains finds out before any run is read whether the gains make a controller.
func (p *plan) checkGains() error {
	for _, g := range []*tune.Gains{p.gains, p.logged} {
		if g == nil {
			continue
		}
		step := g.Scan
		if step == 0 {
			step = 1
		}
		if _, err := tune.NewController(g, step); err != nil {
			return fmt.Errorf("gains: %w", err)
		}
		for _, u := range []struct{ what, gains, card string }{
			{"input", g.Units.Input, p.card.Units.Input},
			{"temperature", g.Units.Temperature, p.card.Units.Temperature},
		} {
			if u.gains != "" && u.card != "" && u.gains != u.card {
				return fmt.Errorf("gains: their %s is in %s, the card's in %s: convert the gains first", u.what, u.gains, u.card)
			}
		}
	}
	return nil
}

// key tells two replays apart that would give different results for the same log.
func (p *plan) key() (string, error) {
	return hash(struct {
		Card        string
		Gains       *tune.Gains
		Logged      *tune.Gains
		Requirement tune.Requirement
		RunLimits   RunLimits
		Setpoint    *float64
		Step        *float64 `json:",omitempty"`
		Confidence  float64
		Tool        string
	}{p.cardID, p.gains, p.logged, p.options.Requirement, p.options.RunLimits, p.options.Setpoint, p.options.SetpointStep, p.options.Confidence, p.options.Tool})
}

func hash(v any) (string, error) {
	b, err := json.Marshal(v)
	if err != nil {
		return "", fmt.Errorf("gains: %w", err)
	}
	sum := sha256.Sum256(b)
	return hex.EncodeToString(sum[:8]), nil
}

// yardstick returns how signals of this run are measured.
func (p *plan) yardstick(run *data.Run) yardstick {
	band := p.options.Requirement.Band
	if band == 0 {
		band = 0.02
	}
	m := yardstick{band: band, limit: p.options.Requirement.Settling, quantum: run.Quality.Quantum, response: response(p.best)}
	m.noise = noiseBeyondControl(p.noise, m.response)
	m.apart = medianInterval(run.T)
	if p.noise.SD > 0 {
		white := p.noise.WhiteSD / p.noise.SD
		m.apart = max(m.apart, 2*p.noise.CorrelationTime*(1-white*white))
	}
	return m
}
