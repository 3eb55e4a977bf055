package validate

import (
	"bytes"
	"encoding/json"
	"fmt"
	"io"
	"math"
)

// maxFile bounds what a reader takes in, in bytes: far above any real result.
const maxFile = 1 << 31

// WriteJSON writes the replay as indented JSON.
func (r *Replay) WriteJSON(w io.Writer) error { return writeJSON(w, r) }

// WriteJSON writes the drift as indented JSON.
func (d *Drift) WriteJSON(w io.Writer) error { return writeJSON(w, d) }

func writeJSON(w io.Writer, v any) error {
	e := json.NewEncoder(w)
	e.SetEscapeHTML(false)
	e.SetIndent("", "  ")
	return e.Encode(v)
}

// ReadReplay reads a replay written by [Replay.WriteJSON] and checks it; name
// is the file's name for errors, which name the field that is wrong.
func ReadReplay(r io.Reader, name string) (*Replay, error) {
	var out Replay
	if err := readJSON(r, name, ReplaySchema, &out); err != nil {
		return nil, err
	}
	if err := out.check(); err != nil {
		return nil, fmt.Errorf("%s: %w", name, err)
	}
	return &out, nil
}

// readJSON decodes one JSON value of the schema into v.
func readJSON(r io.Reader, name, schema string, v any) error {
	b, err := io.ReadAll(io.LimitReader(r, maxFile+1))
	if err != nil {
		return fmt.Errorf("%s: %w", name, err)
	}
	if len(b) > maxFile {
		return fmt.Errorf("%s: larger than %d bytes: this is no %s file", name, maxFile, schema)
	}
	var head struct {
		Schema string `json:"schema"`
	}
	if err := json.Unmarshal(b, &head); err != nil {
		return fmt.Errorf("%s: not JSON: %w", name, err)
	}
	if head.Schema != schema {
		return fmt.Errorf("%s: schema is %q, this version reads %q", name, head.Schema, schema)
	}
	d := json.NewDecoder(bytes.NewReader(b))
	if err := d.Decode(v); err != nil {
		return fmt.Errorf("%s: %w", name, err)
	}
	return nil
}

// check refuses what WriteJSON never writes.
func (r *Replay) check() error {
	if !isShare(r.Confidence) {
		return fmt.Errorf("confidence is %g: want a share from 0 to 1", r.Confidence)
	}
	if r.Plants < 0 {
		return fmt.Errorf("plants is %d", r.Plants)
	}
	if s := r.Summary; s.Runs != len(r.Runs) || s.Failed != len(r.Failed) {
		return fmt.Errorf("summary counts %d runs and %d failed, the lists hold %d and %d", s.Runs, s.Failed, len(r.Runs), len(r.Failed))
	}
	for i := range r.Runs {
		if err := r.Runs[i].check(); err != nil {
			return fmt.Errorf("runs[%d] (%s): %w", i, clean(r.Runs[i].File), err)
		}
	}
	return nil
}

func (r *RunReplay) check() error {
	if !isShare(r.Probability) {
		return fmt.Errorf("probability is %g: want a share from 0 to 1", r.Probability)
	}
	if r.Rows < 0 {
		return fmt.Errorf("rows is %d", r.Rows)
	}
	if b := r.BackTest; b != nil && !(isShare(b.ShareInside) && (b.InputInside == nil || isShare(*b.InputInside)) && isShare(b.Stated)) {
		return fmt.Errorf("back_test: its shares must lie from 0 to 1")
	}
	if r.Trace == nil {
		return nil
	}
	return r.Trace.check()
}

func (tr *Trace) check() error {
	for i, t := range tr.T {
		if i > 0 && !(t > tr.T[i-1]) {
			return fmt.Errorf("trace: t_s[%d] does not ascend", i)
		}
	}
	for _, s := range []struct {
		name   string
		values []*float64
	}{
		{"setpoint", tr.Setpoint}, {"logged", tr.Logged}, {"logged_input", tr.LoggedIn},
		{"median", tr.Median}, {"low", tr.Low}, {"high", tr.High},
		{"median_input", tr.MedianIn}, {"low_input", tr.LowIn}, {"high_input", tr.HighIn},
	} {
		if len(s.values) != len(tr.T) {
			return fmt.Errorf("trace: %s has %d values for %d times", s.name, len(s.values), len(tr.T))
		}
	}
	return nil
}

func isShare(x float64) bool { return x >= 0 && x <= 1 && !math.IsNaN(x) }
