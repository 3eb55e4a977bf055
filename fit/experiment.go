package fit

import (
	"math"

	"lagwright/ident"
)

// experiment is a test as it was or could be made: rows and the input held
// between them. The plant is at rest before the first change of the input.
type experiment struct {
	t     []float64 // s, ascending
	in    ident.Input
	drift bool // the baseline may drift
}

// covariance is the least covariance of gain, lags and dead time (in this
// order) that an unbiased estimate of p can have from the experiment, with
// baseline and, where it may be, drift unknown and the noise known: the inverse
// of the Fisher information (Cramér–Rao)
//
//	F = Jᵀ·R⁻¹·J/sd²,  J = [K·dy/dlag…, K·dy/dtheta, y] less its part along 1 and t
//
// with R the correlation of the noise at the rows. Parameters that held says
// are known have zero rows. Lags that are equal share their direction; the
// figure that stays regular is their sum.
func (e experiment) covariance(p ident.Plant, n Noise, held []bool) [][]float64 {
	st := p.Structure
	lags := st.NumLags()
	var f filter
	f.set(sampleRows(e.t), n.shape(0))
	sens := columns(lags+2, len(e.t))
	ident.NewSimulator(e.t, e.in).Sensitivities(sens, st, p.Lags, p.DeadTime)
	one := make([]float64, len(e.t))
	for k := range one {
		one[k] = 1
	}
	var known [][]float64
	f.apply(one, one)
	addToBasis(&known, one)
	if e.drift {
		time := append([]float64(nil), e.t...)
		f.apply(time, time)
		addToBasis(&known, time)
	}
	for i, c := range sens {
		if i < len(held) && held[i] {
			clear(c)
			continue
		}
		if i > 0 {
			for k := range c {
				c[k] *= p.Gain
			}
		}
		f.apply(c, c)
		project(c, known)
	}
	info := columns(len(sens), len(sens))
	for i := range sens {
		for j := range sens {
			info[i][j] = dot(sens[i], sens[j])
		}
	}
	cov := invert(info)
	for i := range cov {
		for j := range cov {
			cov[i][j] *= n.SD * n.SD
		}
	}
	return cov
}

// precision is what an experiment tells: standard errors of the gain, of the
// sum of lags and of the dead time.
type precision struct{ gain, lags, deadTime float64 }

func (e experiment) precision(p ident.Plant, n Noise, held []bool) precision {
	cov := e.covariance(p, n, held)
	last := len(cov) - 1
	times := 1.0 // an equal chain's sum is so many of its one lag
	if p.Structure.Equal() {
		times = float64(p.Structure.Order())
	}
	sum := 0.0
	for i := 1; i < last; i++ {
		for j := 1; j < last; j++ {
			sum += cov[i][j]
		}
	}
	return precision{math.Sqrt(cov[0][0]), times * math.Sqrt(math.Max(sum, 0)), math.Sqrt(cov[last][last])}
}

func sampleRows(t []float64) []ident.Row {
	rows := make([]ident.Row, len(t))
	for k, v := range t {
		rows[k] = ident.Row{T: v, M: 1}
	}
	return rows
}
