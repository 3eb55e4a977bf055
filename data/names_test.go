package data

import (
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
)

func TestSplitNameUnit(t *testing.T) {
	for label, want := range map[string][2]string{
		"Outlet (°C)":     {"Outlet", "degC"},
		"u [V]":           {"u", "V"},
		"T/degC":          {"T", "degC"},
		"t_s":             {"t", "s"},
		"Voltage, V":      {"Voltage", "V"},
		"Temp °C":         {"Temp", "degC"},
		"Temp°F":          {"Temp", "degF"},
		"drive_%":         {"drive", "%"},
		"outlet_degC":     {"outlet", "degC"},
		"EH-3 drive":      {"EH-3 drive", ""},
		"TIC-7.PV":        {"TIC-7.PV", ""},
		"MV":              {"MV", ""},
		"TC_K (mV)":       {"TC_K", "mV"},
		"air flow m3/h":   {"air flow m3/h", ""},
		"flow [kg/h]":     {"flow", "kg/h"},
		"Temp (outlet)":   {"Temp (outlet)", ""},
		"elapsed (min)":   {"elapsed", "min"},
		"Heizung (V RMS)": {"Heizung", "V"},
	} {
		name, unit := splitNameUnit(label)
		if name != want[0] || unit != want[1] {
			t.Errorf("%q is %q in %q, want %q in %q", label, name, unit, want[0], want[1])
		}
	}
}

func TestRoleOf(t *testing.T) {
	for label, want := range map[string]role{
		"t_s": roleTime, "Time": roleTime, "timestamp": roleTime, "Uhrzeit": roleTime, "Elapsed (min)": roleTime, "T [°C]": roleTemp,
		"u": roleInput, "Heater voltage [V]": roleInput, "Stellgröße": roleInput, "OP": roleInput, "controller output %": roleInput, "Heizspannung": roleInput,
		"y": roleTemp, "PV": roleTemp, "TC1 (°C)": roleTemp, "outlet temperature": roleTemp, "Austrittstemperatur": roleTemp, "heater outlet (degF)": roleTemp,
		"SP": roleSetpoint, "Temp setpoint (degC)": roleSetpoint, "Sollwert": roleSetpoint, "Consigne (°C)": roleSetpoint,
		"inlet temperature (°C)": roleInlet, "Eintritt [°C]": roleInlet, "air flow m3/h": roleAirflow, "Volumenstrom": roleAirflow,
		"CJC (°C)": roleCold, "cold junction": roleCold, "mode": roleMode, "Betriebsart": roleMode, "quality": roleStatus,
		"battery_V": roleOther, "room temperature (°C)": roleOther, "sheath °C": roleOther, "record": roleOther, "heater current (A)": roleOther,
		"column 3": roleNone, "X7": roleNone,
	} {
		c := column{label: label, class: numbers}
		c.name, c.unit = splitNameUnit(label)
		if got, _ := roleOf(c); got != want {
			t.Errorf("%q is %q, want %q", label, roleNames[got], roleNames[want])
		}
	}
}

func TestExpand(t *testing.T) {
	dir := t.TempDir()
	for _, name := range []string{"b.csv", "a.csv.gz", "c.parquet", "notes.md", ".hidden.csv", filepath.Join("sub", "d.tsv"), "x1.log", "x2.log"} {
		path := filepath.Join(dir, name)
		if err := os.MkdirAll(filepath.Dir(path), 0o700); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(path, nil, 0o600); err != nil {
			t.Fatal(err)
		}
	}
	in := func(names ...string) []string {
		for i, n := range names {
			names[i] = filepath.Join(dir, n)
		}
		return names
	}
	for _, c := range []struct {
		args, want []string
		wrong      string
	}{
		{args: []string{dir}, want: in("a.csv.gz", "b.csv", "c.parquet", "sub/d.tsv", "x1.log", "x2.log")},
		{args: append([]string{"-"}, in("x*.log", "notes.md", "b.csv")...), want: append([]string{"-"}, in("x1.log", "x2.log", "notes.md", "b.csv")...)},
		{args: in("none.csv"), wrong: "no such file"},
		{args: in("*.dat"), wrong: "no file matches"},
		{args: in("["), wrong: "syntax error"},
	} {
		got, err := Expand(c.args)
		if c.wrong != "" {
			if err == nil || !strings.Contains(err.Error(), c.wrong) {
				t.Errorf("%v: error %v, want one with %q", c.args, err, c.wrong)
			}
			continue
		}
		if err != nil || !slices.Equal(got, c.want) {
			t.Errorf("%v: %v, %v, want %v", c.args, got, err, c.want)
		}
	}
	empty := t.TempDir()
	if _, err := Expand([]string{empty}); err == nil || !strings.Contains(err.Error(), "no log in this folder") {
		t.Errorf("an empty folder: %v", err)
	}
}
