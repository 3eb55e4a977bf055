package ident

import (
	"encoding/csv"
	"math"
	"os"
	"slices"
	"strconv"
	"strings"
	"testing"
)

// TestExpDivided holds the divided differences to testdata/divided.csv, computed
// in 120-digit arithmetic by divided.py: nodes that coincide, cluster and lie far
// apart. A set of nodes is reached as a plain entry and, with each of its nodes
// taken as the extra one, as an extra entry of the table.
func TestExpDivided(t *testing.T) {
	file, err := os.Open("testdata/divided.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	records, err := csv.NewReader(file).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	worst := 0.0
	check := func(nodes []float64, got, want float64) {
		t.Helper()
		worst = max(worst, math.Abs(got/want-1))
		if !(math.Abs(got-want) <= 5e-14*want) {
			t.Errorf("exp%v: got %v, want %v, off by %.2g", nodes, got, want, got/want-1)
		}
	}
	for _, record := range records[1:] {
		var nodes []float64
		for _, field := range strings.Fields(record[0]) {
			x, err := strconv.ParseFloat(field, 64)
			if err != nil {
				t.Fatal(err)
			}
			nodes = append(nodes, x)
		}
		want, err := strconv.ParseFloat(record[1], 64)
		if err != nil {
			t.Fatal(err)
		}
		n := len(nodes)
		var table expTable
		if n <= maxLags {
			table.fill(nodes, false)
			check(nodes, table.plain[0][n-1], want)
		}
		// An extra node is one of the chain's own: the set needs it twice.
		for i := range n - 1 {
			if nodes[i] != nodes[i+1] || n > maxNodes {
				continue
			}
			single := slices.Delete(slices.Clone(nodes), i, i+1)
			table.fill(single, true)
			check(nodes, table.extra[i][0][n-2], want)
		}
	}
	t.Logf("greatest relative error %.2g", worst)
}
