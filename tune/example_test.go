package tune_test

import (
	"fmt"
	"log"

	"lagwright/data"
	"lagwright/ident"
	"lagwright/tune"
)

// heater is a plant with 4 K/V, lags of 30 s and 8 s and 5 s of dead time.
func heater() ident.Plant {
	chain, err := ident.ParseStructure("chain2")
	if err != nil {
		log.Fatal(err)
	}
	p, err := ident.NewPlant(chain, 4, []float64{30, 8}, 5)
	if err != nil {
		log.Fatal(err)
	}
	return p
}

func ExampleApplyRule() {
	g, _, err := tune.ApplyRule("simc", "pi", heater(), tune.RuleOptions{})
	if err != nil {
		log.Fatal(err)
	}
	fmt.Printf("Kc %.4g V/K, Ti %.4g s\n", g.Kc, *g.Ti)
	// Output: Kc 0.4722 V/K, Ti 34 s
}

func ExampleAnalyse() {
	g, _, err := tune.ApplyRule("simc", "pi", heater(), tune.RuleOptions{})
	if err != nil {
		log.Fatal(err)
	}
	f := tune.Analyse(heater(), g)
	fmt.Printf("stable %v, Ms %.3f, gain margin %.2f, phase margin %.1f°\n", f.Stable, f.Ms, f.GainMargin, f.PhaseMargin)
	// Output: stable true, Ms 1.694, gain margin 3.60, phase margin 53.0°
}

func ExampleConvert() {
	ti, td := 34.0, 6.0
	g := &tune.Gains{Form: tune.Ideal, Kc: 0.5, Ti: &ti, Td: &td, SetpointWeight: 1}
	c, err := tune.Convert(g, tune.Series, tune.Spelling{Band: true, Minutes: true,
		InputSpan: &data.Span{Low: 0, High: 10}, TempSpan: &data.Span{Low: 0, High: 200}})
	if err != nil {
		log.Fatal(err)
	}
	for _, e := range c.Entry {
		fmt.Printf("%s %.4g %s\n", e.Name, e.Value, e.Unit)
	}
	// Output:
	// proportional band 12.97 % of 0 to 200
	// integral time 0.437 min
	// derivative time 0.1297 min
	// setpoint weight 1.297
}

func ExampleDesignPoleRegion() {
	d := tune.DesignPoleRegion(heater(), nil, tune.PoleRegion{Settling: 90, Damping: 0.5}, 0.95)
	for _, g := range d.Nominal {
		fmt.Printf("Kc from %.3g to %.3g V/K\n", g.Low, g.High)
	}
	// Output: Kc from 0.0399 to 0.502 V/K
}

// A loop run step by step: the controller scans every 0.5 s, the plant moves
// exactly in between.
func ExampleController() {
	ti := 34.0
	g := &tune.Gains{Form: tune.Ideal, Kc: 0.47, Ti: &ti, SetpointWeight: 1, Scan: 0.5}
	high := 10.0
	g.Limits.Max = &high
	control, err := tune.NewController(g, 0)
	if err != nil {
		log.Fatal(err)
	}
	plant, err := tune.NewPlantStepper(heater(), 0.5)
	if err != nil {
		log.Fatal(err)
	}
	const input, temperature = 4.0, 80.0 // the plant rests here
	control.Start(temperature, temperature, input)
	y, highest := temperature, temperature
	for range 600 {
		u := control.Next(100, y)
		y = temperature + plant.Step(u-input)
		highest = max(highest, y)
	}
	fmt.Printf("at %.2f degC after 300 s, highest %.1f degC\n", y, highest)
	// Output: at 100.00 degC after 300 s, highest 100.0 degC
}
