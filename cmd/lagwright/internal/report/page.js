// Read-outs under the pointer, and under the arrow keys once a figure has the
// focus. Nothing on the page depends on them.
(function () {
  "use strict";
  function number(v) {
    if (v === 0 || !isFinite(v)) return "0";
    var a = Math.abs(v);
    if (a >= 1e5 || a < 1e-3) return v.toExponential(2);
    return v.toFixed(Math.max(0, 3 - Math.floor(Math.log10(a))));
  }
  function clock(s) {
    s = ((Math.round(s) % 86400) + 86400) % 86400;
    var two = function (n) { return (n < 10 ? "0" : "") + n; };
    return two(Math.floor(s / 3600)) + ":" + two(Math.floor(s / 60) % 60) + ":" + two(s % 60);
  }
  function value(share, range, log) {
    if (log) return range[0] * Math.pow(range[1] / range[0], share);
    return range[0] + share * (range[1] - range[0]);
  }
  function numbers(s) { return s.split(" ").map(Number); }
  function panelOf(g) {
    var d = g.dataset, label = d.xl.split(" ");
    var series = [];
    g.querySelectorAll("path[data-name]").forEach(function (p) {
      var pts = p.getAttribute("d").slice(1).split(/[ML ]+/).map(function (q) { return q.split(",").map(Number); });
      series.push({ name: p.dataset.name, pts: pts });
    });
    return {
      box: numbers(d.box), x: numbers(d.x), y: numbers(d.y), unit: d.yu, xlog: !!d.xlog, ylog: !!d.ylog,
      series: series,
      place: function (v) {
        if (label[0] === "clock") return clock(v + Number(label[1]));
        return number(v / Number(label[0])) + (label[1] ? " " + label.slice(1).join(" ") : "");
      }
    };
  }
  function heightAt(pts, x) {
    if (x < pts[0][0] || x > pts[pts.length - 1][0]) return null;
    var lo = 0, hi = pts.length - 1;
    while (hi - lo > 1) { var m = (lo + hi) >> 1; if (pts[m][0] <= x) lo = m; else hi = m; }
    var a = pts[lo], b = pts[hi];
    return b[0] === a[0] ? b[1] : a[1] + (b[1] - a[1]) * (x - a[0]) / (b[0] - a[0]);
  }
  function lines(panels, at, x) {
    var out = [at.place(value((x - at.box[0]) / (at.box[2] - at.box[0]), at.x, at.xlog))], seen = {};
    panels.forEach(function (p) {
      if (p.box[0] !== at.box[0] || p.x[0] !== at.x[0] || p.x[1] !== at.x[1]) return;
      p.series.forEach(function (s) {
        var y = heightAt(s.pts, x), id = s.name + p.box[1];
        if (y === null || seen[id]) return;
        seen[id] = true;
        out.push(s.name + ": " + number(value((p.box[3] - y) / (p.box[3] - p.box[1]), p.y, p.ylog)) + (p.unit ? " " + p.unit : ""));
      });
    });
    return out;
  }
  document.querySelectorAll("figure svg").forEach(function (svg) {
    var panels = null, cursor = null, tip = null, x = null, at = null;
    function show() {
      var said = lines(panels, at, x);
      if (said.length < 2) return hide();
      if (!tip) {
        tip = document.createElement("div");
        tip.className = "readout";
        tip.setAttribute("role", "status");
        svg.parentNode.appendChild(tip);
        cursor = document.createElementNS(svg.namespaceURI, "line");
        cursor.setAttribute("class", "cursor");
        svg.appendChild(cursor);
      }
      tip.hidden = false;
      cursor.setAttribute("visibility", "visible");
      tip.textContent = said.join("\n");
      cursor.setAttribute("x1", x); cursor.setAttribute("x2", x);
      cursor.setAttribute("y1", at.box[1]); cursor.setAttribute("y2", at.box[3]);
      var view = svg.viewBox.baseVal, scale = svg.clientWidth / view.width;
      var left = x * scale + 12;
      if (left + tip.offsetWidth > svg.clientWidth) left = Math.max(0, x * scale - 12 - tip.offsetWidth);
      tip.style.left = left + "px";
      tip.style.top = (at.box[1] * scale + 4) + "px";
    }
    function hide() { if (tip) { tip.hidden = true; cursor.setAttribute("visibility", "hidden"); } }
    function load() {
      if (!panels) panels = Array.prototype.map.call(svg.querySelectorAll("g.panel"), panelOf)
        .filter(function (p) { return p.series.length; });
      return panels.length > 0;
    }
    svg.addEventListener("pointermove", function (e) {
      if (!load()) return;
      var r = svg.getBoundingClientRect(), scale = svg.viewBox.baseVal.width / r.width;
      var px = (e.clientX - r.left) * scale, py = (e.clientY - r.top) * scale;
      at = null;
      panels.forEach(function (p) { if (px >= p.box[0] && px <= p.box[2] && py >= p.box[1] && py <= p.box[3]) at = p; });
      if (!at) return hide();
      x = px;
      show();
    });
    svg.addEventListener("pointerleave", hide);
    svg.addEventListener("blur", hide);
    svg.addEventListener("zoomed", function () { panels = at = null; hide(); }); // see zoom.js
    if (svg.querySelector("path[data-name]")) svg.setAttribute("tabindex", "0");
    svg.addEventListener("keydown", function (e) {
      var step = { ArrowLeft: -4, ArrowRight: 4 }[e.key];
      if (e.key === "Escape") return hide();
      if (!step || !load()) return;
      e.preventDefault();
      if (!at) at = panels[0];
      x = x === null ? (at.box[0] + at.box[2]) / 2 : Math.min(Math.max(x + step * (e.shiftKey ? 10 : 1), at.box[0]), at.box[2]);
      show();
    });
  });
})();
