package tune

import (
	"math"
	"math/cmplx"
)

// A transfer function that can be followed along a path.
type transfer interface{ at(s complex128) complex128 }

// winding follows the angle of 1+L along a path.
type winding struct {
	l         transfer
	at, value complex128
	angle     float64
	start     complex128 // the first value
}

// startWinding begins on the real axis at radius and goes along the arc to the
// angle psi.
func startWinding(l transfer, radius, psi float64) *winding {
	at := complex(radius, 0)
	value := 1 + l.at(at)
	w := &winding{l: l, at: at, value: value, start: value}
	const onArc = 16
	for i := range onArc {
		w.to(cmplx.Rect(radius, psi*float64(i+1)/onArc), 0)
	}
	return w
}

// to goes on in a straight line, in halves wherever the angle turns fast.
func (w *winding) to(s complex128, depth int) {
	value := 1 + w.l.at(s)
	turn := cmplx.Phase(value / w.value)
	if math.Abs(turn) > 0.6 && depth < 12 {
		w.to((w.at+s)/2, depth+1)
		w.to(s, depth+1)
		return
	}
	w.at, w.value = s, value
	w.angle += turn
}

// by is to where the value at s is known.
func (w *winding) by(s, value complex128) {
	turn := cmplx.Phase(value / w.value)
	if math.Abs(turn) > 0.6 {
		w.to(s, 0)
		return
	}
	w.at, w.value = s, value
	w.angle += turn
}

// dampedEnough tells whether every dominant pole of a stable loop has a
// damping ratio of zeta or more: those with |s| up to twice the phase crossover.
func (l *openLoop) dampedEnough(zeta, phaseCross float64) bool {
	return l.sectorEmpty(l, zeta, 2*phaseCross)
}

// sectorEmpty counts the zeros of 1+L in the sector |arg s| < π − acos(zeta),
// |s| < radius by the argument principle: along the arc from the real axis to
// the sector's edge and down the edge to the origin, where L ~ k/s^n, the angle
// of 1+L must change by −n·(π − acos(zeta)) and no more. L is of, which differs
// from l at most by its sampling.
func (l *openLoop) sectorEmpty(of transfer, zeta, radius float64) bool {
	psi := math.Pi - math.Acos(min(zeta, 1-1e-9))
	low, high := l.corners()
	radius = min(radius, 100*high)
	bottom := 1e-4 * min(low, radius) / (1 + math.Abs(l.k))
	w := startWinding(of, radius, psi)
	const onEdge = 40
	for i := range onEdge {
		w.to(cmplx.Rect(radius*math.Pow(bottom/radius, float64(i+1)/onEdge), psi), 0)
	}
	count := (w.angle + float64(l.integrators)*psi) / math.Pi
	return math.Round(count) == 0
}

// dampingBelow returns the damping ratio of the least damped dominant pole,
// known to be less than zeta, to zeta/2^steps. It need not be told apart from
// others that reach enough, nor from others that stay below little.
func dampingBelow(zeta float64, steps int, enough, little float64, held func(zeta float64) bool) float64 {
	lo, hi := 0.0, zeta
	for range steps {
		if lo >= enough || hi <= little {
			break
		}
		if mid := (lo + hi) / 2; held(mid) {
			lo = mid
		} else {
			hi = mid
		}
	}
	return lo
}
