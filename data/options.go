package data

import (
	"io"
	"time"
)

// Span is a range of an instrument, such as 0..10 V.
type Span struct {
	Low, High float64
	Unit      string // as written after the numbers, "" when absent
}

// Options says how to read a log. The zero value recognises everything that
// the file itself decides.
type Options struct {
	TimeCol, InputCol, TempCol, SetpointCol string // names of columns (or tags, with Long); "" means recognise
	ModeCol, AirflowCol, InletCol           string
	ColdCol                                 string // reference junction of a thermocouple logged in mV
	RunCol                                  string // column that tells several runs in one file apart

	Long bool // rows are (time, tag, value)

	InputUnit, TempUnit string // override of the unit: V, %, mA; C, F, K, mV; "" means as the file says
	InputSpan, TempSpan *Span  // scaling of mA and percent
	Thermocouple        string // type of a thermocouple logged in mV: B E J K N R S T; "" means as the name of the column says

	Cycle time.Duration // a drive that switches on and off in a fixed cycle: the mean over a cycle is the input

	TimeFormat string // layout of the clock, "" means recognise
	From, To   string // part of the recording to keep: clock time or seconds; "" means all

	RemoveSpikes bool // isolated spikes become missing instead of being flagged only

	Stdin io.Reader // read for the name "-"
}
