package fit

import (
	"math"
	"sort"
)

// likeWalk is the prior probability that the noise wanders. The more of it, the wider
// the intervals of logs that do not, and the fewer are missed of those that do: at
// 0.15, 0.3 and 0.7 the gain's interval under white noise is 1.11, 1.14 and 1.27 times
// as wide as it had to be, and under noise that wanders by twice its deviation holds
// the truth in 78, 81 and 88 % (250 logs each of families of TestCoverage, whose
// bound on the widths decides).
const likeWalk = 0.25

// mixture spreads nodes over the noise shapes that the record does not rule
// out, without a walk and with one, weighted by their restricted likelihood under
// a prior flat in log tc, in the white fraction and, where there is one, in log
// walk. The shape in force has nodes around it; those of the other kind lie around
// the best of it, or for the walk where the chain of two lags has them. It holds
// enough of the weight for intervals at the level.
func (t *tangent) mixture(here node, walks *walkNodes, level float64) []node {
	var plain, wandering lattice
	if here.shape.walk > 0 {
		plain, wandering = t.grid(t.bestShape(nil), 2, plainReach), t.grid(here, 3, walkReach)
	} else {
		plain, wandering = t.grid(here, 2, plainReach), walks.at(t)
	}
	least, most := t.walkRange()
	low := math.Min(plain.least(), wandering.least())
	plain.weigh(low, 1-likeWalk)
	wandering.weigh(low, likeWalk/math.Log(most/least))
	return heaviest(append(plain.nodes, wandering.nodes...), 1-(1-level)/25)
}

// The rise of -2L up to which nodes are spread: without a walk and with one,
// whose tail is the longer.
const (
	plainReach = 9
	walkReach  = 10
)

// lattice are nodes and the volume that each stands for.
type lattice struct {
	nodes []node
	cell  []float64
}

// least is the least deviance.
func (l lattice) least() float64 {
	low := math.Inf(1)
	for _, n := range l.nodes {
		low = math.Min(low, n.dev)
	}
	return low
}

// weigh gives every node the weight of its likelihood, over that at the deviance
// low, times its cell and the scale.
func (l lattice) weigh(low, scale float64) {
	for i := range l.nodes {
		l.nodes[i].weight = scale * l.cell[i] * math.Exp(-0.5*(l.nodes[i].dev-low))
	}
}

// heaviest keeps the nodes of most weight, heaviest first, until they hold the
// share of it, and scales what is kept to a sum of 1.
func heaviest(nodes []node, share float64) []node {
	total := 0.0
	for _, n := range nodes {
		total += n.weight
	}
	sort.SliceStable(nodes, func(i, j int) bool { return nodes[i].weight > nodes[j].weight })
	sum := 0.0
	for i, n := range nodes {
		if sum += n.weight; sum > share*total {
			nodes = nodes[:i+1]
			break
		}
	}
	for i := range nodes {
		nodes[i].weight /= sum
	}
	return nodes
}

// walkNodes are noise shapes with a walk that a record does not rule out, and the
// volume that each stands for.
type walkNodes struct {
	shapes []shape
	cell   []float64
}

// walkNodes spreads them around the best shape with a walk.
func (t *tangent) walkNodes(best node) *walkNodes {
	l := t.grid(best, 3, walkReach)
	l.weigh(l.least(), 1)
	cells := map[shape]float64{}
	for i, n := range l.nodes {
		cells[n.shape] = l.cell[i]
	}
	out := &walkNodes{}
	for _, n := range heaviest(l.nodes, 0.995) {
		out.shapes, out.cell = append(out.shapes, n.shape), append(out.cell, cells[n.shape])
	}
	return out
}

// at evaluates them for a tangent.
func (w *walkNodes) at(t *tangent) lattice {
	l := lattice{cell: w.cell}
	for _, s := range w.shapes {
		l.nodes = append(l.nodes, t.evaluate(s))
	}
	return l
}

// mostNodes is the largest number of nodes of a grid; where it does not suffice
// the nodes are spread more widely.
const mostNodes = 90

