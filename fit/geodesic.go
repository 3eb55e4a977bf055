package fit

import "gonum.org/v1/gonum/floats"

// acceleration returns the bend of the path that the residuals follow when the
// step d is taken: the path is p + d + a, where
//
//	a minimises ‖J·a + r_dd/2‖² + λ‖D·a‖²
//
// and r_dd, the second derivative of the residuals along d, comes from one
// more evaluation at p + h·d:
//
//	r_dd ≈ (2/h)·((r(p+h·d) − r(p))/h − J·d).
//
// ok is false where the bend is more than bendLimit/2 of the step, or has no
// value: the residuals are then too curved for d. M. K. Transtrum, J. P.
// Sethna, arXiv:1201.5885 (2012), from memory, with h and bendLimit as there.
func (s *search) acceleration(d []float64) (a []float64, ok bool) {
	const h, bendLimit = 0.1, 0.75
	q := append([]float64(nil), s.at.p...)
	floats.AddScaled(q, h, d)
	s.pr.clamp(q)
	s.evaluate(s.a, q)
	floats.Sub(s.a, s.at.residuals)
	bent := s.at.linear
	bent.c = s.at.linear.rotated(s.a)
	floats.Scale(1/h, bent.c)
	floats.Sub(bent.c, s.at.linear.along(d))
	floats.Scale(1/h, bent.c)
	low, high := s.room(floats.AddTo(q, s.at.p, d))
	a = bent.step(s.damping, s.scale, s.at.free, low, high)
	return a, 2*s.length(a) <= bendLimit*s.length(d)
}
