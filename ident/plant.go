// Package ident holds the plants: chains of first-order lags behind a dead
// time. It simulates them exactly for an input that is held between its
// changes, gives the analytic sensitivities and the frequency response, finds
// the bumps in a log and makes first estimates from them. It does not read
// files and does not fit; see packages data and fit.
package ident

// A Structure is a family of plants. The zero value is not a structure; get
// one from [ParseStructure] or [Structures].
type Structure struct {
	name        string
	order       int  // number of first-order elements (0 for ipdt)
	equal       bool // all elements share one lag
	integrating bool // ipdt
}

// Plant is one member of a structure:
//
//	G(s) = Gain · exp(−DeadTime·s) / Π(Lags[i]·s + 1)
//
// and Gain·exp(−DeadTime·s)/s for ipdt. Lags are in s, longest first; an
// equal-lag chain has one entry. Gain is in temperature per input (per
// second for ipdt), DeadTime in s.
type Plant struct {
	Structure Structure
	Gain      float64
	Lags      []float64
	DeadTime  float64
}

// Input is a piecewise constant input: Before until At[0], then Value[i] from
// At[i] until At[i+1]. At is strictly ascending, in s.
type Input struct {
	Before float64
	At     []float64
	Value  []float64
}

// Law says how the input drives the heat: phi(u) = u, or u² (an RMS voltage
// on a resistance).
type Law int

const (
	Linear Law = iota // phi(u) = u
	Power             // phi(u) = u²
)
