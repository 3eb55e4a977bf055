package report

import (
	"bytes"
	"context"
	"encoding/json"
	"html"
	"net/url"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"testing"
	"time"
)

// browser runs a headless Chromium on a page and returns what it printed and
// what it logged. The test is skipped where there is none.
func browser(t *testing.T, page string, args ...string) (stdout, stderr string) {
	t.Helper()
	if testing.Short() {
		t.Skip("starts a browser")
	}
	program := ""
	for _, name := range []string{"chromium", "chromium-browser", "google-chrome"} {
		if path, err := exec.LookPath(name); err == nil {
			program = path
			break
		}
	}
	if program == "" {
		t.Skip("no Chromium on PATH: the page is not tried in a browser")
	}
	file := filepath.Join(t.TempDir(), "page.html")
	if err := os.WriteFile(file, []byte(page), 0o666); err != nil {
		t.Fatal(err)
	}
	ctx, stop := context.WithTimeout(t.Context(), time.Minute)
	defer stop()
	address := url.URL{Scheme: "file", Path: filepath.ToSlash(file)}
	cmd := exec.CommandContext(ctx, program, append([]string{
		"--headless", "--no-sandbox", "--disable-gpu", "--no-first-run", "--user-data-dir=" + t.TempDir(),
		"--enable-logging=stderr", "--virtual-time-budget=500",
	}, append(args, address.String())...)...)
	var out, log bytes.Buffer
	cmd.Stdout, cmd.Stderr = &out, &log
	cmd.WaitDelay = 5 * time.Second
	if err := cmd.Run(); err != nil {
		t.Fatalf("%s: %v\n%s", program, err, log.String())
	}
	return out.String(), log.String()
}

// consoleLines are the messages of the page's console.
func consoleLines(log string) []string {
	return regexp.MustCompile(`(?m)^.*:CONSOLE[:(].*$`).FindAllString(log, -1)
}

// probed is a page with a script of the test's own at its end. The policy
// that would stop it is taken out.
func probed(page, script string) string {
	page = regexp.MustCompile(`<meta http-equiv[^>]*>`).ReplaceAllString(page, "")
	return strings.Replace(page, "</body>", "<script>"+script+"</script></body>", 1)
}

// probeResult reads what a probe left in an attribute of the body.
func probeResult(t *testing.T, dom string) string {
	t.Helper()
	m := regexp.MustCompile(`<body[^>]* ?data-probe="([^"]*)"`).FindStringSubmatch(dom)
	if m == nil {
		t.Fatal("the probe did not run")
	}
	return html.UnescapeString(m[1])
}

// TestBrowserRefusesForeignScript shows that the console check can fail, and
// that the page's policy holds.
func TestBrowserRefusesForeignScript(t *testing.T) {
	t.Parallel()
	page := strings.Replace(pageOf(t, sampleBundle()), "</body>", `<script>document.title="owned"</script></body>`, 1)
	dom, log := browser(t, page, "--dump-dom")
	if len(consoleLines(log)) == 0 {
		t.Error("a refused script is not on the console")
	}
	if strings.Contains(dom, "<title>owned") {
		t.Error("a foreign script ran")
	}
}

// TestBrowserReadout moves a pointer over the log and then a key, and reads
// what the page says.
func TestBrowserReadout(t *testing.T) {
	t.Parallel()
	const script = `
	var svg = document.querySelector("#log svg.wide"), r = svg.getBoundingClientRect();
	var box = svg.querySelector("g.panel").dataset.box.split(" ").map(Number), scale = r.width / svg.viewBox.baseVal.width;
	svg.dispatchEvent(new PointerEvent("pointermove", {clientX: r.left + (box[0] + box[2]) / 2 * scale, clientY: r.top + (box[1] + box[3]) / 2 * scale}));
	var first = document.querySelector(".readout").textContent;
	svg.dispatchEvent(new KeyboardEvent("keydown", {key: "ArrowRight", shiftKey: true}));
	var second = document.querySelector(".readout").textContent;
	svg.dispatchEvent(new KeyboardEvent("keydown", {key: "Escape"}));
	document.body.dataset.probe = JSON.stringify([first, second, document.querySelector(".readout").hidden]);`
	dom, log := browser(t, probed(pageOf(t, sampleBundle()), script), "--dump-dom", "--window-size=1280,2000")
	if lines := consoleLines(log); len(lines) > 0 {
		t.Fatalf("the console says\n%s", strings.Join(lines, "\n"))
	}
	got := probeResult(t, dom)
	// Half of 706 s after 08:12:30 is 08:18:23, on the plateau of 80.6 °C at 4.5 V.
	want := regexp.MustCompile(`^\["08:18:2\d\\nlogged: 8[01]\.\d+ °C\\nfitted: 80\.[56]\d* °C\\ninput: 4\.50* V","08:1[89]:\d\d\\nlogged:.*",true\]$`)
	if !want.MatchString(got) {
		t.Errorf("the read-out says %s", got)
	}
}

