package fit

import "lagwright/ident"

// kinked reports whether the response has a kink in the dead time wherever a change of
// the input reaches a row: a single element answers at once, and an integrator too.
func (e *engine) kinked(lags []float64) bool {
	elements := 0
	for _, l := range lags {
		if l > 0 {
			elements++
		}
	}
	if e.st.Equal() {
		elements *= e.st.Order()
	}
	return elements <= 1
}

// fromAbove sets the last of a simulator's columns, the first its response, to the
// derivative with respect to a dead time that cannot become shorter, from responses at
// longer ones: (-3y(0) + 4y(δ) - y(2δ))/(2δ). The simulator takes the other side of a kink,
// where the change was made before the row. With a controller that answers every row, that
// side would explain its noise by the answer.
func (e *engine) fromAbove(sim *ident.Simulator, w *workspace, columns [][]float64, step float64, lags []float64, dead float64) {
	delta := 1e-3 * step
	y, out := columns[0], columns[len(columns)-1]
	w.ahead = resize(w.ahead, len(y))
	sim.Response(w.ahead, e.st, lags, dead+delta)
	for k, v := range w.ahead {
		out[k] = 4*v - 3*y[k]
	}
	sim.Response(w.ahead, e.st, lags, dead+2*delta)
	for k, v := range w.ahead {
		out[k] = (out[k] - v) / (2 * delta)
	}
}
