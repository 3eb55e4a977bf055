package format_test

import (
	"fmt"

	"lagwright/cmd/lagwright/internal/format"
)

func ExampleValue() {
	low, high := 12.12, 12.74
	fmt.Println(format.Value(12.43121, &low, &high, "K/V"))
	low, high = 2.6, 4.9
	fmt.Println(format.Value(3.2, &low, &high, "s"))
	fmt.Println(format.Value(3.2, &low, nil, "s"))
	// Output:
	// 12.43 ± 0.31 K/V
	// 3.2 s (2.6 to 4.9)
	// 3.20 s (at least 2.60)
}

func ExampleText() {
	fmt.Println(format.Text("oven\x1b[31m3.csv"))
	// Output: oven\x1b[31m3.csv
}