// TestBrowserScreens opens a plain and a hostile page on a phone and on a desk
// screen: nothing sticks out, the right drawings are shown, letters of figures
// keep a readable size, our script runs and no other, the console is quiet.
func TestBrowserScreens(t *testing.T) {
	t.Parallel()
	const script = `
	var out = [];
	pages.forEach(function (page) {
		[390, 1280].forEach(function (w) {
			var f = document.createElement("iframe");
			f.style.cssText = "border:0;height:800px;width:" + w + "px";
			document.body.appendChild(f);
			f.contentDocument.write(page);
			f.contentDocument.close();
			var d = f.contentDocument, narrow = d.defaultView.getComputedStyle(d.querySelector("svg.narrow")).display !== "none";
			var svg = d.querySelector(narrow ? "svg.narrow" : "svg.wide"), scale = svg.clientWidth / svg.viewBox.baseVal.width;
			out.push({width: w, fits: d.documentElement.scrollWidth <= w, narrow: narrow, readable: 11 * scale >= 10.5,
				ours: !!d.querySelector("svg[tabindex]"), owned: d.title === "owned"});
			f.remove();
		});
	});
	document.body.dataset.probe = JSON.stringify(out);`
	pages, err := json.Marshal([]string{pageOf(t, sampleBundle()), pageOf(t, hostileBundle())})
	if err != nil {
		t.Fatal(err)
	}
	dom, log := browser(t, "<!DOCTYPE html><html><body><script>var pages = "+string(pages)+";"+script+"</script></body></html>", "--dump-dom", "--window-size=1400,900")
	if lines := consoleLines(log); len(lines) > 0 {
		t.Errorf("the console says\n%s", strings.Join(lines, "\n"))
	}
	type screen struct {
		Width                               int
		Fits, Narrow, Readable, Ours, Owned bool
	}
	var got []screen
	if err := json.Unmarshal([]byte(probeResult(t, dom)), &got); err != nil {
		t.Fatal(err)
	}
	phone, desk := screen{390, true, true, true, true, false}, screen{1280, true, false, true, true, false}
	if want := []screen{phone, desk, phone, desk}; !slices.Equal(got, want) {
		t.Errorf("screens\n%+v, want\n%+v", got, want)
	}
}

// TestBrowserAxe runs the accessibility checks of axe-core, of which
// LAGWRIGHT_AXE names the file axe.min.js (npm install axe-core, anywhere
// outside the repository). The contrast of letters inside figures, which it
// cannot judge, is measured in TestPaletteContrast.
func TestBrowserAxe(t *testing.T) {
	name := os.Getenv("LAGWRIGHT_AXE")
	if name == "" {
		t.Skip("LAGWRIGHT_AXE does not name an axe.min.js")
	}
	axe, err := os.ReadFile(name)
	if err != nil {
		t.Fatal(err)
	}
	script := strings.ReplaceAll(string(axe), "</script", `<\/script`) + `
	axe.run(document).then(function (r) {
		document.body.dataset.probe = JSON.stringify({passes: r.passes.length, violations: r.violations.map(function (v) { return v.id + ": " + v.nodes[0].html; })});
	});`
	for _, width := range []string{"500", "1280"} {
		dom, _ := browser(t, probed(pageOf(t, sampleBundle()), script), "--dump-dom", "--window-size="+width+",1200", "--virtual-time-budget=60000")
		var got struct {
			Passes     int
			Violations []string
		}
		if err := json.Unmarshal([]byte(probeResult(t, dom)), &got); err != nil {
			t.Fatal(err)
		}
		if got.Passes < 20 || len(got.Violations) > 0 {
			t.Errorf("at %s px: %d checks passed, findings:\n%s", width, got.Passes, strings.Join(got.Violations, "\n"))
		}
	}
}

// TestBrowserPrints makes an A4 print and counts its pages.
func TestBrowserPrints(t *testing.T) {
	t.Parallel()
	pdf := filepath.Join(t.TempDir(), "page.pdf")
	browser(t, pageOf(t, sampleBundle()), "--no-pdf-header-footer", "--print-to-pdf="+pdf)
	b, err := os.ReadFile(pdf)
	if err != nil {
		t.Fatal(err)
	}
	if n := len(regexp.MustCompile(`/Type\s*/Page\b[^s]`).FindAll(b, -1)); n < 4 || n > 14 {
		t.Errorf("%d pages", n)
	}
	if !bytes.Contains(b, []byte("/MediaBox [0 0 594.95996 841.91998]")) && !bytes.Contains(b, []byte("/MediaBox [0 0 595")) {
		t.Errorf("the paper is not A4: %s", regexp.MustCompile(`/MediaBox[^\n]*`).Find(b))
	}
}
