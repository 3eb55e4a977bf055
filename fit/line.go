package fit

// line is a straight line over evenly spaced rows k = 0, 1, …: at + slope·k.
type line struct{ at, slope float64 }

// over is its value at row k.
func (l line) over(k float64) float64 { return l.at + l.slope*k }

// plus is l and so many times m.
func (l line) plus(times float64, m line) line {
	return line{l.at + times*m.at, l.slope + times*m.slope}
}

// lineThrough is the one of least squares through rows.
func lineThrough(y []float64) line {
	n := float64(len(y))
	middle, mean := (n-1)/2, total(y)/n
	top := 0.0
	for k, v := range y {
		top += (float64(k) - middle) * (v - mean)
	}
	if n < 2 {
		return line{mean, 0}
	}
	slope := top * 12 / (n * (n*n - 1))
	return line{mean - slope*middle, slope}
}

// sum is that of the line over n rows, tilt that of k times it.
func (l line) sum(n float64) float64  { return n*l.at + l.slope*n*(n-1)/2 }
func (l line) tilt(n float64) float64 { return l.at*n*(n-1)/2 + l.slope*(n-1)*n*(2*n-1)/6 }

// product is the sum of the product of two lines over n rows.
func (l line) product(m line, n float64) float64 { return m.at*l.sum(n) + m.slope*l.tilt(n) }

// carriedBy is what a filter without a walk predicts along the line once it has forgotten
// what came before: a[k+1] = d·a[k] + g·x[k] along lines.
func (l line) carriedBy(k *kalman) line {
	slope := k.gain * l.slope / (1 - k.decay)
	return line{(k.gain*l.at - slope) / (1 - k.decay), slope}
}

// whitened is the line filtered.
func (l line) whitened(k *kalman) line {
	w := l.plus(-k.a2, l.carriedBy(k))
	return line{w.at * k.isd, w.slope * k.isd}
}
