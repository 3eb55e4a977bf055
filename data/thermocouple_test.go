package data

import (
	"encoding/csv"
	"math"
	"os"
	"strconv"
	"testing"
)

// referenceRows reads shared/references/thermocouples.csv: functions and
// tabulated points of the NIST ITS-90 Thermocouple Database (SRD 60, NIST
// Monograph 175).
func referenceRows(t *testing.T) (rows []map[string]string) {
	t.Helper()
	f, err := os.Open(shared(t, "references", "thermocouples.csv"))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	all, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	for _, r := range all[1:] {
		row := map[string]string{}
		for i, name := range all[0] {
			row[name] = r[i]
		}
		rows = append(rows, row)
	}
	return rows
}

func number(t *testing.T, s string) float64 {
	t.Helper()
	v, err := strconv.ParseFloat(s, 64)
	if err != nil {
		t.Fatal(err)
	}
	return v
}

// Points printed in NIST Monograph 175 (from its database, SRD 60): E(t)
// rounds to the printed microvolt, and the temperature found for a printed
// voltage is off by no more than the rounding allows.
func TestThermocoupleTable(t *testing.T) {
	points := 0
	for _, r := range referenceRows(t) {
		if r["kind"] != "table" {
			continue
		}
		points++
		tc, err := newThermocouple(r["type"][0])
		if err != nil {
			t.Fatal(err)
		}
		at, want := number(t, r["t_C"]), number(t, r["emf_mV"])
		got, slope := tc.emfSlope(at)
		if !(math.Abs(got-want) <= 0.0005+1e-9) {
			t.Errorf("type %s at %v degC: %v mV, the table has %v", r["type"], at, got, want)
		}
		if at < tc.low+1 || at > tc.high-1 { // beyond the ends the rounding leads out of the range
			continue
		}
		if back := tc.temperature(want); !(math.Abs(back-at) <= 0.00051/slope+0.001) {
			t.Errorf("type %s at %v mV: %v degC, the table has %v", r["type"], want, back, at)
		}
	}
	if points < 100 {
		t.Errorf("%d points in the table, want more than 100", points)
	}
}

// The inverse functions printed with the tables differ from the solution of
// the reference function by no more than the errors printed with them.
func TestThermocoupleInverse(t *testing.T) {
	type key struct{ letter, sub string }
	coef := map[key][]float64{}
	row := map[key]map[string]string{}
	for _, r := range referenceRows(t) {
		if r["kind"] == "inv_coef" {
			k := key{r["type"], r["subrange"]}
			coef[k] = append(coef[k], number(t, r["value"]))
			row[k] = r
		}
	}
	if len(coef) < 8 {
		t.Fatalf("%d inverse functions, want those of 8 types", len(coef))
	}
	for k, c := range coef {
		tc, err := newThermocouple(k.letter[0])
		if err != nil {
			t.Fatal(err)
		}
		lo, hi := number(t, row[k]["e_lo_mV"]), number(t, row[k]["e_hi_mV"])
		errLo, errHi := number(t, row[k]["err_lo_C"]), number(t, row[k]["err_hi_C"])
		for i := range 101 {
			e := lo + (hi-lo)*float64(i)/100
			inverse := 0.0
			for j := len(c) - 1; j >= 0; j-- {
				inverse = inverse*e + c[j]
			}
			got := tc.temperature(e)
			if math.IsNaN(got) && (i == 0 || i == 100) {
				continue // the printed ends are rounded and may lie outside
			}
			if d := inverse - got; !(d >= errLo-0.006 && d <= errHi+0.006) { // errors are printed to 0.01 K
				t.Errorf("type %s at %v mV: %v degC, inverse function %v, printed error %v to %v", k.letter, e, got, inverse, errLo, errHi)
			}
		}
	}
}

func TestThermocoupleRange(t *testing.T) {
	for _, letter := range []byte("BEJKNRST") {
		tc, err := newThermocouple(letter)
		if err != nil {
			t.Fatal(err)
		}
		for at := tc.low; at <= tc.high; at += 0.37 {
			e, slope := tc.emfSlope(at)
			if !(slope > 0) {
				t.Fatalf("type %c at %v degC: slope %v", letter, at, slope)
			}
			if back := tc.temperature(e); !(math.Abs(back-at) < 1e-7) {
				t.Fatalf("type %c: %v degC came back as %v", letter, at, back)
			}
		}
		if !math.IsNaN(tc.temperature(1000)) || !math.IsNaN(tc.temperature(-1000)) || !math.IsNaN(tc.temperature(math.NaN())) {
			t.Errorf("type %c: a voltage outside its range has a temperature", letter)
		}
	}
	if _, err := newThermocouple('X'); err == nil {
		t.Error("there is no type X")
	}
	for name, want := range map[string]byte{"TC_K": 'K', "Type J outlet": 'J', "N-type": 'N', "Typ S": 'S', "outlet": 0, "K": 0} {
		if got, ok := typeInName(name); got != want || ok != (want != 0) {
			t.Errorf("%q is type %c, want %c", name, got, want)
		}
	}
}
