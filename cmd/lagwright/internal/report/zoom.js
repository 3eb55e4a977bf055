// A closer look along a time axis: by buttons below the figure, by + - 0 once
// the figure has the focus, or by dragging across it. Nothing depends on it,
// nothing moves by itself, and paper gets the whole.
(function () {
  "use strict";
  var clockSteps = [0.1, 0.2, 0.5, 1, 2, 5, 10, 20, 30, 60, 120, 300, 600, 1200, 1800, 3600, 7200, 14400, 21600, 43200, 86400];
  var closest = 1 / 64, serial = 0;
  function numbers(s) { return s.split(" ").map(Number); }
  function two(n) { return (n < 10 ? "0" : "") + n; }
  function label(v, step, axis) { // as the ticks of the drawing are written
    if (axis[0] !== "clock") return String(Number((v / Number(axis[0])).toPrecision(6)));
    var s = (((v + Number(axis[1])) % 86400) + 86400) % 86400;
    s = step < 1 ? Math.round(s * 10) / 10 : Math.round(s);
    var tail = step >= 60 ? "" : ":" + two(step < 1 ? (s % 60).toFixed(1) : Math.floor(s % 60));
    return two(Math.floor(s / 3600) % 24) + ":" + two(Math.floor(s / 60) % 60) + tail;
  }
  function element(svg, name, attributes) {
    var e = document.createElementNS(svg.namespaceURI, name);
    Object.keys(attributes).forEach(function (k) { e.setAttribute(k, attributes[k]); });
    return e;
  }
  function timePanels(svg) {
    var all = Array.prototype.filter.call(svg.querySelectorAll("g.panel"), function (g) {
      return g.querySelector("path[data-name]") && /^(clock|[\d.e+]+ (s|min|h|d|days?)$)/.test(g.dataset.xl) && !g.dataset.xlog;
    });
    return all.filter(function (g) {
      return g.dataset.x === all[0].dataset.x && g.dataset.box.split(" ")[0] === all[0].dataset.box.split(" ")[0];
    });
  }
  function zoomable(svg) {
    var groups = timePanels(svg);
    if (!groups.length) return;
    var whole = groups[0].dataset.x, span = numbers(whole), box = numbers(groups[0].dataset.box), wide = box[2] - box[0];
    var axis = groups[0].dataset.xl.split(" "), from = 0, to = 1, kept = null, buttons = {};

    function keep() {
      kept = groups.map(function (g) {
        var b = numbers(g.dataset.box), id = "zoom" + (++serial), clip = element(svg, "clipPath", { id: id });
        clip.appendChild(element(svg, "rect", { x: b[0], y: b[1] - 2, width: b[2] - b[0], height: b[3] - b[1] + 4 }));
        var parts = Array.prototype.map.call(g.children, function (e) {
          var d = e.getAttribute("d"), x = Number(e.getAttribute("x")), y = Number(e.getAttribute("y"));
          var ends = d && e.classList.contains("s-grid") && d.slice(1).split(/[ ,]/);
          return {
            e: e, d: d, x: x,
            mark: !d && x >= b[0] && y >= b[1] && y <= b[3],
            tick: d ? ends && ends[0] === ends[2] : y > b[3] && e.getAttribute("text-anchor") === "middle"
          };
        });
        var added = element(svg, "g", {});
        g.appendChild(clip);
        g.insertBefore(added, g.firstChild);
        return { g: g, box: b, clip: "url(#" + id + ")", parts: parts, added: added, labelled: parts.some(function (p) { return p.tick && !p.d; }) };
      });
    }
    function place(px) { return box[0] + ((px - box[0]) / wide - from) / (to - from) * wide; }
    function stepFor(least) {
      if (axis[0] === "clock") return clockSteps.filter(function (s) { return s >= least; })[0] || 86400;
      var unit = Number(axis[0]), ten = Math.pow(10, Math.floor(Math.log10(least / unit)));
      return unit * [1, 2, 5, 10].map(function (m) { return m * ten; }).filter(function (s) { return s * unit >= least; })[0];
    }
    function ticks(k) {
      var a = span[0] + from * (span[1] - span[0]), b = span[0] + to * (span[1] - span[0]);
      var step = stepFor((b - a) / Math.max(2, Math.floor(wide / 80)));
      var start = axis[0] === "clock" ? Number(axis[1]) : 0;
      for (var v = Math.ceil((a + start) / step - 1e-9) * step - start; v <= b + 1e-9 * step; v += step) {
        var x = (box[0] + (v - a) / (b - a) * wide).toFixed(1);
        k.added.appendChild(element(svg, "path", { "class": "s-grid", "stroke-width": 1, d: "M" + x + "," + k.box[3] + " " + x + "," + k.box[1] }));
        if (!k.labelled) continue;
        var t = element(svg, "text", { x: x, y: k.box[3] + 14, "font-size": 11, "text-anchor": "middle", "class": "f-muted" });
        t.textContent = label(v, step, axis);
        k.added.appendChild(t);
      }
    }
    function draw() {
      if (!kept) keep();
      var all = from === 0 && to === 1;
      kept.forEach(function (k) {
        k.added.textContent = "";
        if (!all) ticks(k);
        k.g.dataset.x = all ? whole : [from, to].map(function (f) { return span[0] + f * (span[1] - span[0]); }).join(" ");
        k.parts.forEach(function (p) {
          if (p.tick) p.e.setAttribute("visibility", all ? "visible" : "hidden");
          else if (p.d) {
            p.e.setAttribute("d", all ? p.d : p.d.replace(/(-?[\d.]+),/g, function (m, x) { return place(Number(x)).toFixed(1) + ","; }));
            if (all) p.e.removeAttribute("clip-path"); else p.e.setAttribute("clip-path", k.clip);
          } else if (p.mark) {
            var x = all ? p.x : place(p.x);
            p.e.setAttribute("x", x);
            p.e.setAttribute("visibility", x >= box[0] - 1 && x <= box[2] ? "visible" : "hidden");
          }
        });
      });
      Object.keys(buttons).forEach(function (name) { buttons[name].hidden = all && name !== "Zoom in"; });
      buttons["Zoom in"].disabled = to - from <= closest * 1.001;
      svg.dispatchEvent(new Event("zoomed"));
    }
    function show(a, b) { // keeps the span within the whole and not too narrow
      var w = Math.min(1, Math.max(closest, b - a));
      from = Math.min(Math.max(0, (a + b - w) / 2), 1 - w);
      to = from + w;
      if (w === 1) { from = 0; to = 1; }
      draw();
    }
    function by(factor) {
      var line = svg.querySelector(".cursor"), seen = line && line.getAttribute("visibility") === "visible";
      var at = seen ? (Number(line.getAttribute("x1")) - box[0]) / wide : 0.5; // what is read out stays in its place
      var w = Math.min(1, Math.max(closest, (to - from) * factor)), fixed = from + at * (to - from);
      show(fixed - at * w, fixed + (1 - at) * w);
    }
    function shift(share) { var w = to - from; show(from + share * w, to + share * w); }
    var does = {
      "Zoom in": function () { by(0.5); }, "Zoom out": function () { by(2); },
      "Earlier": function () { shift(-0.5); }, "Later": function () { shift(0.5); }, "Whole": function () { show(0, 1); }
    };
    var bar = document.createElement("div");
    bar.className = "zoom " + svg.getAttribute("class");
    Object.keys(does).forEach(function (name) {
      var b = buttons[name] = document.createElement("button");
      b.type = "button";
      b.textContent = name;
      b.hidden = name !== "Zoom in";
      b.addEventListener("click", function () {
        does[name]();
        if (b.hidden || b.disabled) buttons[b.disabled ? "Zoom out" : "Zoom in"].focus();
      });
      bar.appendChild(b);
    });
    svg.parentNode.insertBefore(bar, svg.parentNode.querySelector("figcaption"));
    svg.addEventListener("keydown", function (e) {
      var name = { "+": "Zoom in", "=": "Zoom in", "-": "Zoom out", "0": "Whole" }[e.key];
      if (!name || e.ctrlKey || e.metaKey || e.altKey) return;
      e.preventDefault();
      does[name]();
    });
    window.addEventListener("beforeprint", function () { if (from > 0 || to < 1) show(0, 1); });

    var began = null, chosen = null;
    function shareAt(e) {
      var r = svg.getBoundingClientRect();
      return Math.min(1, Math.max(0, ((e.clientX - r.left) * svg.viewBox.baseVal.width / r.width - box[0]) / wide));
    }
    function drop() { if (chosen) chosen.remove(); began = chosen = null; }
    svg.addEventListener("pointerdown", function (e) { if (e.button === 0) began = shareAt(e); });
    svg.addEventListener("pointermove", function (e) {
      if (began === null || Math.abs(shareAt(e) - began) < 0.02 && !chosen) return;
      if (!chosen) chosen = svg.appendChild(element(svg, "rect", { "class": "chosen", y: box[1], height: numbers(groups[groups.length - 1].dataset.box)[3] - box[1] }));
      chosen.setAttribute("x", box[0] + Math.min(began, shareAt(e)) * wide);
      chosen.setAttribute("width", Math.abs(shareAt(e) - began) * wide);
    });
    svg.addEventListener("pointerup", function (e) {
      var a = began, b = shareAt(e), w = to - from, meant = chosen;
      drop();
      if (meant && a !== b) show(from + Math.min(a, b) * w, from + Math.max(a, b) * w);
    });
    svg.addEventListener("pointercancel", drop);
    svg.addEventListener("pointerleave", drop);
    svg.addEventListener("dblclick", does.Whole);
  }
  document.querySelectorAll("figure svg").forEach(zoomable);
})();
