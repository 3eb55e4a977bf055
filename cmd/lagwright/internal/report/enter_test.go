package report

import (
	"encoding/json"
	"slices"
	"strings"
	"testing"

	"lagwright/data"
	"lagwright/fit"
	"lagwright/tune"
)

// TestBothDegrees: of a log in °F the box holds the gain for a controller in °C
// and for one in °F, whichever part says that the log is in °F.
func TestBothDegrees(t *testing.T) {
	card := &fit.Card{Warnings: []fit.Warning{{Code: "fahrenheit"}}}
	run := &data.Run{Quality: data.Quality{Notes: []data.Note{{Code: "fahrenheit"}}}}
	ideal := []tune.Entry{{Name: "gain", Value: 1.3012, Unit: "%/K"}, {Name: "integral time", Value: 673.6, Unit: "s"}}
	parallel := []tune.Entry{{Name: "integral gain", Value: 0.018, Unit: "V/(K·s)"}, {Name: "derivative gain", Value: 1.8, Unit: "V·s/K"}}
	band := []tune.Entry{{Name: "proportional band", Value: 12.5, Unit: "% of 0 to 200 degC"}}
	for _, c := range []struct {
		name   string
		bundle Bundle
		entry  []tune.Entry
		want   []setting
	}{
		{"in °C", Bundle{}, ideal, []setting{{"Gain", "1.301 %/K"}, {"Integral time", "673.6 s"}}},
		{"by the card", Bundle{Card: card}, ideal, []setting{{"Gain, controller in °C", "1.301 %/K"}, {"Gain, controller in °F", "0.7229 %/°F"}, {"Integral time", "673.6 s"}}},
		{"by the log", Bundle{Runs: []*data.Run{run}}, ideal, []setting{{"Gain, controller in °C", "1.301 %/K"}, {"Gain, controller in °F", "0.7229 %/°F"}, {"Integral time", "673.6 s"}}},
		{"parallel", Bundle{Card: card}, parallel, []setting{
			{"Integral gain, controller in °C", "0.018 V/(K·s)"}, {"Integral gain, controller in °F", "0.01 V/(°F·s)"},
			{"Derivative gain, controller in °C", "1.8 V·s/K"}, {"Derivative gain, controller in °F", "1 V·s/°F"}}},
		{"a band is of the span", Bundle{Card: card}, band, []setting{{"Proportional band", "12.5 % of 0 to 200 °C"}}},
	} {
		g := &tune.Gains{Entry: c.entry, Action: "reverse"}
		got := settings(g, c.bundle.fahrenheit())
		if want := append(c.want, setting{"Action", "reverse"}); !slices.Equal(got, want) {
			t.Errorf("%s: %v, want %v", c.name, got, want)
		}
	}
	g := &tune.Gains{Entry: ideal[:1], SquareRoot: &tune.SquareRoot{Kc: 1.8, Unit: "V²/K"}}
	if got := settings(g, true); got[3] != (setting{"Gain with a square root between controller and drive, controller in °F", "1 V²/°F"}) {
		t.Errorf("square root: %v", got)
	}
}

// TestBrowserEntersWhole: in the box to be typed in no number is broken in two
// at any width, however long the labels are, and nothing sticks out; on a phone
// the tables of heater and gains are seen whole.
func TestBrowserEntersWhole(t *testing.T) {
	t.Parallel()
	b := sampleBundle()
	b.Gains.SquareRoot = &tune.SquareRoot{Kc: 1.1135, Unit: "V²/K"}
	b.Gains.Kc, b.Gains.Ti = 0.092793, ptr(38.019)
	b.Card.Warnings = append(b.Card.Warnings, fit.Warning{Code: "fahrenheit", Text: "°F"})
	page, err := json.Marshal(pageOf(t, b))
	if err != nil {
		t.Fatal(err)
	}
	const script = `
	var bad = [], seen = 0;
	[320, 375, 540, 570, 640, 700, 860, 1200].forEach(function (w) {
		var f = document.createElement("iframe");
		f.style.cssText = "border:0;height:800px;width:" + w + "px";
		document.body.appendChild(f);
		f.contentDocument.write(page);
		f.contentDocument.close();
		var d = f.contentDocument, box = d.querySelector(".enter").getBoundingClientRect();
		if (d.documentElement.scrollWidth > w) bad.push(w + ": the page is too wide");
		if (d.querySelector(".sure").getBoundingClientRect().left < box.right && w > 560) bad.push(w + ": the box runs into the text");
		d.querySelectorAll(".enter td").forEach(function (td) {
			seen++;
			var r = d.createRange();
			r.selectNodeContents(td);
			if (r.getClientRects().length != 1) bad.push(w + ": " + td.textContent + " is broken");
			if (r.getBoundingClientRect().right > box.right) bad.push(w + ": " + td.textContent + " sticks out");
		});
		if (w == 375) d.querySelectorAll("#heater .scroll, #gains .scroll").forEach(function (s) {
			if (s.scrollWidth > s.clientWidth) bad.push("a table is cut: " + s.getAttribute("aria-label"));
		});
		f.remove();
	});
	document.body.dataset.probe = JSON.stringify([seen, bad]);`
	dom, _ := browser(t, "<!DOCTYPE html><html><body><script>var page = "+string(page)+";"+script+"</script></body></html>", "--dump-dom", "--window-size=1400,900")
	if got := probeResult(t, dom); got != "[80,[]]" {
		t.Errorf("the box: %s", got)
	}
}

// TestTogether: a number, its bound and its unit stay on a line; a command
// stays as it was typed.
func TestTogether(t *testing.T) {
	for in, want := range map[string]string{
		"gain = 8.3 ± 1.4 K/V, lag 1":  "gain =~8.3~±~1.4~K/V, lag 1",
		"known to ±16 % of their sum":  "known to ±16~% of their sum",
		"0.096 K rms over 2 h 10 min.": "0.096~K rms over 2~h~10~min.",
		"12 000 rows, 3 samples":       "12~000 rows, 3 samples",
		"about 79.8 °C, 5 V²":          "about 79.8~°C, 5~V²",
		"1 run, 2 segments, 4 dips":    "1 run, 2 segments, 4 dips",
	} {
		if got := strings.ReplaceAll(together(in), "\u00a0", "~"); got != want {
			t.Errorf("together(%q) = %q, want %q", in, got, want)
		}
	}
	b := sampleBundle()
	b.Command = "lagwright run 'oven 3 s.csv' --overshoot '5 %'"
	if !strings.Contains(pageOf(t, b), "oven 3 s.csv&#39; --overshoot &#39;5 %&#39;") {
		t.Error("the command is not as it was typed")
	}
}
