package data

import (
	"fmt"
	"math"
	"strings"
)

// thermocouple converts the voltage of one type of thermocouple.
type thermocouple struct {
	letter    byte
	ranges    []emfRange
	low, high float64 // the part of the range in which E(t) only rises, degC
}

// risingFrom is where E(t) begins to rise with t, where that is above the
// lower end of the reference function: type B has its minimum near 21 degC
// and hardly any voltage below 50 degC; near -270 degC the others are flat.
var risingFrom = map[byte]float64{'B': 50, 'E': -260, 'K': -260, 'N': -260, 'T': -260}

// newThermocouple makes a converter for a type by its letter.
func newThermocouple(letter byte) (*thermocouple, error) {
	ranges, ok := referenceFunctions[letter]
	if !ok {
		return nil, fmt.Errorf("there is no thermocouple of type %q: the types are B E J K N R S T", letter)
	}
	tc := &thermocouple{letter: letter, ranges: ranges, low: ranges[0].low, high: ranges[len(ranges)-1].high}
	if t, ok := risingFrom[letter]; ok {
		tc.low = t
	}
	return tc, nil
}

// emf is the reference function E(t), mV for t in degC; NaN outside its range.
func (tc *thermocouple) emf(t float64) float64 {
	e, _ := tc.emfSlope(t)
	return e
}

// emfSlope gives E(t) in mV and dE/dt in mV/K.
func (tc *thermocouple) emfSlope(t float64) (e, slope float64) {
	for k, r := range tc.ranges {
		last := k == len(tc.ranges)-1
		if t < r.low || t > r.high || t == r.high && !last && tc.letter != 'K' {
			continue
		}
		for i := len(r.coef) - 1; i >= 0; i-- {
			slope = slope*t + e
			e = e*t + r.coef[i]
		}
		if tc.letter == 'K' && k == 1 {
			d := t - expK[2]
			x := expK[0] * math.Exp(expK[1]*d*d)
			e += x
			slope += 2 * expK[1] * d * x
		}
		return e, slope
	}
	return math.NaN(), math.NaN()
}

// temperature solves E(t) = e for t in degC by Newton's method inside a
// bracket, which needs no approximate inverse function; NaN when e is outside
// the range in which E(t) rises.
func (tc *thermocouple) temperature(e float64) float64 {
	lo, hi := tc.low, tc.high
	if !(e >= tc.emf(lo) && e <= tc.emf(hi)) {
		return math.NaN()
	}
	t := lo + (hi-lo)*(e-tc.emf(lo))/(tc.emf(hi)-tc.emf(lo))
	for range 100 {
		f, slope := tc.emfSlope(t)
		if f < e {
			lo = t
		} else {
			hi = t
		}
		next := t - (f-e)/slope
		if !(next > lo && next < hi) {
			next = lo + (hi-lo)/2
		}
		if math.Abs(next-t) <= 1e-12*(1+math.Abs(t)) {
			return next
		}
		t = next
	}
	return t
}

// typeInName finds the letter of a thermocouple type in the name of a column:
// "TC_K", "type J", "Typ N", "K-type".
func typeInName(name string) (letter byte, ok bool) {
	parts := wordsOf(name)
	for i, w := range parts {
		near := func(j int) bool {
			return j >= 0 && j < len(parts) && (parts[j] == "type" || parts[j] == "typ" || parts[j] == "tipo" || parts[j] == "tc" || parts[j] == "thermocouple" || parts[j] == "thermoelement")
		}
		if len(w) == 1 && strings.Contains("bejknrst", w) && (near(i-1) || near(i+1)) {
			return w[0] - 'a' + 'A', true
		}
	}
	return 0, false
}
