package tune

import (
	"math"
	"math/rand/v2"

	"lagwright/ident"
)

// freshPlants draws n plants that the gains were not chosen on, from the same
// distribution: a smoothed bootstrap (B. W. Silverman, Density Estimation,
// 1986, section 6.4, citation from memory). A plausible plant x drawn
// at random becomes
//
//	m + (x − m + h·(x' − x'')/√2)/√(1+h²)
//
// with m the mean and x', x” two more, all of its structure: the kernel has the shape of the
// sample itself and mean and covariance stay what they are; h is Silverman's
// width. Gain and times are taken by their logarithms, times that are zero in
// some row as they are, reflected at zero.
func freshPlants(plants []ident.Plant, n int, rng *rand.Rand) []ident.Plant {
	kin := map[kind]*plantSpace{}
	for _, p := range plants {
		k := kindOf(p)
		if kin[k] == nil {
			kin[k] = newPlantSpace(p)
		}
		kin[k].add(p)
	}
	for _, s := range kin {
		s.prepare()
	}
	out := make([]ident.Plant, n)
	for i := range out {
		p := plants[rng.IntN(len(plants))]
		out[i] = kin[kindOf(p)].draw(p, rng)
	}
	return out
}

// kind tells plants that can be mixed from plants that cannot.
type kind struct {
	structure ident.Structure
	negative  bool
}

func kindOf(p ident.Plant) kind { return kind{p.Structure, p.Gain < 0} }

// fewestKin is the least number of plants of a kind that tell a shape; fewer
// are drawn as they are.
const fewestKin = 8

// plantSpace holds the plants of one kind as points.
type plantSpace struct {
	plants []ident.Plant
	rows   [][]float64
	logs   []bool // which coordinates are logarithms
	mean   []float64
	h      float64
}

func newPlantSpace(p ident.Plant) *plantSpace {
	s := &plantSpace{logs: make([]bool, len(p.Lags)+2)}
	for k := range s.logs {
		s.logs[k] = true
	}
	return s
}

func (s *plantSpace) add(p ident.Plant) {
	s.plants = append(s.plants, p)
	for k, v := range coordinates(p) {
		s.logs[k] = s.logs[k] && v > 0
	}
}

func coordinates(p ident.Plant) []float64 {
	return append(append([]float64{math.Abs(p.Gain)}, p.Lags...), p.DeadTime)
}

func (s *plantSpace) prepare() {
	s.mean = make([]float64, len(s.logs))
	for _, p := range s.plants {
		row := s.point(p)
		s.rows = append(s.rows, row)
		for k, v := range row {
			s.mean[k] += v / float64(len(s.plants))
		}
	}
	if len(s.plants) >= fewestKin {
		d := float64(len(s.logs))
		s.h = math.Pow(4/((d+2)*float64(len(s.plants))), 1/(d+4))
	}
}

func (s *plantSpace) point(p ident.Plant) []float64 {
	v := coordinates(p)
	for k := range v {
		if s.logs[k] {
			v[k] = math.Log(v[k])
		}
	}
	return v
}

// draw moves a plant of this kind by the kernel.
func (s *plantSpace) draw(p ident.Plant, rng *rand.Rand) ident.Plant {
	a, b := s.rows[rng.IntN(len(s.rows))], s.rows[rng.IntN(len(s.rows))]
	if s.h == 0 {
		return p
	}
	v := s.point(p)
	for k := range v {
		v[k] = s.mean[k] + (v[k]-s.mean[k]+s.h*(a[k]-b[k])/math.Sqrt2)/math.Sqrt(1+s.h*s.h)
		if s.logs[k] {
			v[k] = math.Exp(v[k])
		} else {
			v[k] = math.Abs(v[k])
		}
	}
	n := len(v) - 1
	moved, err := ident.NewPlant(p.Structure, math.Copysign(v[0], p.Gain), v[1:n], v[n])
	if err != nil {
		return p
	}
	return moved
}
