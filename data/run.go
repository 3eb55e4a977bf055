// Package data reads the logs of bump tests: CSV and its cousins, and Parquet.
// It finds the columns, brings the clock to seconds and the units to base
// units, sets missing and impossible values aside, and says what it mended.
// What comes out is a [Run]: one cleaned recording on one clock, held by
// columns. Most callers need only [Read] and [Expand].
//
// It is strict where a guess could change the answer. What can be read in two
// ways is an error that names the flag to settle it; a cell that holds no
// number is missing and never zero; an input holds until the next one, a
// temperature does not; a file that was cut off is an error and never a
// shorter run. It does not judge a log: whether a recording can support a fit
// is for package fit to say.
package data

import "time"

// Run is one cleaned recording on one clock. All columns that are not nil
// have the length of T.
type Run struct {
	Source Source
	Units  Units

	T []float64 // time, s from the first row; strictly ascending
	U []float64 // input, in Units.Input; holds from its row on; always finite
	Y []float64 // temperature, in Units.Temperature; NaN where missing

	Setpoint []float64 // temperature units; holds until the next one, NaN before the first; nil when not logged
	Auto     []bool    // true where the controller was in automatic, holds like the setpoint; nil when not logged
	Airflow  []float64 // as logged; nil when not logged
	Inlet    []float64 // inlet temperature, temperature units; nil when not logged

	Start time.Time      // clock time of the first row; zero when the log has elapsed time only
	Zone  *time.Location // zone the log's clock was read in; nil when the log has elapsed time only

	Quality Quality
}

// Source says where a run came from.
type Source struct {
	File    string // base name only, "-" for standard input
	SHA256  string // of the file's bytes as stored, hex
	Rows    int    // rows of the run as kept
	FromS   float64
	ToS     float64 // FromS and ToS: the part of the recording kept, s from its first row
	Columns Columns
	Name    string // name of the run inside a file of several runs, else ""
}

// Columns holds the names of the columns used, as the file spells them.
type Columns struct {
	Time, Input, Temperature               string
	Setpoint, Mode, Airflow, Inlet, Status string // "" when not used
}

// Units of the columns of a run.
type Units struct {
	Time        string // always "s"
	Input       string // "V", "%", "mA", or as the file says; "unit" when nobody knows it
	Temperature string // "degC"; as the file says when that is no unit of temperature, "unit" when nobody knows it
}

// Quality is what was seen, mended and dropped while reading.
type Quality struct {
	RowsRead       int            // data rows in the file
	Missing        map[string]int // temperature or input cells set aside, by kind: "OPEN", "blank", "sentinel 9999", …
	Dropped        map[string]int // rows dropped, by reason
	Notes          []Note         // mended and noteworthy things, in the order met
	MedianInterval float64        // s
	JitterInterval float64        // s, 95th percentile of |interval − median|
	Gaps           []Gap          // intervals longer than 3 medians (and more than 1 row lost)
	Quantum        float64        // smallest step of the temperature's resolution; 0 when not visible
	Spikes         []int          // rows of isolated spikes (indices into T); flagged, their Y set to NaN only when removed
}

// Note is one thing a reader of the log should know.
type Note struct {
	Code string // stable, kebab-case: "clock-jump-back", "unit-unknown", …
	Text string // one plain sentence
	Row  int    // line in the file, 0 when it concerns the whole file
}

// Gap is a hole in the recording.
type Gap struct {
	After    int     // index into T of the last row before the hole
	Duration float64 // s
}

// Segments splits the run where the recording has gaps: half-open index
// ranges [lo, hi) that cover all rows in order.
func (r *Run) Segments() [][2]int {
	var out [][2]int
	lo := 0
	for _, g := range r.Quality.Gaps {
		out = append(out, [2]int{lo, g.After + 1})
		lo = g.After + 1
	}
	return append(out, [2]int{lo, len(r.T)})
}
