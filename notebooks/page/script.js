(function () {
  "use strict";
  var doc = document, root = doc.documentElement, all = function (q, at) { return Array.prototype.slice.call((at || doc).querySelectorAll(q)); };
  var SVG = "http://www.w3.org/2000/svg", live = doc.getElementById("live");
  function make(tag, text, cls) {
    var e = doc.createElement(tag);
    if (text) e.textContent = text;
    if (cls) e.className = cls;
    return e;
  }
  function svg(tag, at, set) {
    var e = doc.createElementNS(SVG, tag);
    for (var k in set) e.setAttribute(k, set[k]);
    at.appendChild(e);
    return e;
  }
  function say(text) { live.textContent = text; }
  root.classList.add("js");

  // The hash holds the section and, behind "&", the theme.
  function hash() {
    var parts = location.hash.slice(1).split("&"), out = { at: "", theme: "" };
    parts.forEach(function (p) { if (p.indexOf("theme=") === 0) out.theme = p.slice(6); else if (p) out.at = p; });
    return out;
  }
  function address(h) {
    var text = [h.at, h.theme ? "theme=" + h.theme : ""].filter(Boolean).join("&");
    return location.pathname + location.search + (text ? "#" + text : "");
  }
  var theme = "";
  function apply() {
    var h = hash();
    if (h.theme) theme = h.theme === "dark" || h.theme === "light" ? h.theme : "";
    if (theme) root.dataset.theme = theme; else delete root.dataset.theme;
    if (theme && !h.theme) history.replaceState(null, "", address({ at: h.at, theme: theme }));
    var target = h.theme && h.at && doc.getElementById(h.at);
    if (target) target.scrollIntoView();
  }
  window.addEventListener("hashchange", apply);
  apply();
  function on(id, f) { var b = doc.getElementById(id); if (b) b.addEventListener("click", f); }
  on("theme", function () {
    var dark = theme ? theme === "dark" : matchMedia("(prefers-color-scheme: dark)").matches;
    theme = dark ? "light" : "dark";
    root.dataset.theme = theme;
    history.replaceState(null, "", address({ at: hash().at, theme: theme }));
    say("Theme: " + theme);
  });
  on("print", function () { window.print(); });
  function copy(text, done) {
    function old() {
      var t = make("textarea", "", "hide");
      t.value = text;
      doc.body.appendChild(t);
      t.select();
      var ok = doc.execCommand("copy");
      t.remove();
      say(ok ? done : "Copying is not allowed here");
    }
    if (navigator.clipboard && window.isSecureContext) navigator.clipboard.writeText(text).then(function () { say(done); }, old);
    else old();
  }
  on("link", function () {
    var now = doc.querySelector("nav a[aria-current]");
    copy(location.href.split("#")[0] + (now ? now.getAttribute("href") : ""), "Link copied");
  });

  // On paper details are open, save numbers of figures, code and the checks that are fine,
  // which stay as they are.
  var opened = [];
  window.addEventListener("beforeprint", function () { opened = all("details:not([open]):not(.numbers):not(.cell):not(.fine)"); opened.forEach(function (d) { d.open = true; }); });
  window.addEventListener("afterprint", function () { opened.forEach(function (d) { d.open = false; }); });

  if (window.IntersectionObserver) {
    var links = {}, seen = {};
    all("nav a").forEach(function (a) { links[a.getAttribute("href").slice(1)] = a; });
    var watch = new IntersectionObserver(function (list) {
      list.forEach(function (e) { seen[e.target.id] = e.isIntersecting; });
      var found = false;
      all("main section[id]").forEach(function (s) {
        var a = links[s.id];
        if (!a) return;
        if (!found && seen[s.id]) { a.setAttribute("aria-current", "true"); found = true; } else a.removeAttribute("aria-current");
      });
    }, { rootMargin: "-8% 0px -55% 0px" });
    all("main section[id]").forEach(function (s) { watch.observe(s); });
  }

  // Tables: sorted by a press on a head, copied as CSV.
  function value(cell) {
    var m = /^[\s\u25a0-\u25ff]*([-+]?[\d.]+(?:e[-+]?\d+)?|-?\u221e)/.exec(cell.textContent.replace(/\u2212/g, "-"));
    if (!m) return NaN;
    return m[1].indexOf("\u221e") >= 0 ? (m[1][0] === "-" ? -Infinity : Infinity) : parseFloat(m[1]);
  }
  function sort(table, column, th) {
    var down = th.getAttribute("aria-sort") === "ascending", body = table.tBodies[0];
    var rows = Array.prototype.slice.call(body.rows), number = th.classList.contains("number");
    rows.sort(function (a, b) {
      var x = a.cells[column], y = b.cells[column], d;
      if (number) {
        var p = value(x), q = value(y);
        if (isNaN(p) || isNaN(q)) return isNaN(p) - isNaN(q);
        d = p < q ? -1 : p > q ? 1 : 0;
      } else d = x.textContent.localeCompare(y.textContent, "en", { numeric: true });
      return down ? -d : d;
    });
    all("th[aria-sort]", table).forEach(function (t) { t.removeAttribute("aria-sort"); });
    th.setAttribute("aria-sort", down ? "descending" : "ascending");
    rows.forEach(function (r) { body.appendChild(r); });
  }
  function csv(table) {
    return Array.prototype.map.call(table.rows, function (r) {
      return Array.prototype.map.call(r.cells, function (c) {
        var t = c.textContent.trim().replace(/\u2212/g, "-");
        return /[",\n]/.test(t) ? '"' + t.replace(/"/g, '""') + '"' : t;
      }).join(",");
    }).join("\n") + "\n";
  }
  function equip(table) {
    Array.prototype.forEach.call(table.tHead ? table.tHead.rows[0].cells : [], function (th, i) {
      var b = make("button", th.textContent);
      b.type = "button";
      th.textContent = "";
      th.appendChild(b);
      b.addEventListener("click", function () { sort(table, i, th); });
    });
    var c = make("button", "Copy as CSV", "copy");
    c.type = "button";
    c.addEventListener("click", function () { copy(csv(table), "Table copied"); });
    table.parentNode.insertAdjacentElement("afterend", c);
  }
  all("table.sortable").forEach(equip);

  // The crosshair reads all panels of a group at one place of the x axis.
  function numbers(e, name) { var v = e.getAttribute("data-" + name); return v === null ? null : v.split(" "); }
  function curves(g) {
    return all("g", g).map(function (e) {
      var px = numbers(e, "px");
      return px && { name: e.getAttribute("data-name"), px: px.map(Number), py: numbers(e, "py").map(Number), x: numbers(e, "x"), y: numbers(e, "y"), lo: numbers(e, "lo"), hi: numbers(e, "hi") };
    }).filter(Boolean);
  }
  function nearest(list, at) {
    var best = 0;
    list.forEach(function (v, i) { if (Math.abs(v - at) < Math.abs(list[best] - at)) best = i; });
    return best;
  }
  function group(box) {
    var panels = [];
    all(".panel", box).forEach(function (p) {
      var s = p.querySelector("svg"), g = s && s.querySelector(".reader"), c = g && curves(g);
      if (!c || !c.length) return;
      var out = make("p", "", "readout");
      p.appendChild(out);
      p.tabIndex = 0;
      p.setAttribute("role", "group");
      p.setAttribute("aria-label", s.querySelector("title").textContent + ": read it with the arrow keys");
      var one = { el: p, svg: s, out: out, curves: c, frame: numbers(g, "frame").map(Number), name: g.getAttribute("data-name"), xl: g.getAttribute("data-x-label"), cross: svg("g", s, { "class": "cross" }), at: -1 };
      panels.push(one);
      s.addEventListener("pointermove", function (e) { if (!one.busy) show(place(s, e).x); });
      s.addEventListener("pointerleave", clear);
      p.addEventListener("keydown", function (e) {
        var step = { ArrowLeft: -1, ArrowRight: 1, PageUp: 10, PageDown: -10, Home: -1e6, End: 1e6 }[e.key];
        if (e.key === "Escape") { clear(); return; }
        if (!step) return;
        e.preventDefault();
        var px = one.curves[0].px, i = one.at < 0 && Math.abs(step) === 1 ? (step > 0 ? 0 : px.length - 1) : Math.max(one.at, 0) + step;
        i = Math.min(Math.max(i, 0), px.length - 1);
        show(px[i], one);
      });
      p.addEventListener("blur", clear);
    });
    function clear() { panels.forEach(function (p) { p.cross.textContent = ""; p.out.textContent = ""; p.at = -1; }); }
    function show(x, spoken) {
      panels.forEach(function (p) {
        p.cross.textContent = "";
        p.at = nearest(p.curves[0].px, x);
        var at = p.curves[0].px[p.at], text = p.xl.replace(/ \(.*/, "") + " " + p.curves[0].x[p.at];
        svg("line", p.cross, { x1: at, x2: at, y1: p.frame[1], y2: p.frame[3] });
        p.curves.forEach(function (c) {
          var i = nearest(c.px, at);
          if (Math.abs(c.px[i] - at) > 8) return;
          svg("circle", p.cross, { cx: c.px[i], cy: c.py[i], r: 3.4 });
          text += "; " + (c.name ? c.name + " " : "") + c.y[i] + (c.lo ? " (" + c.lo[i] + " to " + c.hi[i] + ")" : "");
        });
        p.out.textContent = text;
        if (spoken === p) say((p.name ? p.name + ", " : "") + text);
      });
    }
    return panels;
  }
  function place(s, e) {
    var p = s.createSVGPoint();
    p.x = e.clientX;
    p.y = e.clientY;
    return p.matrixTransform(s.getScreenCTM().inverse());
  }
  all(".multiples").forEach(function (box) {
    var panels = group(box), data = box.parentNode.querySelector(".brush-data");
    if (data && panels.length) brush(panels[0], JSON.parse(data.textContent), box);
  });

  // A frame drawn on the plot of pairs lists the reflections under it.
  function brush(panel, rows, box) {
    var s = panel.svg, from = null, rect = svg("rect", s, { "class": "sel", width: 0, height: 0 });
    var area = make("div"), every = make("button", "List every reflection of the figure", "copy");
    every.type = "button";
    area.setAttribute("role", "status");
    box.insertAdjacentElement("afterend", area);
    area.insertAdjacentElement("beforebegin", every);
    s.classList.add("brushed");
    function list(test, most) {
      var hit = rows.filter(test), t = make("table", "", "sortable"), w = make("div", "", "scroll");
      area.textContent = "";
      if (!hit.length) { area.appendChild(make("p", "No reflection under the frame.", "note")); return; }
      t.createCaption().textContent = hit.length + " reflections" + (hit.length > most ? ", the " + most + " most changed" : "");
      var head = t.createTHead().insertRow();
      ["h", "k", "l", "d (\u00c5)", "strength", "thin \u2212 thick", "z"].forEach(function (n) { var th = make("th", n, "number"); th.scope = "col"; head.appendChild(th); });
      var body = t.createTBody();
      hit.slice(0, most).forEach(function (r) {
        var tr = body.insertRow();
        r.slice(2).forEach(function (v) { var td = tr.insertCell(); td.className = "number"; td.textContent = String(v).replace("-", "\u2212"); });
      });
      w.tabIndex = 0;
      w.setAttribute("role", "region");
      w.setAttribute("aria-label", "Reflections under the frame");
      w.appendChild(t);
      area.appendChild(w);
      equip(t);
    }
    every.addEventListener("click", function () { list(function () { return true; }, rows.length); });
    s.addEventListener("pointerdown", function (e) { from = place(s, e); panel.busy = true; s.setPointerCapture(e.pointerId); e.preventDefault(); });
    s.addEventListener("pointermove", function (e) {
      if (!from) return;
      var p = place(s, e);
      rect.setAttribute("x", Math.min(p.x, from.x));
      rect.setAttribute("y", Math.min(p.y, from.y));
      rect.setAttribute("width", Math.abs(p.x - from.x));
      rect.setAttribute("height", Math.abs(p.y - from.y));
    });
    s.addEventListener("pointerup", function (e) {
      if (!from) return;
      var p = place(s, e), a = from;
      from = null;
      panel.busy = false;
      if (Math.abs(p.x - a.x) + Math.abs(p.y - a.y) < 6) { rect.setAttribute("width", 0); area.textContent = ""; return; }
      list(function (r) { return (r[0] - a.x) * (r[0] - p.x) <= 0 && (r[1] - a.y) * (r[1] - p.y) <= 0; }, 40);
    });
    s.addEventListener("pointercancel", function () { from = null; panel.busy = false; });
  }
})();
