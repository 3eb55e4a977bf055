package data_test

import (
	"context"
	"fmt"
	"path/filepath"
	"strings"

	"lagwright/data"
)

// A log whose names and units say what is what needs no options.
func ExampleRead() {
	log := strings.NewReader(`time_s;drive_V;outlet_degC
0;2,0;41,2
0,5;2,0;41,2
1,0;3,0;OPEN
1,5;3,0;41,9
`)
	runs, err := data.Read(context.Background(), "-", data.Options{Stdin: log})
	if err != nil {
		fmt.Println(err)
		return
	}
	r := runs[0]
	fmt.Println(r.T, r.U, r.Units.Input)
	fmt.Println(r.Y, r.Units.Temperature, r.Quality.Missing)
	// Output:
	// [0 0.5 1 1.5] [2 2 3 3] V
	// [41.2 41.2 NaN 41.9] degC map[OPEN:1]
}

// What is ambiguous is an error that lists the candidates.
func ExampleRead_ambiguous() {
	log := strings.NewReader("time_s,drive_V,TC1_degC,TC2_degC\n0,2,41,39\n1,2,41,39\n2,3,42,39\n")
	_, err := data.Read(context.Background(), "-", data.Options{Stdin: log})
	fmt.Println(err)
	// Output:
	// -: 2 columns could be the temperature: "TC1_degC" (41, 41, 42), "TC2_degC" (39, 39, 39); say which with --temp-col
}

// A transmitter of 4 to 20 mA is scaled to its range.
func ExampleRead_span() {
	log := strings.NewReader("time_s,drive_mA,outlet_F\n0,4,104\n1,12,104\n2,12,113\n")
	runs, err := data.Read(context.Background(), "-", data.Options{Stdin: log, InputSpan: &data.Span{Low: 0, High: 10, Unit: "V"}})
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Println(runs[0].U, runs[0].Units.Input, runs[0].Y, runs[0].Units.Temperature)
	// Output:
	// [0 5 5] V [40 40 45] degC
}

// Folders and patterns become files in a fixed order.
func ExampleExpand() {
	files, err := data.Expand([]string{filepath.Join("..", "testdata", "logs", "quirks", "sentinels*.csv")})
	for _, f := range files {
		fmt.Println(filepath.Base(f), err)
	}
	// Output:
	// sentinels-32-bit.csv <nil>
	// sentinels-input.csv <nil>
	// sentinels.csv <nil>
}
