package tune

import (
	"bytes"
	"reflect"
	"strings"
	"testing"
)

var volts = GainUnits{Input: "V", Temperature: "degC"}

// Gains written out are those of the file with the same settings.
func TestParseGains(t *testing.T) {
	for _, c := range []struct {
		text, file string
		u          GainUnits
	}{
		{"kc=0.4V/K,ti=12s", `"kc":0.4,"ti_s":12`, volts},
		{" Kp = 0.4 V/°C , Ti = 12 s ", `"kc":0.4,"ti_s":12`, volts},
		{"kc=-0.4V/degC,ti=1m30s,scan=100ms", `"kc":-0.4,"ti_s":90,"scan_s":0.1`, volts},
		{"kc=4e-1V/K,ti=12s,td=3s,filter=300ms,form=series,weight=0.5", `"kc":0.4,"ti_s":12,"td_s":3,"filter_s":0.3,"form":"series","setpoint_weight":0.5`, volts},
		{"kc=0.4V/K,ti=12s,td=3s,filter=0s,form=parallel", `"kc":0.4,"ti_s":12,"td_s":3,"form":"parallel"`, volts},
		{"kc=0.4V/K,bias=4V", `"kc":0.4,"bias":4`, volts},
		{"kc=2%/K,ti=2m,min=0,max=90%,rate=1.5%/s,resolution=0.1", `"kc":2,"ti_s":120,"limits":{"min":0,"max":90,"rate":1.5,"resolution":0.1}`, GainUnits{"%", "degC"}},
		{"kc=-0.25 V/°F,ti=12s", `"kc":-0.45,"ti_s":12`, volts},
		{"kc=0.5V/F,ti=12s", `"kc":0.9,"ti_s":12`, volts},
		{"kc=0.4V/K,ti=25min", `"kc":0.4,"ti_s":1500`, volts},
		{"kc=0.4V/K,ti=2h", `"kc":0.4,"ti_s":7200`, volts},
		{"kc=0.4V/K, ti = 20 min, scan=100 msec", `"kc":0.4,"ti_s":1200,"scan_s":0.1`, volts},
		{"kc=0.4V/K,ti=1 Min. 30 Sec.", `"kc":0.4,"ti_s":90`, volts},
		{"kc=0.4V/K,ti=1.5 hours,scan=0.3s", `"kc":0.4,"ti_s":5400,"scan_s":0.3`, volts},
		{"kc=2,ti=120s", `"kc":2,"ti_s":120`, GainUnits{}},
	} {
		got, err := ParseGains(c.text, c.u)
		if err != nil {
			t.Errorf("%s: %v", c.text, err)
			continue
		}
		want, err := ReadGains(strings.NewReader(`{"schema":"`+GainsSchema+`",`+c.file+`}`), "file")
		if err != nil {
			t.Fatal(err)
		}
		want.Units = c.u
		if !reflect.DeepEqual(got, want) {
			t.Errorf("%s\n got %+v\nwant %+v", c.text, got, want)
		}
		if !WrittenOut(c.text) {
			t.Errorf("%q is taken for a file", c.text)
		}
	}
}

func TestParseGainsRefuses(t *testing.T) {
	for text, says := range map[string]string{
		"kc=0.4,ti=12s":                     "write 0.4V/K",
		"kc=0.4%/%,ti=12s":                  "not in V/K",
		"kc=0.4mV/K,ti=12s":                 "not in V/K",
		"kc=0.4V/K,ti=12":                   "12s, 12ms or 12min",
		"kc=0.4V/K,ti=soon":                 "no time",
		"kc=0.4V/K,ti=2 days":               "no time",
		"kc=0.4V/K,ti=2min 5":               "no time",
		"kc=0.4V/K,ti=min":                  "no time",
		"kc=0.4V/K,ti=9999999999h":          "290 years",
		"kc=0.4V/K,ti=1_0s":                 "no time",
		"kc=0.4V/K":                         "neither ti nor bias",
		"ti=12s":                            "kc=0.4V/K,ti=12s",
		"kc=0.4V/K,ti=12s,td=3s":            "filter=0s where there is none",
		"kc=0.4V/K,td=3s,filter=0s,bias=4":  "td without ti",
		"kc=0.4V/K,ti=12s,bias=4":           "bias is for P control",
		"kc=0.4V/K,kp=0.3V/K,ti=12s":        "given twice",
		"kc=0.4V/K,ti=12s,wind=up":          "use kc, ti",
		"kc=0.4V/K,ki=0.1V/K":               "kp/ki",
		"kc=0.4V/K,ti=12s,12":               "no setting",
		"kc=0,05V/K,ti=150s":                "decimals with a point",
		"gain=0.05V/K,ti=150s":              "use kc, ti",
		"pb=20%,ti=150s":                    "100/pb",
		"kc=0.4V/K,ti=12s,form=fast":        "ideal",
		"kc=0V/K,ti=12s":                    "other than 0",
		"kc=infV/K,ti=12s":                  "no number",
		"kc=0x1V/K,ti=12s":                  "not in V/K",
		"kc=0.4V/K,ti=12s,min=5,max=4":      "not below max",
		"kc=0.4V/K,ti=12s,max=9mA":          "not in V",
		"kc=0.4V/K,ti=12s,weight=1K":        "no number",
		"kc=0.4V/K,ti=-12s":                 "positive time",
		"kc=0.4V/K,ti=12s,td=1s,filter=-1s": "filter_s",
		"kc=0.4V/K,ti=12s,rate=2V":          "not in V/s",
		"":                                  "no setting",
	} {
		if _, err := ParseGains(text, volts); err == nil || !strings.Contains(err.Error(), says) {
			t.Errorf("%q: error %v does not say %q", text, err, says)
		}
	}
	for _, name := range []string{"gains.json", "runs/kc=1.json", "a=b.json", "", "kc"} {
		if WrittenOut(name) {
			t.Errorf("%q is taken for gains written out", name)
		}
	}
}

func TestGainsInWords(t *testing.T) {
	g, err := ParseGains("kc=0.4V/K,ti=12s,td=3s,filter=0s,max=10V", volts)
	if err != nil {
		t.Fatal(err)
	}
	if got, want := g.InWords(), "PID, ideal form, Kc 0.4 V/K, Ti 12 s, Td 3 s, filter 0 s, setpoint weight 1, continuous, output to 10 V"; got != want {
		t.Errorf("got %s\nwant %s", got, want)
	}
}

func FuzzParseGains(f *testing.F) {
	f.Add("kc=0.4V/K,ti=12s,td=3s,filter=300ms,form=series,scan=100ms,min=0V,max=10V")
	f.Add("kp=1e308V/K,bias=-4V")
	f.Fuzz(func(t *testing.T, text string) {
		g, err := ParseGains(text, volts)
		if err != nil {
			return
		}
		var out bytes.Buffer
		if err := g.WriteJSON(&out); err != nil {
			t.Fatal(err)
		}
		if _, err := ReadGains(&out, "x"); err != nil {
			t.Fatalf("%q: %v", text, err)
		}
	})
}
