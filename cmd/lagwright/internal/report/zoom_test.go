package report

import (
	"strings"
	"testing"
)

// TestBrowserZoom looks closer at the log by button, key and pointer: the
// panels of one time axis go together, the read-out stays right, what is
// outside is clipped, and "Whole" brings back every coordinate.
func TestBrowserZoom(t *testing.T) {
	t.Parallel()
	const script = `
	var svg = document.querySelector("#log svg.wide"), panels = svg.querySelectorAll("g.panel"), out = {};
	var bar = svg.parentNode.querySelector(".zoom.wide"), button = function (name) {
		return Array.prototype.filter.call(bar.children, function (b) { return b.textContent === name; })[0];
	};
	var marks = function () { return Array.prototype.map.call(svg.querySelectorAll("path[data-name]"), function (p) { return p.getAttribute("d"); }).join(); };
	var span = function (p) { var x = p.dataset.x.split(" ").map(Number); return x[1] - x[0]; };
	var pointer = function (kind, share) {
		var r = svg.getBoundingClientRect(), box = panels[0].dataset.box.split(" ").map(Number), scale = r.width / svg.viewBox.baseVal.width;
		svg.dispatchEvent(new PointerEvent(kind, {button: 0, clientX: r.left + (box[0] + share * (box[2] - box[0])) * scale, clientY: r.top + (box[1] + box[3]) / 2 * scale}));
	};
	var readout = function (share) { pointer("pointermove", share); return svg.parentNode.querySelector(".readout").textContent.split("\n"); };
	var whole = span(panels[0]), before = marks(), middle = readout(0.5);
	svg.dispatchEvent(new PointerEvent("pointerleave"));
	out.hiddenFirst = button("Whole").hidden;
	button("Zoom in").click();
	svg.dispatchEvent(new KeyboardEvent("keydown", {key: "+"}));
	out.quarter = Math.abs(span(panels[0]) - whole / 4) < 1e-9 && panels[0].dataset.x === panels[1].dataset.x;
	out.shown = !button("Whole").hidden;
	out.clipped = /^url\(#zoom/.test(panels[0].querySelector("path[data-name]").getAttribute("clip-path"));
	var closer = readout(0.5);
	out.same = closer[0] === middle[0] && closer.length === middle.length;
	svg.dispatchEvent(new PointerEvent("pointerleave"));
	out.ticks = Array.prototype.filter.call(svg.querySelectorAll("g.panel > g text"), function (e) { return /^\d\d:\d\d/.test(e.textContent); }).length;
	var at = panels[0].dataset.x;
	button("Later").click();
	out.later = panels[0].dataset.x !== at && Math.abs(span(panels[0]) - whole / 4) < 1e-9;
	for (var i = 0; i < 9; i++) button("Zoom in").click();
	out.closest = Math.abs(span(panels[0]) - whole / 64) < 1e-9 && button("Zoom in").disabled;
	svg.dispatchEvent(new KeyboardEvent("keydown", {key: "0"}));
	out.back = marks() === before && span(panels[0]) === whole && !panels[0].querySelector("[clip-path]");
	pointer("pointerdown", 0.25); pointer("pointermove", 0.5); pointer("pointerup", 0.75);
	out.dragged = Math.abs(span(panels[0]) - whole / 2) < whole / 100;
	window.dispatchEvent(new Event("beforeprint"));
	out.printed = marks() === before;
	out.others = document.querySelectorAll("#gains .zoom, #heater .zoom").length < document.querySelectorAll("#gains figure svg, #heater figure svg").length;
	document.body.dataset.probe = JSON.stringify(out);`
	dom, log := browser(t, probed(pageOf(t, sampleBundle()), script), "--dump-dom", "--window-size=1280,2000")
	if lines := consoleLines(log); len(lines) > 0 {
		t.Fatalf("the console says\n%s", strings.Join(lines, "\n"))
	}
	got := probeResult(t, dom)
	t.Log(got)
	if strings.Contains(got, "false") || !strings.Contains(got, `"ticks":`) || strings.Contains(got, `"ticks":0`) {
		t.Errorf("the zoom does not hold: %s", got)
	}
}
