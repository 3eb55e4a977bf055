package ident_test

import (
	"fmt"
	"math/cmplx"

	"lagwright/ident"
)

// A heater that takes 0.3 s to answer and then follows with a lag of 2 s is
// stepped from 3 V to 5 V at 1 s.
func ExampleSimulator_Response() {
	t := []float64{0, 1, 1.3, 3.3, 60}
	u := []float64{3, 5, 5, 5, 5}
	fopdt, err := ident.ParseStructure("fopdt")
	if err != nil {
		fmt.Println(err)
		return
	}
	s := ident.NewSimulator(t, ident.HeldInput(t, u, ident.Linear))
	for k, y := range s.Response(nil, fopdt, []float64{2}, 0.3) {
		fmt.Printf("%4.1f s  %.4f\n", t[k], y)
	}
	// Output:
	//  0.0 s  0.0000
	//  1.0 s  0.0000
	//  1.3 s  0.0000
	//  3.3 s  1.2642
	// 60.0 s  2.0000
}

func ExampleSimulator_Sensitivities() {
	t := []float64{0, 1, 2, 4}
	u := []float64{0, 1, 1, 1}
	chain2, err := ident.ParseStructure("chain2")
	if err != nil {
		fmt.Println(err)
		return
	}
	columns := make([][]float64, chain2.NumLags()+2)
	for i := range columns {
		columns[i] = make([]float64, len(t))
	}
	s := ident.NewSimulator(t, ident.HeldInput(t, u, ident.Linear))
	s.Sensitivities(columns, chain2, []float64{2, 0.5}, 0.2)
	for i, name := range []string{"response", "d/dlag1", "d/dlag2", "d/ddead time"} {
		fmt.Printf("%-12s %.3f\n", name, columns[i])
	}
	// Output:
	// response     [0.000 0.000 0.174 0.672]
	// d/dlag1      [0.000 0.000 -0.075 -0.176]
	// d/dlag2      [0.000 0.000 -0.201 -0.202]
	// d/ddead time [0.000 0.000 -0.312 -0.162]
}

func ExamplePlant_Response() {
	chain2, err := ident.ParseStructure("chain2")
	if err != nil {
		fmt.Println(err)
		return
	}
	p, err := ident.NewPlant(chain2, 8, []float64{0.5, 2}, 0.2)
	if err != nil {
		fmt.Println(err)
		return
	}
	g := p.Response(1)
	fmt.Printf("%.3f K/V, %.3f rad\n", cmplx.Abs(g), cmplx.Phase(g))
	// Output: 3.200 K/V, -1.771 rad
}

func ExampleFindBumps() {
	t := make([]float64, 120)
	u, y := make([]float64, len(t)), make([]float64, len(t))
	for k := range t {
		t[k] = float64(k)
		u[k], y[k] = 3, 40
		if k >= 30 {
			u[k], y[k] = 5, 56
		}
	}
	for _, b := range ident.FindBumps(t, u, y) {
		fmt.Printf("at %g s: %g to %g V, %g to %g °C, held %g s\n", b.Time, b.From, b.To, b.Before, b.After, b.Hold)
	}
	// Output: at 30 s: 3 to 5 V, 40 to 56 °C, held 89 s
}

// Twenty samples of a settled stretch count as one row, exactly.
func ExampleNewBlockSimulator() {
	in := ident.Input{At: []float64{0}, Value: []float64{1}}
	rows := []ident.Row{{T: 0.5, M: 1}, {T: 1, M: 1}, {T: 1.5, H: 0.5, M: 20}}
	fopdt, err := ident.ParseStructure("fopdt")
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("%.4f\n", ident.NewBlockSimulator(rows, in).Response(nil, fopdt, []float64{2}, 0))
	// Output: [0.2212 0.3935 0.8939]
}

func ExampleFirstEstimate() {
	chain2, err := ident.ParseStructure("chain2")
	if err != nil {
		fmt.Println(err)
		return
	}
	t, u := make([]float64, 600), make([]float64, 600)
	for k := range t {
		t[k] = 0.1 * float64(k)
		u[k] = 3
		if k >= 100 {
			u[k] = 5
		}
	}
	y := ident.NewSimulator(t, ident.HeldInput(t, u, ident.Linear)).Response(nil, chain2, []float64{4, 1.4}, 0.8)
	for k := range y {
		y[k] = 40 + 8*y[k]
	}
	p, err := ident.FirstEstimate(chain2, t, y, ident.FindBumps(t, u, y)[0], ident.Linear)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("gain %.1f K/V, lags %.1f s, dead time %.1f s\n", p.Gain, p.Lags, p.DeadTime)
	// Output: gain 8.0 K/V, lags [4.0 1.4] s, dead time 0.8 s
}
