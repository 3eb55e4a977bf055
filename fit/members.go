package fit

import (
	"math"
	"math/rand/v2"

	"gonum.org/v1/gonum/stat/distuv"
)

// member is one noise shape (of every record) with the linearised posterior
// of the parameters (gain, eta) under it: Student's t around shift, counted
// from the optimum, with the covariance cov and dof degrees of freedom.
type member struct {
	weight float64
	cov    [][]float64
	shift  []float64
	dof    float64
}

// members mixes the nodes of the records. One record: its nodes. Several:
// joint draws of a shape and a variance for every record, because the number
// of combinations grows too fast to list.
func members(nodes [][]node, rng *rand.Rand) []member {
	if len(nodes) == 1 {
		out := make([]member, 0, len(nodes[0]))
		var d damped
		for _, n := range nodes[0] {
			cov := d.invert(n.a)
			s2 := n.s2
			m := member{weight: n.weight, cov: cov, shift: multiply(cov, n.b), dof: float64(n.dof)}
			for i := range cov {
				for j := range cov {
					cov[i][j] *= s2
				}
			}
			out = append(out, m)
		}
		return out
	}
	const draws = 300
	var inverse damped
	out := make([]member, draws)
	for k := range out {
		d := len(nodes[0][0].b)
		a, b := columns(d, d), make([]float64, d)
		for _, ns := range nodes {
			n := ns[pick(ns, rng.Float64())]
			chi := distuv.ChiSquared{K: float64(n.dof), Src: rng}
			s2 := n.s2 * float64(n.dof) / chi.Rand()
			for i := range d {
				b[i] += n.b[i] / s2
				for j := range d {
					a[i][j] += n.a[i][j] / s2
				}
			}
		}
		cov := inverse.invert(a)
		out[k] = member{weight: 1.0 / draws, cov: cov, shift: multiply(cov, b), dof: math.Inf(1)}
	}
	return out
}

func pick(ns []node, u float64) int {
	for i, n := range ns {
		if u -= n.weight; u < 0 {
			return i
		}
	}
	return 0
}

func multiply(a [][]float64, b []float64) []float64 {
	out := make([]float64, len(b))
	for i := range a {
		for j, v := range b {
			out[i] += a[i][j] * v
		}
	}
	return out
}

// pooled is the covariance of the mixture of members: the mean of the
// covariances plus the scatter of the centres.
func pooled(ms []member) [][]float64 {
	d := len(ms[0].shift)
	out, mean := columns(d, d), make([]float64, d)
	for _, m := range ms {
		for i := range d {
			mean[i] += m.weight * m.shift[i]
		}
	}
	for _, m := range ms {
		for i := range d {
			for j := range d {
				out[i][j] += m.weight * (m.cov[i][j] + (m.shift[i]-mean[i])*(m.shift[j]-mean[j]))
			}
		}
	}
	return out
}
