// Package ident holds the plants: chains of first-order lags behind a dead
// time. It simulates them exactly for an input that is held between its
// changes, gives the analytic sensitivities and the frequency response, finds
// the bumps in a log and makes first estimates from them. It does not read
// files and does not fit; see packages data and fit.
package ident

import (
	"cmp"
	"errors"
	"fmt"
	"math"
	"slices"
)

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

// NewPlant returns the plant with these parameters, the lags sorted longest
// first. There are structure.NumLags() lags, each 0 s or longer; a lag of
// exactly zero is the limit in which the element passes its input through.
// The gain must not be zero, the dead time not negative, and all of them
// finite.
func NewPlant(s Structure, gain float64, lags []float64, deadTime float64) (Plant, error) {
	switch {
	case s.name == "":
		return Plant{}, errors.New("plant has no structure")
	case len(lags) != s.NumLags():
		return Plant{}, fmt.Errorf("%s has %d lags, got %d", s, s.NumLags(), len(lags))
	case !finite(gain) || gain == 0:
		return Plant{}, fmt.Errorf("%s: gain is %g, want a finite number other than 0", s, gain)
	case !finite(deadTime) || deadTime < 0:
		return Plant{}, fmt.Errorf("%s: dead time is %g s, want 0 or longer", s, deadTime)
	}
	for i, tau := range lags {
		if !finite(tau) || tau < 0 {
			return Plant{}, fmt.Errorf("%s: lag %d is %g s, want 0 or longer", s, i+1, tau)
		}
	}
	sorted := slices.Clone(lags)
	slices.SortFunc(sorted, func(a, b float64) int { return cmp.Compare(b, a) })
	return Plant{Structure: s, Gain: gain, Lags: sorted, DeadTime: deadTime}, nil
}

// Elements returns the lag of every first-order element in s, longest first:
// an equal-lag chain's lag repeated, nothing for ipdt.
func (p Plant) Elements() []float64 {
	if !p.Structure.equal {
		return slices.Clone(p.Lags)
	}
	return slices.Repeat(p.Lags, p.Structure.order)
}

func finite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }
