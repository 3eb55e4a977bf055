package fit

import (
	"math"
	"sort"
)

// likeWalk is the prior probability that the noise wanders. More of it would
// widen the intervals of logs that do not (the gain's under white noise by 23 % at
// one half, in place of 16 %), less would miss more of those that do.
const likeWalk = 0.15

// mixture spreads nodes over the noise shapes that the record does not rule
// out, without a walk and with one, weighted by their restricted likelihood under
// a prior flat in log tc, in the white fraction and, where there is one, in log
// walk. The shape in force has nodes around it; those of the other kind lie around
// the best of it, or for the walk where the chain of two lags has them.
func (t *tangent) mixture(here node, walks *walkNodes) []node {
	var plain, wandering []node
	var cell, cell3 float64
	switch {
	case here.shape.walk > 0:
		plain, cell = t.grid(t.bestShape(nil), 2, 9)
		wandering, cell3 = t.grid(here, 3, 7)
	case walks == nil:
		plain, cell = t.grid(here, 2, 9)
		wandering, cell3 = t.grid(t.bestWalk(here.shape), 3, 7)
	default:
		plain, cell = t.grid(here, 2, 9)
		cell3 = walks.cell
		for _, s := range walks.shapes {
			wandering = append(wandering, t.evaluate(s))
		}
	}
	least, most := t.walkRange()
	weigh(plain, here.dev, (1-likeWalk)*cell)
	weigh(wandering, here.dev, likeWalk*cell3/math.Log(most/least))
	return heaviest(append(plain, wandering...), 0.998)
}

// weigh gives nodes the weight of their likelihood over that at dev, times scale.
func weigh(nodes []node, dev, scale float64) {
	for i := range nodes {
		nodes[i].weight = scale * math.Exp(-0.5*(nodes[i].dev-dev))
	}
}

// heaviest scales the weights to a sum of 1 and keeps the nodes of most weight,
// heaviest first, until they hold the share.
func heaviest(nodes []node, share float64) []node {
	total := 0.0
	for _, n := range nodes {
		total += n.weight
	}
	sort.SliceStable(nodes, func(i, j int) bool { return nodes[i].weight > nodes[j].weight })
	sum, keep := 0.0, len(nodes)
	for i := range nodes {
		nodes[i].weight /= total
		if sum += nodes[i].weight; sum > share {
			keep = min(keep, i+1)
		}
	}
	return nodes[:keep]
}

// walkNodes are noise shapes with a walk that a record does not rule out, and the
// volume that each stands for.
type walkNodes struct {
	shapes []shape
	cell   float64
}

// walkNodes spreads them around the best shape with a walk.
func (t *tangent) walkNodes(best node) *walkNodes {
	nodes, cell := t.grid(best, 3, 7)
	weigh(nodes, best.dev, 1)
	out := &walkNodes{cell: cell}
	for _, n := range heaviest(nodes, 0.98) {
		out.shapes = append(out.shapes, n.shape)
	}
	return out
}

// mostNodes is the largest number of nodes of a grid.
const mostNodes = 90

// grid spreads nodes around a shape along the first two or all three axes (log
// tc, white, log walk), up to where -2L has risen by reach, and returns the volume
// that each stands for. It is a flood fill on a lattice whose spacing follows the
// curvature at the shape.
func (t *tangent) grid(best node, axes int, reach float64) (nodes []node, cell float64) {
	lo, hi := t.tcRange()
	least, most := t.walkRange()
	c := best.shape
	if c.white >= 1 {
		c = shape{tc: math.Sqrt(lo * hi), white: 0.995}
	}
	at := func(s shape) (node, bool) {
		if s.tc < lo*0.999 || s.tc > hi*1.001 || s.white < -1e-9 || s.white > 1 {
			return node{}, false
		}
		if axes == 3 && (s.walk < least*0.999 || s.walk > most*1.001) {
			return node{}, false
		}
		s.white = math.Min(math.Max(s.white, 0), 0.9999)
		return t.evaluate(s), true
	}
	first, widest := [3]float64{0.4, 0.1, 0.8}, [3]float64{math.Log(hi/lo) / 5, 0.25, 1.5}
	var d [3]float64
	cell = 1
	for axis := range axes {
		d[axis] = spacing(first[axis], widest[axis], axes, best.dev, func(x float64) (node, bool) { return at(c.moved(axis, x)) })
		cell *= d[axis]
	}
	type key [3]int
	seen := map[key]bool{{}: true}
	queue := []key{{}}
	for len(queue) > 0 && len(nodes) < mostNodes {
		k := queue[0]
		queue = queue[1:]
		s := c
		for axis := range axes {
			s = s.moved(axis, float64(k[axis])*d[axis])
		}
		n, ok := at(s)
		if !ok || n.dev > best.dev+reach {
			continue
		}
		nodes = append(nodes, n)
		for axis := range axes {
			for _, sign := range []int{1, -1} {
				q := k
				q[axis] += sign
				if !seen[q] {
					seen[q] = true
					queue = append(queue, q)
				}
			}
		}
	}
	if len(nodes) == 0 {
		nodes = []node{best}
	}
	return nodes, cell
}

// spacing is the distance along an axis at which -2L rises by about 1, by about
// 3 where the lattice has three axes.
func spacing(d, widest float64, axes int, dev float64, at func(d float64) (node, bool)) float64 {
	scale := []float64{2: 1, 3: 3}[axes]
	for range 5 {
		rise, ok := 0.0, false
		for _, sign := range []float64{1, -1} {
			if n, in := at(sign * d); in {
				rise, ok = math.Max(rise, n.dev-dev), true
			}
		}
		if ok && rise > 2.5*scale {
			d /= 2
		} else if ok && rise < 0.4*scale && d < widest {
			d *= 1.7
		} else {
			break
		}
	}
	return math.Min(d, widest)
}