// grid spreads nodes around a shape along the first two or all three axes (log
// tc, white, log walk), up to where -2L has risen by reach. It is a flood fill on a
// lattice whose spacing follows the curvature at the shape.
func (t *tangent) grid(best node, axes int, reach float64) lattice {
	lo, hi := t.tcRange()
	least, most := t.walkRange()
	c := best.shape
	if c.white >= 1 {
		c.tc, c.white = math.Sqrt(lo*hi), 0.995
	}
	box := [3][2]float64{{math.Log(lo), math.Log(hi)}, {0, 1}, {math.Log(least), math.Log(most)}}
	at := func(s shape, look func(shape) node) (node, bool) {
		if s.tc < lo*0.999 || s.tc > hi*1.001 || s.white < -1e-9 || s.white > 1 {
			return node{}, false
		}
		if axes == 3 && (s.walk < least*0.999 || s.walk > most*1.001) {
			return node{}, false
		}
		s.white = math.Min(math.Max(s.white, 0), 0.9999)
		return look(s), true
	}
	first, widest := [3]float64{0.4, 0.1, 0.8}, [3]float64{math.Log(hi/lo) / 5, 0.25, 1.5}
	var d [3]float64
	for axis := range axes {
		d[axis] = spacing(first[axis], widest[axis], latticeRise[axes], best.dev, func(x float64) (node, bool) { return at(c.moved(axis, x), t.judge) })
	}
	var l lattice
	for range 4 {
		var all bool
		if l, all = flood(c, d, axes, best.dev+reach, box, func(s shape) (node, bool) { return at(s, t.evaluate) }); all {
			break
		}
		for axis := range axes {
			d[axis] *= 1.4
		}
	}
	if len(l.nodes) == 0 {
		l = lattice{nodes: []node{t.evaluate(best.shape)}, cell: []float64{d[0] * d[1]}}
	}
	return l
}

// flood fills the lattice of spacing d around c up to the deviance highest; all is
// false when there are more nodes than a grid may have. A cell is cut off where the
// box of the axes ends.
func flood(c shape, d [3]float64, axes int, highest float64, box [3][2]float64, at func(shape) (node, bool)) (l lattice, all bool) {
	type key [3]int
	seen := map[key]bool{{}: true}
	queue := []key{{}}
	for ; len(queue) > 0; queue = queue[1:] {
		if len(l.nodes) == mostNodes {
			return l, false
		}
		k := queue[0]
		s, cell := c, 1.0
		for axis := range axes {
			s = s.moved(axis, float64(k[axis])*d[axis])
		}
		for axis, x := range []float64{math.Log(s.tc), s.white, math.Log(s.walk)}[:axes] {
			cell *= math.Max(math.Min(x+d[axis]/2, box[axis][1])-math.Max(x-d[axis]/2, box[axis][0]), 0)
		}
		n, ok := at(s)
		if !ok || n.dev > highest {
			continue
		}
		l.nodes, l.cell = append(l.nodes, n), append(l.cell, cell)
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
	return l, true
}

// latticeRise is the rise of -2L from one node to the next along one of two axes, or of
// three: its root is the spacing in standard deviations where the likelihood is a
// normal's. Sums over a normal are then off by 1e-4, or by 1 % (2·exp(-2π²/rise):
// Trefethen and Weideman 2014, from memory).
var latticeRise = []float64{2: 2, 3: 4}

// spacing is the distance along an axis at which -2L rises by about rise, d a first
// guess.
func spacing(d, widest, rise, dev float64, at func(d float64) (node, bool)) float64 {
	for range 4 {
		risen, ok := 0.0, false
		for _, sign := range []float64{1, -1} {
			if n, in := at(sign * d); in {
				risen, ok = math.Max(risen, n.dev-dev), true
			}
		}
		if !ok || math.IsNaN(risen) {
			break
		}
		before := d
		d = math.Min(d*math.Min(math.Max(math.Sqrt(rise/math.Max(risen, 1e-3)), 0.3), 3), widest)
		if math.Abs(d-before) < 0.5*before {
			break
		}
	}
	return math.Min(d, widest)
}
