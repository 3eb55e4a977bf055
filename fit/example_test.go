package fit_test

import (
	"context"
	"fmt"
	"log"
	"os"
	"strings"

	"lagwright/data"
	"lagwright/fit"
)

// A log of a bump test as a logger exports it: a heater of 8 K/V with one lag
// of 20 s and 5 s of dead time, stepped from 3 V to 4 V.
func bump() string {
	var b strings.Builder
	b.WriteString("Time [s];Heater [V];Outlet [degC]\n")
	rise, heat := 0.0, make([]float64, 200)
	for k := range heat {
		if k >= 30 {
			heat[k] = 1
		}
		if k > 5 {
			rise += (8*heat[k-6] - rise) * (1 - 0.951229424500714) // exp(-1/20)
		}
		ripple := 0.02 * float64((k*7)%5-2)
		fmt.Fprintf(&b, "%d;%.1f;%.3f\n", k, 3+heat[k], 60+rise+ripple)
	}
	return b.String()
}

func read() *data.Run {
	runs, err := data.Read(context.Background(), "-", data.Options{Stdin: strings.NewReader(bump())})
	if err != nil {
		log.Fatal(err)
	}
	return runs[0]
}

func ExampleFit() {
	card, err := fit.Fit(context.Background(), []*data.Run{read()}, fit.Options{Structure: "fopdt"})
	if err != nil {
		log.Fatal(err)
	}
	plant, err := card.Plant()
	if err != nil {
		log.Fatal(err)
	}
	fmt.Printf("%s: %.1f K/V, lag %.0f s, dead time %.0f s\n", card.Selected, plant.Gain, plant.Lags[0], plant.DeadTime)
	// Output: fopdt: 8.0 K/V, lag 20 s, dead time 5 s
}

func ExampleCheck() {
	report, err := fit.Check(context.Background(), read(), fit.Options{})
	if err != nil {
		log.Fatal(err)
	}
	for _, v := range report.Verdict {
		fmt.Println(v.Parameter, v.Verdict)
	}
	// Output:
	// gain good
	// lags good
	// dead_time good
}

func ExampleReadCard() {
	card, err := fit.Fit(context.Background(), []*data.Run{read()}, fit.Options{Structure: "fopdt", Plants: 50})
	if err != nil {
		log.Fatal(err)
	}
	var file strings.Builder
	if err := card.WriteJSON(&file); err != nil {
		log.Fatal(err)
	}
	again, err := fit.ReadCard(strings.NewReader(file.String()), "card.json")
	if err != nil {
		log.Fatal(err)
	}
	plants, err := again.PlausiblePlants()
	if err != nil {
		log.Fatal(err)
	}
	fmt.Println(again.Schema, len(plants), "plausible plants")
	// Output: lagwright/card/1 50 plausible plants
}

func ExampleCard_WriteText() {
	card, err := fit.Fit(context.Background(), []*data.Run{read()}, fit.Options{Structure: "fopdt"})
	if err != nil {
		log.Fatal(err)
	}
	if err := card.WriteText(os.Stdout); err != nil {
		log.Fatal(err)
	}
}
