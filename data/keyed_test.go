package data

import (
	"context"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// readRowsOf reads a log of eight rows, each made of a format for its time in
// seconds, input and temperature, or of the function that a test gives.
func readRowsOf(t *testing.T, header string, row func(i int) string) (*Run, error) {
	t.Helper()
	text := header
	for i := range baseT {
		text += row(i) + "\n"
	}
	path := filepath.Join(t.TempDir(), "log.csv")
	if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	runs, err := Read(context.Background(), path, Options{})
	if err != nil {
		return nil, err
	}
	if len(runs) != 1 {
		t.Fatalf("%d runs, want 1", len(runs))
	}
	return runs[0], nil
}

func clockOf(i int) string { return fmt.Sprintf("2026-01-25 10:00:%04.1f", baseT[i]) }

// A column of remarks that hold pairs leaves a row of cells what it is.
func TestPairsInRemarks(t *testing.T) {
	for _, remark := range []string{
		"zone2_V=4.0 zone2_degC=58.2", "OP=40 PV=58.2 SP=60", "mode:man fan:3", "a=1 b=2", "fan_V: 24 inlet_degC: 21.5", "OP=30.0;PV=55.0;SP=60",
	} {
		for _, c := range []struct {
			name, header string
			row          func(i int) string
		}{
			{"behind", "timestamp,heater_V,outlet_degC,zone 2\n", func(i int) string { return fmt.Sprintf("%s,%g,%g,%s", clockOf(i), baseU[i], baseY[i], remark) }},
			{"in front", "zone 2,timestamp,heater_V,outlet_degC\n", func(i int) string { return fmt.Sprintf("%s,%s,%g,%g", remark, clockOf(i), baseU[i], baseY[i]) }},
			{"between", "timestamp,zone 2,heater_V,outlet_degC\n", func(i int) string { return fmt.Sprintf("%s,%s,%g,%g", clockOf(i), remark, baseU[i], baseY[i]) }},
			{"tabs", "timestamp\theater_V\toutlet_degC\tzone 2\n", func(i int) string {
				return fmt.Sprintf("%s\t%g\t%g\t%s", clockOf(i), baseU[i], baseY[i], remark)
			}},
		} {
			t.Run(c.name+" "+remark, func(t *testing.T) {
				r, err := readRowsOf(t, c.header, c.row)
				if err != nil {
					t.Fatal(err)
				}
				same(t, "T", r.T, baseT, 1e-9)
				same(t, "U", r.U, baseU, 0)
				same(t, "Y", r.Y, baseY, 0)
			})
		}
	}
}

// A value is one word, and a comma in it a decimal mark where commas do not
// part the pairs.
func TestValuesOfPairs(t *testing.T) {
	comma := func(s string) string { return strings.ReplaceAll(s, ".", ",") }
	for _, c := range []struct {
		name  string
		row   func(i int) string
		wrong string
	}{
		{"three decimals", func(i int) string {
			return comma(fmt.Sprintf("t_s=%.3f;drive_V=%g;outlet_degC=%.3f", baseT[i], baseU[i], baseY[i]))
		}, ""},
		{"decimals", func(i int) string {
			return comma(fmt.Sprintf("t_s=%g drive_V=%g outlet_degC=%.1f", baseT[i], baseU[i], baseY[i]))
		}, ""},
		{"comma and blank", func(i int) string {
			return fmt.Sprintf("t_s=%s, drive_V=%s, outlet_degC=%s", comma(fmt.Sprint(baseT[i])), comma(fmt.Sprint(baseU[i])), comma(fmt.Sprint(baseY[i])))
		}, ""},
		{"commas", func(i int) string {
			return fmt.Sprintf("t_s=%d,drive_V=%g,outlet_degC=%s", i, baseU[i], comma(fmt.Sprintf("%.3f", baseY[i])))
		},
			"log.csv:1: outlet_degC=24,100: commas part the pairs, and this one could be a decimal mark too"},
		{"remark in brackets", func(i int) string {
			return fmt.Sprintf("t_s=%g drive_V=%g [100] outlet_degC=%g", baseT[i], baseU[i], baseY[i])
		}, ""},
		{"remark of a digit", func(i int) string {
			return fmt.Sprintf("t_s=%g drive_V=%g 7 outlet_degC=%g OK", baseT[i], baseU[i], baseY[i])
		}, ""},
		{"remark behind decimals", func(i int) string {
			return fmt.Sprintf("t_s=%g drive_V=%.2f outlet_degC=%.2f 200 OK", baseT[i], baseU[i], baseY[i])
		}, ""},
		{"thousands or remark", func(i int) string { return fmt.Sprintf("t_s=%g outlet_degC=%g heater_V=2 200 OK", baseT[i], baseY[i]) },
			"log.csv:1: heater_V=2 200: the blank could be a thousands mark, and 200 a remark"},
		{"units", func(i int) string {
			return fmt.Sprintf("t=%g s drive=%g V (set) outlet=%g °C", baseT[i], baseU[i], baseY[i])
		}, ""},
		{"date in a pair", func(i int) string {
			return fmt.Sprintf("time=%s drive_V=%g outlet_degC=%g", clockOf(i), baseU[i], baseY[i])
		}, ""},
		{"date with words", func(i int) string {
			return fmt.Sprintf("time=Sun, 25 Jan 2026 10:00:%04.1f drive_V=%g outlet_degC=%g", baseT[i], baseU[i], baseY[i])
		}, ""},
		{"stamp and process", func(i int) string {
			return fmt.Sprintf("%s heater[1234]: drive_V=%g outlet_degC=%g", clockOf(i), baseU[i], baseY[i])
		}, ""},
		{"stamp with a comma", func(i int) string {
			return fmt.Sprintf("%s00 INFO drive_V=%g outlet_degC=%g", comma(clockOf(i)), baseU[i], baseY[i])
		}, ""},
		{"empty value", func(i int) string {
			return fmt.Sprintf("t_s=%g fault= drive_V=%g outlet_degC=%g", baseT[i], baseU[i], baseY[i])
		}, ""},
		{"arrays", func(i int) string {
			return fmt.Sprintf(`{"t_s":%g,"fans":[1,2,3],"drive_V":%g,"outlet_degC":%g}`, baseT[i], baseU[i], baseY[i])
		}, ""},
		{"escapes", func(i int) string {
			return fmt.Sprintf(`{"t_s":%g,"say \"x\"":1,"drive (V)":%g,"outlet (\u00b0C)":%g}`, baseT[i], baseU[i], baseY[i])
		}, ""},
	} {
		t.Run(c.name, func(t *testing.T) {
			r, err := readRowsOf(t, "", c.row)
			if c.wrong != "" {
				if err == nil || !strings.Contains(err.Error(), c.wrong) {
					t.Fatalf("error %v, want one with %q", err, c.wrong)
				}
				return
			}
			if err != nil {
				t.Fatal(err)
			}
			same(t, "T", r.T, baseT, 1e-9)
			same(t, "U", r.U, baseU, 0)
			same(t, "Y", r.Y, baseY, 0)
			if r.Units.Temperature != "degC" {
				t.Errorf("temperature in %q, want degC", r.Units.Temperature)
			}
		})
	}
}
