"use strict";
(async () => {
const $ = (s, e) => (e || document).querySelector(s);
const $$ = (s, e) => [...(e || document).querySelectorAll(s)];
const page = JSON.parse($("#page-data").textContent);

// ---- unpacking -----------------------------------------------------------

async function unpack(id) {
  const text = atob($("#" + id).textContent.trim());
  const bytes = new Uint8Array(text.length);
  for (let i = 0; i < text.length; i++) bytes[i] = text.charCodeAt(i);
  const stream = new Blob([bytes]).stream().pipeThrough(new DecompressionStream("gzip"));
  return new Uint8Array(await new Response(stream).arrayBuffer());
}

const n = page.rows;
const columns = new Map();
const sets = [];

function decode(bytes) {
  let at = 0;
  const words = (size) => {
    const out = new Uint8Array(n * size);
    for (let p = 0; p < size; p++) for (let j = 0; j < n; j++) out[j * size + p] = bytes[at++];
    return out.buffer;
  };
  page.columns.forEach((c, i) => {
    if (i === 0) {
      columns.set(c.name, { ...c, values: new Float64Array(words(8)) });
      return;
    }
    const u = new Uint32Array(words(4));
    let last = 0;
    for (let j = 0; j < n; j++) {
      last = (last + ((u[j] >>> 1) ^ -(u[j] & 1))) | 0;
      u[j] = last;
    }
    columns.set(c.name, { ...c, values: new Float32Array(u.buffer) });
  });
  for (let k = 0; k < page.curves; k++) {
    const set = [];
    for (let j = 0; j < n; j++) if ((bytes[at + (j >> 3)] >> (j & 7)) & 1) set.push(j);
    at += (n + 7) >> 3;
    sets.push(set);
  }
}

// ---- numbers -------------------------------------------------------------

const raised = { "-": "⁻", 0: "⁰", 1: "¹", 2: "²", 3: "³", 4: "⁴", 5: "⁵", 6: "⁶", 7: "⁷", 8: "⁸", 9: "⁹" };
const power = (e) => "10" + [...String(e)].map((c) => raised[c]).join("");
const minus = (s) => s.replace("-", "−");

function show(v, digits) {
  if (!Number.isFinite(v)) return "–";
  if (v === 0) return "0";
  const r = Number(v.toPrecision(digits));
  const e = Math.floor(Math.log10(Math.abs(r)) + 1e-12);
  if (e < -3 || e >= 6) {
    const [m, x] = v.toExponential(digits - 1).split("e");
    return minus(String(Number(m))) + " × " + power(Number(x));
  }
  return minus(String(Number(v.toFixed(Math.max(digits - 1 - e, 0)))));
}

// A value with its unit; a small pressure in ppm, as in the captions.
function quantity(v, unit) {
  if (unit === "bar" && Math.abs(v) < 0.01) return show(v * 1e6, 4) + " ppm";
  return Number.isFinite(v) ? show(v, 4) + (unit ? " " + unit : "") : "–";
}

// The fewest digits that name the number in the precision it travels in.
function exact(v, single) {
  if (!Number.isFinite(v)) return "";
  if (!single) return String(Number(v.toPrecision(14)) || 0);
  let s = v;
  for (let p = 6; p < 10; p++) if (Math.fround((s = Number(v.toPrecision(p)))) === v) break;
  return String(s || 0);
}

// ---- state of the page ---------------------------------------------------

const time = () => columns.get(page.columns[0].name).values;
const dark = matchMedia("(prefers-color-scheme: dark)");
const view = { from: 0, to: 1, clock: "age", cursor: -1, hidden: new Set() };
const shift = () => (view.clock === "before" ? page.present : 0);

function bisect(x, t) {
  let lo = 0, hi = x.length;
  while (lo < hi) {
    const mid = (lo + hi) >> 1;
    if (x[mid] < t) lo = mid + 1; else hi = mid;
  }
  return lo;
}

function nearest(t) {
  const x = time();
  let i = bisect(x, t);
  if (i === n || (i > 0 && t - x[i - 1] < x[i] - t)) i--;
  return i;
}

const isWhole = () => view.from === time()[0] && view.to === time()[n - 1];

// The rows to draw: the thinned ones, or every row once the window is narrow.
function rowsOf(curve) {
  const set = sets[curve.index];
  if (isWhole()) return set;
  const x = time();
  const a = Math.max(bisect(x, view.from) - 1, 0), b = Math.min(bisect(x, view.to) + 1, n);
  if (b - a <= 2500) return Array.from({ length: b - a }, (_, i) => a + i);
  return set.filter((j) => j >= a && j < b);
}

// Lower and upper edge of a filled curve at a row.
function edges(panel, curve) {
  const v = columns.get(curve.column).values;
  if (curve.kind === "band") {
    const u = columns.get(curve.upper).values;
    return (j) => [v[j], u[j]];
  }
  const sign = curve.kind === "sink" ? -1 : 1;
  const below = [];
  for (const c of panel.curves) {
    if (c === curve) break;
    if (c.kind === curve.kind && !view.hidden.has(c.index)) below.push(columns.get(c.column).values);
  }
  return (j) => {
    let base = 0;
    for (const b of below) base += b[j] || 0;
    return [sign * base, sign * (base + v[j])];
  };
}

function niceStep(span, count) {
  const raw = span / count, p = 10 ** Math.floor(Math.log10(raw));
  for (const m of [1, 2, 2.5, 5]) if (raw <= m * p * 1.0001) return m * p;
  return 10 * p;
}

// The range of a panel's axis over the rows in view, so that a limit worth
// seeing stays in it and a zoom uses the whole height.
function range(panel, few) {
  let lo = Infinity, hi = -Infinity;
  const take = (v) => {
    if (!Number.isFinite(v) || (panel.log && v <= 0)) return;
    if (v < lo) lo = v;
    if (v > hi) hi = v;
  };
  for (const c of panel.curves) {
    if (view.hidden.has(c.index)) continue;
    const rows = rowsOf(c);
    if (c.kind) {
      const e = edges(panel, c);
      for (const j of rows) e(j).forEach(take);
    } else {
      const v = columns.get(c.column).values;
      for (const j of rows) take(v[j]);
    }
  }
  const cut = panel.trim && !panel.log ? trimmed(panel) : null;
  if (cut && hi - lo > 2.5 * (cut.hi - cut.lo)) {
    if (hi > cut.hi) cut.over = hi;
    if (lo < cut.lo) cut.under = lo;
    [lo, hi] = [cut.lo, cut.hi];
  }
  if (lo > hi) return panel.log ? { min: 0.1, max: 10, ticks: [0.1, 1, 10] } : { min: 0, max: 1, ticks: [0, 0.5, 1] };
  const least = lo, most = hi;
  for (const { value: l } of panel.limits) {
    if (panel.log) {
      const room = isWhole() ? 4 : 0.5;
      if (l > lo * 10 ** -room && l < hi * 10 ** room) take(l);
    } else {
      const room = (isWhole() ? 3 : 0.5) * (hi - lo || Math.abs(hi) || 1);
      if (l > lo - room && l < hi + room) take(l);
    }
  }
  if (panel.log) {
    if (panel.decades) lo = Math.max(lo, hi / 10 ** panel.decades);
    if (hi < 6 * lo) { // less than a decade: round values instead of powers of ten
      if (hi < 1.02 * lo) [lo, hi] = [lo * 0.98, hi * 1.02];
      const step = niceStep(hi - lo, few ? 3 : 4), half = step / 2;
      let min = Math.floor(lo / half + 1e-6) * half, max = Math.ceil(hi / half - 1e-6) * half;
      if (min <= 0) min = lo * 0.9;
      return { min, max, ticks: ticksIn(min, max, step) };
    }
    let a = Math.floor(Math.log10(lo) + 1e-6), b = Math.ceil(Math.log10(hi) - 1e-6);
    if (a >= b) b = a + 1;
    const step = Math.max(1, Math.ceil((b - a) / (few ? 4 : 6)));
    const ticks = [];
    for (let e = Math.ceil(a / step) * step; e <= b; e += step) ticks.push(10 ** e);
    return { min: 10 ** a, max: 10 ** b, ticks };
  }
  if (hi === lo) {
    const pad = Math.abs(hi) * 0.05 || 1;
    lo -= pad;
    hi += pad;
  }
  const step = niceStep(hi - lo, few ? 3 : 4);
  const half = step / 2;
  let min = Math.floor(lo / half + 1e-6) * half, max = Math.ceil(hi / half - 1e-6) * half;
  // A curve that runs along the frame is hard to see.
  if (least - min < 0.02 * (max - min) && Math.abs(min) > half) min -= half;
  if (max - most < 0.02 * (max - min) && Math.abs(max) > half) max += half;
  return { min, max, ticks: ticksIn(min, max, step), cut };
}

// The range that holds a panel's values for all but a four-hundredth of the
// time in view, so that one short spike does not flatten the rest; the figure
// then says how far the spike goes.
function trimmed(panel) {
  const x = time(), values = [];
  let total = 0;
  for (const c of panel.curves) {
    if (view.hidden.has(c.index)) continue;
    const v = columns.get(c.column).values, e = c.kind ? edges(panel, c) : (j) => [v[j]];
    for (let j = Math.max(bisect(x, view.from), 1); j < n && x[j] <= view.to; j++) {
      const w = x[j] - x[j - 1];
      for (const y of e(j)) if (Number.isFinite(y)) values.push([y, w]);
      total += w * (c.kind ? 2 : 1);
    }
  }
  if (!values.length) return null;
  values.sort((a, b) => a[0] - b[0]);
  const spare = total / 400 / Math.max(panel.curves.length, 1);
  const edge = (list) => {
    let w = 0;
    for (const [y, d] of list) if ((w += d) > spare) return y;
    return list[list.length - 1][0];
  };
  return { lo: edge(values), hi: edge(values.slice().reverse()) };
}

function ticksIn(min, max, step) {
  const out = [];
  for (let k = Math.ceil(min / step - 1e-6); k * step <= max + 1e-6 * step; k++) out.push(Number((k * step).toPrecision(12)));
  return out;
}

// ---- what the options may name -------------------------------------------

const formatters = {
  "@number": (v) => show(v, 6),
  "@size": (v) => show(Math.abs(v), 6),
  "@power": (v) => {
    const e = Math.log10(v);
    return Math.abs(e - Math.round(e)) < 1e-6 && (e > 3.5 || e < -2.5) ? power(Math.round(e)) : show(v, 6);
  },
  "@time": (v) => {
    if (view.clock === "age") return show(v, 6);
    return Math.abs(v) < 1e-12 ? "0" : v < 0 ? show(-v, 6) : "+" + show(v, 6);
  },
};
const names = {
  "@clock": () => (view.clock === "age" ? "Age of the star, Gyr" : "Gyr before (+ after) " + show(page.present, 4) + " Gyr"),
};

const textOn = (role, tone) => (role === "state.runaway" ? tone("@paper-light") : tone("@ink-light"));
const clip = (s, k) => (s.length > k ? s.slice(0, k - 1) + "…" : s);
const font = "ui-sans-serif, system-ui, 'Segoe UI', Roboto, 'Helvetica Neue', 'Noto Sans', 'Liberation Sans', Arial, sans-serif";
const pen = document.createElement("canvas").getContext("2d");
function widthOf(text, size) {
  pen.font = size + "px " + font;
  return pen.measureText(text).width;
}

// Finds places for the labels of marks in four rows over the band: no label
// on another, no leader through a label; a number alone where the words do not
// fit. A short search finds the best it can.
function arrange(marks, left, right) {
  let best = null, bestCost = Infinity, nodes = 0;
  const placed = [];
  const fits = (c) => placed.every((q) => {
    if (q.row === c.row && c.a < q.a + q.w + 8 && c.a + c.w + 8 > q.a) return false;
    if (q.row >= c.row && q.x > c.a - 3 && q.x < c.a + c.w + 3) return false;
    return !(c.row >= q.row && c.x > q.a - 3 && c.x < q.a + q.w + 3);
  });
  const search = (k, cost) => {
    if (cost >= bestCost || nodes++ > 4000) return;
    if (k === marks.length) {
      best = placed.slice();
      bestCost = cost;
      return;
    }
    const m = marks[k];
    for (const words of m.text === m.number ? [m.number] : [m.text, m.number]) {
      const w = widthOf(words, 11);
      for (let row = 0; row < 4; row++) for (const a of words === m.number ? [m.x - w / 2] : [m.x - 3, m.x - w + 3]) {
        const c = { x: m.x, a, w, row, words };
        if (a < left || a + w > right || !fits(c)) continue;
        placed.push(c);
        search(k + 1, cost + (words === m.text ? 0 : 1) + row * 0.01);
        placed.pop();
      }
    }
    search(k + 1, cost + 3);
  };
  search(0, 0);
  return best || [];
}

function drawers(fig, tone, areas, cuts, narrow, isDark) {
  const box = (params) => params.coordSys;
  const spans = (api, c) => {
    const out = [];
    for (const e of page.episodes) {
      if (e.to <= view.from || e.from >= view.to) continue;
      const a = api.coord([Math.max(e.from, view.from) - shift(), 0])[0];
      const b = api.coord([Math.min(e.to, view.to) - shift(), 0])[0];
      out.push({ e, a, b, y: c.y, h: c.height });
    }
    return out;
  };
  const outcome = (api, c, top) => {
    if (page.outcome === null || page.outcome < view.from || page.outcome > view.to) return [];
    const x = api.coord([page.outcome - shift(), 0])[0];
    return [{ type: "line", shape: { x1: x, x2: x, y1: top, y2: c.y + c.height }, style: { stroke: tone("@alarm"), lineWidth: 1.2, lineDash: [2, 2] } }];
  };
  // Without this, ECharts keeps the old shapes where there are no new ones.
  const drawn = (children) => ({ type: "group", $mergeChildren: false, children });
  // Where along a limit its words are farthest from the curves.
  const roomiest = (api, c, panel, w, y) => {
    let best = c.x + 4, most = -1;
    for (const x of [c.x + 4, c.x + (c.width - w) / 2, c.x + c.width - w - 4]) {
      let room = 24;
      for (const k of panel.curves) {
        if (k.kind || view.hidden.has(k.index)) continue;
        const v = columns.get(k.column).values;
        for (const j of rowsOf(k)) {
          if (!Number.isFinite(v[j]) || (panel.log && v[j] <= 0)) continue;
          const [px, py] = api.coord([time()[j] - shift(), v[j]]);
          if (px > x - 6 && px < x + w + 6) room = Math.min(room, Math.abs(py - y));
        }
      }
      if (room > most + 1) [best, most] = [x, room];
    }
    return best;
  };
  return {
    "@shade": (params, api) => {
      const c = box(params);
      const children = spans(api, c).filter((s) => s.e.role !== "state.temperate").map((s) => ({
        type: "rect", shape: { x: s.a, y: s.y, width: Math.max(s.b - s.a, 0.5), height: s.h }, style: { fill: tone("@" + s.e.role), opacity: s.e.role !== "state.snowball" ? 0.24 : isDark ? 0.2 : 0.4 },
      }));
      return drawn(children);
    },
    "@limits": (params, api) => {
      const c = box(params), panel = fig.panels[Number(params.seriesId.slice(6))], children = outcome(api, c, c.y);
      const cut = cuts[Number(params.seriesId.slice(6))], unit = panel.unit ? " " + panel.unit : "";
      const beyond = (text, y, align) => children.push({ type: "text", style: { x: c.x + c.width - 4, y, text, align: "right", verticalAlign: align, fontSize: 11, fontFamily: font, fill: tone("@alarm"), stroke: tone("@panel"), lineWidth: 3 } });
      if (cut && cut.over !== undefined) beyond("▲ a spike goes on to " + show(cut.over, 3) + unit, c.y + 3, "top");
      if (cut && cut.under !== undefined) beyond("▼ a spike goes on to " + show(panel.mirror ? -cut.under : cut.under, 3) + unit, c.y + c.height - 3, "bottom");
      for (const l of panel.limits) {
        const y = api.coord([view.from - shift(), l.value])[1];
        if (y < c.y - 0.5 || y > c.y + c.height + 0.5) continue;
        children.push({ type: "line", shape: { x1: c.x, x2: c.x + c.width, y1: y, y2: y }, style: { stroke: tone("@quiet"), lineWidth: 1, lineDash: l.words ? [5, 3] : null } });
        if (!l.words) continue;
        const w = widthOf(l.words, 11), base = y > c.y + 16 ? y - 3 : y + 15;
        const x = roomiest(api, c, panel, w, base - 7);
        children.push({ type: "text", style: { x, y: base, text: l.words, fontSize: 11, fontFamily: font, fill: tone("@quiet"), stroke: tone("@panel"), lineWidth: 3, verticalAlign: "bottom" } });
      }
      return drawn(children);
    },
    "@area": (params, api) => {
      const area = areas.get(params.seriesId);
      const children = [];
      let lower = [], upper = [];
      const close = () => {
        const rim = upper.slice();
        if (upper.length > 1) children.push({ type: "polygon", shape: { points: upper.concat(lower.reverse()) }, style: { fill: area.fill, opacity: area.opacity } });
        if (rim.length > 1 && area.rim) children.push({ type: "polyline", shape: { points: rim }, style: { fill: "none", stroke: tone("@quiet"), lineWidth: 0.6, opacity: 0.6 } });
        lower = [];
        upper = [];
      };
      for (const [x, a, b] of area.points) {
        if (!Number.isFinite(a) || !Number.isFinite(b)) { close(); continue; }
        lower.push(api.coord([x, a]));
        upper.push(api.coord([x, b]));
      }
      close();
      return drawn(children);
    },
    "@rail": (params, api) => {
      const c = box(params), band = 18, y = c.y + c.height - band;
      const children = [];
      for (const s of spans(api, c)) {
        children.push({ type: "rect", shape: { x: s.a, y, width: Math.max(s.b - s.a, 0.7), height: band }, style: { fill: tone("@" + s.e.role) } });
        if (widthOf(s.e.name, 11) + 12 < s.b - s.a) {
          children.push({ type: "text", silent: true, style: { x: (s.a + s.b) / 2, y: y + band / 2 + 0.5, text: s.e.name, align: "center", verticalAlign: "middle", fontSize: 11, fontFamily: font, fill: textOn(s.e.role, tone) } });
        }
      }
      const labelled = [];
      for (const m of page.marks) {
        if (m.time < view.from || m.time > view.to) continue;
        const x = api.coord([m.time - shift(), 0])[0];
        children.push({ type: "line", shape: { x1: x, x2: x, y1: y - (m.number ? 4 : 2), y2: y }, style: { stroke: tone("@ink"), lineWidth: 1 } });
        if (m.number) labelled.push({ x, number: m.number, text: narrow ? m.number : clip(m.number + " " + m.name, 48) });
      }
      for (const l of arrange(labelled, c.x - 8, c.x + c.width + 8)) {
        const ty = y - 7 - l.row * 15;
        children.push({ type: "line", shape: { x1: l.x, x2: l.x, y1: ty + 1, y2: y }, style: { stroke: tone("@quiet"), lineWidth: 0.7 } });
        children.push({ type: "text", style: { x: l.a, y: ty, text: l.words, fontSize: 11, fontFamily: font, fill: tone("@ink"), verticalAlign: "bottom" } });
      }
      return drawn(children);
    },
  };
}

// ---- options -------------------------------------------------------------

function toneOf(isDark) {
  return (name) => {
    if (name.endsWith("-light")) return page.palette[name.slice(0, -6)][0];
    return page.palette[name][isDark ? 1 : 0];
  };
}

// Replaces the names in an option of the kit; only under these keys.
function resolve(o, tone, draw) {
  for (const k of Object.keys(o)) {
    const v = o[k];
    if (v && typeof v === "object") resolve(v, tone, draw);
    else if (typeof v !== "string" || v[0] !== "@") continue;
    else if (k === "color") o[k] = tone(v);
    else if (k === "formatter") o[k] = formatters[v];
    else if (k === "renderItem") o[k] = draw[v];
    else if (k === "name" && names[v]) o[k] = names[v]();
  }
  return o;
}

function optionOf(fig, width, isDark, extra) {
  const tone = toneOf(isDark), narrow = width < 560, areas = new Map(), cuts = [];
  const drawing = drawers(fig, tone, areas, cuts, narrow, isDark);
  const o = resolve(structuredClone(fig.option), tone, drawing);
  const top = extra ? extra.top : 0;
  o.animation = false;
  o.textStyle = { fontFamily: font, color: tone("@ink") };
  o.grid = [].concat(o.grid);
  o.grid.forEach((g) => {
    g.outerBoundsMode = "none"; // the kit reserves the room itself, so that all time axes align
    g.left = (narrow ? 52 : 64) + (extra ? extra.left : 0);
    g.right = narrow ? 12 : 18;
    g.top = Number(g.top) + top;
    g.height = Number(g.height);
  });
  const x = time(), s = shift();
  const step = niceStep(view.to - view.from, narrow ? 5 : 9);
  o.xAxis.forEach((a, i) => {
    const last = i === o.xAxis.length - 1;
    a.min = view.from - s;
    a.max = view.to - s;
    const ticks = ticksIn(view.from - s, view.to - s, step);
    a.axisLine = { show: !fig.panels[i].rail, onZero: false, lineStyle: { color: tone("@quiet") } };
    a.axisTick = { show: last, customValues: ticks, lineStyle: { color: tone("@quiet") } };
    a.splitLine = { show: !fig.panels[i].rail, lineStyle: { color: tone("@rule"), opacity: 0.7 } };
    a.axisLabel = { ...a.axisLabel, color: tone("@quiet"), fontSize: 12, customValues: ticks, hideOverlap: true, showMinLabel: true, showMaxLabel: true };
    a.nameTextStyle = { color: tone("@quiet"), fontSize: 12 };
  });
  o.yAxis.forEach((a, i) => {
    if (fig.panels[i].rail) {
      a.min = 0;
      a.max = 1;
      return;
    }
    const r = range(fig.panels[i], o.grid[i].height < 125);
    cuts[i] = r.cut;
    a.min = r.min;
    a.max = r.max;
    a.axisLine = { show: false, onZero: false };
    a.axisTick = { show: false, customValues: r.ticks };
    a.splitLine = { lineStyle: { color: tone("@rule") } };
    a.axisLabel = { ...a.axisLabel, color: tone("@quiet"), fontSize: 12, customValues: r.ticks, hideOverlap: true, showMinLabel: true, showMaxLabel: true };
    a.nameTextStyle = { color: tone("@ink"), fontSize: 12.5, fontWeight: 600, align: "left", padding: [0, 0, 0, -(narrow ? 50 : 60)] };
  });
  const byId = new Map();
  fig.panels.forEach((p) => p.curves.forEach((c) => byId.set(c.id, [p, c])));
  o.series = o.series.filter((r) => !byId.has(r.id) || !view.hidden.has(byId.get(r.id)[1].index));
  for (const r of o.series) {
    r.silent = true;
    r.clip = r.renderItem !== drawing["@rail"];
    r.animation = false;
    if (!byId.has(r.id)) {
      const axis = o.yAxis[r.yAxisIndex || 0];
      r.data = [[view.from - s, axis.min]];
      r.z = r.id.startsWith("limits") ? 5 : 1;
      continue;
    }
    const [panel, curve] = byId.get(r.id);
    const rows = rowsOf(curve);
    if (curve.kind) {
      const e = edges(panel, curve);
      areas.set(r.id, { fill: r.itemStyle.color, opacity: curve.kind === "band" ? 1 : 0.92, rim: curve.kind !== "band", points: rows.map((j) => [x[j] - s, ...e(j)]) });
      r.data = [[view.from - s, o.yAxis[r.yAxisIndex || 0].min]];
      r.z = 2;
    } else {
      const v = columns.get(curve.column).values;
      r.data = rows.map((j) => [x[j] - s, Number.isFinite(v[j]) && (!panel.log || v[j] > 0) ? v[j] : null]);
      r.symbol = "none";
      r.z = 4;
    }
  }
  return o;
}

// ---- figures on the page -------------------------------------------------

const figures = [];

function draw(fig, width, isDark) {
  const o = optionOf(fig, width, isDark);
  fig.chart.setOption(o, { notMerge: true });
  // What is shown, for those who look at the page with a script.
  const el = fig.chart.getDom();
  el.dataset.span = JSON.stringify([o.xAxis[0].min, o.xAxis[0].max]);
  el.dataset.rows = Math.max(...o.series.map((r) => r.data.length));
}

// A panel can change between a linear and a logarithmic axis unless it is a
// stack, which a logarithm would falsify, or holds what has no logarithm.
function scalable(panel) {
  if (panel.rail || panel.mirror || panel.curves.some((c) => c.kind)) return false;
  if (panel.log) return true;
  let some = false;
  for (const c of panel.curves) for (const v of columns.get(c.column).values) {
    if (!Number.isFinite(v)) continue;
    if (v <= 0) return false;
    some = true;
  }
  return some;
}

function scale(fig, i, log) {
  const axis = [].concat(fig.option.yAxis)[i];
  fig.panels[i].log = log;
  axis.type = log ? "log" : "value";
  axis.axisLabel.formatter = log ? "@power" : "@number";
  redraw();
}

function el(tag, attributes, ...children) {
  const e = document.createElement(tag);
  for (const [k, v] of Object.entries(attributes)) e.setAttribute(k, v);
  e.append(...children);
  return e;
}

function scales(fig) {
  const group = el("div", { class: "scales", role: "group", "aria-label": "Logarithmic axes: " + fig.title }, el("span", {}, "Logarithmic:"));
  fig.panels.forEach((p, i) => {
    if (!scalable(p)) return;
    const box = el("input", { type: "checkbox", "data-scale": i, autocomplete: "off" });
    box.checked = p.log;
    box.addEventListener("change", () => scale(fig, i, box.checked));
    group.append(el("label", {}, box, " " + [].concat(fig.option.yAxis)[i].name));
  });
  if (group.children.length > 1) $(".stage", fig.el).before(group);
}

const paper = 700; // px, the width of a chart on A4 or Letter
let printing = false;
function drawAll() {
  for (const f of figures) draw(f, f.stage.clientWidth, !printing && dark.matches);
  placeCursor();
}

let asked = 0;
function redraw() {
  if (asked) return;
  asked = requestAnimationFrame(() => { asked = 0; drawAll(); });
}

function zoom(from, to) {
  const x = time(), least = Math.max((x[n - 1] - x[0]) * 1e-9, 1e-12);
  if (!Number.isFinite(from) || !Number.isFinite(to)) return;
  if (from > to) [from, to] = [to, from];
  from = Math.max(from, x[0]);
  to = Math.min(to, x[n - 1]);
  if (to - from < least) return;
  view.from = from;
  view.to = to;
  const at = time()[view.cursor];
  if (!(at >= from && at <= to)) setCursor(nearest((from + to) / 2));
  readout();
  redraw();
}

function readout() {
  const out = (t) => Number((view.clock === "age" ? t : page.present - t).toPrecision(6));
  $("#from").value = out(view.from);
  $("#to").value = out(view.to);
  $("#clock-unit").textContent = view.clock === "age" ? "Gyr" : "Gyr before";
}

function words(t) {
  if (view.clock === "age" || page.present === null) return show(t, 6) + " Gyr";
  const d = page.present - t, a = Math.abs(d);
  return (a < 0.01 ? show(a * 1e3, 4) + " Myr" : show(a, 5) + " Gyr") + (d >= 0 ? " before" : " after");
}

const units = new Map();
function setCursor(row) {
  view.cursor = row;
  const t = time()[row];
  $("#cursor").value = row;
  $("#cursor").setAttribute("aria-valuetext", words(t));
  $("#now").value = "at " + words(t);
  for (const el of $$("[data-value]")) {
    const u = units.get(Number(el.dataset.value));
    el.textContent = u ? u(row) : "";
  }
  placeCursor();
}

function placeCursor() {
  for (const f of figures) {
    const hair = $(".hair", f.stage), t = view.cursor < 0 ? NaN : time()[view.cursor];
    hair.hidden = printing || !(t >= view.from && t <= view.to);
    if (hair.hidden) continue;
    hair.style.left = f.chart.convertToPixel({ xAxisIndex: 0 }, t - shift()) + "px";
    hair.style.top = "0px";
    hair.style.height = f.height - 46 + "px";
  }
}

function pointing(f) {
  const timeAt = (ev) => {
    const r = f.stage.getBoundingClientRect();
    const t = f.chart.convertFromPixel({ xAxisIndex: 0 }, ev.clientX - r.left) + shift();
    return Math.min(Math.max(t, view.from), view.to);
  };
  const brush = $(".brush", f.stage);
  let start = null;
  f.stage.addEventListener("pointerdown", (ev) => {
    if (ev.button !== 0) return;
    if (ev.pointerType === "mouse") start = { x: ev.clientX, t: timeAt(ev) };
    setCursor(nearest(timeAt(ev)));
  });
  f.stage.addEventListener("pointermove", (ev) => {
    setCursor(nearest(timeAt(ev)));
    if (!start || Math.abs(ev.clientX - start.x) < 6) return;
    f.stage.setPointerCapture(ev.pointerId);
    const r = f.stage.getBoundingClientRect();
    const at = (t) => f.chart.convertToPixel({ xAxisIndex: 0 }, t - shift());
    const a = at(Math.min(start.t, timeAt(ev))), b = at(Math.max(start.t, timeAt(ev)));
    brush.hidden = false;
    brush.style.left = a + "px";
    brush.style.width = b - a + "px";
    brush.style.height = f.height - 46 + "px";
  });
  const end = (ev) => {
    if (start && !brush.hidden) zoom(start.t, timeAt(ev));
    start = null;
    brush.hidden = true;
  };
  f.stage.addEventListener("pointerup", end);
  f.stage.addEventListener("pointercancel", () => { start = null; brush.hidden = true; });
  f.stage.addEventListener("dblclick", () => zoom(time()[0], time()[n - 1]));
  f.stage.tabIndex = 0;
  f.stage.setAttribute("role", "group");
  f.stage.setAttribute("aria-label", f.title + ": arrow keys move the cursor, plus and minus zoom, 0 shows the whole history");
  f.stage.addEventListener("keydown", (ev) => {
    if (ev.ctrlKey || ev.altKey || ev.metaKey || ev.target !== f.stage) return;
    const x = time(), span = view.to - view.from, t = x[view.cursor];
    const go = (row) => {
      row = Math.min(Math.max(row, 0), n - 1);
      const to = x[row];
      view.cursor = row;
      if (to < view.from || to > view.to) zoom(to - span / 2, to + span / 2);
      setCursor(row);
    };
    switch (ev.key) {
      case "ArrowLeft": go(view.cursor - (ev.shiftKey ? 10 : 1)); break;
      case "ArrowRight": go(view.cursor + (ev.shiftKey ? 10 : 1)); break;
      case "Home": go(bisect(x, view.from)); break;
      case "End": go(nearest(view.to)); break;
      case "+": case "=": zoom(t - span / 4, t + span / 4); break;
      case "-": zoom(t - span, t + span); break;
      case "0": zoom(x[0], x[n - 1]); break;
      default: return;
    }
    ev.preventDefault();
  });
}

// ---- saving --------------------------------------------------------------

function save(name, blob) {
  const a = document.createElement("a");
  const url = URL.createObjectURL(blob);
  a.href = url;
  a.download = name;
  a.click();
  setTimeout(() => URL.revokeObjectURL(url), 10000);
}

function csv(cols) {
  const lines = [cols.map((c) => c.header).join(",")];
  for (let j = 0; j < n; j++) lines.push(cols.map((c, i) => exact(c.values[j], i > 0)).join(","));
  return lines.join("\n") + "\n";
}

function columnsOf(fig) {
  const cols = new Set([columns.get(page.columns[0].name)]);
  for (const p of fig.panels) for (const c of p.curves) {
    cols.add(columns.get(c.column));
    if (c.upper) cols.add(columns.get(c.upper));
  }
  return [...cols];
}

// A figure at print size, with title, key and the name of the result.
const exportWidth = 900;
function exported(fig) {
  const keys = fig.panels.flatMap((p) => p.curves).filter((c) => !view.hidden.has(c.index));
  const rows = Math.ceil(keys.reduce((w, c) => w + widthOf(c.name, 12) + 46, 0) / (exportWidth - 80));
  const top = 46, foot = 22 * rows + 24, height = fig.height + top + foot;
  const o = optionOf(fig, exportWidth, false, { top, left: 12 });
  const tone = toneOf(false);
  o.backgroundColor = tone("@panel");
  o.title = [
    { text: fig.title, left: 11, top: 8, textStyle: { fontSize: 17, fontWeight: 600, color: tone("@ink"), fontFamily: font } },
    { text: page.label, left: 11, bottom: 6, textStyle: { fontSize: 11, fontWeight: 400, color: tone("@quiet"), fontFamily: font } },
  ];
  o.legend = { show: true, bottom: 28, left: 11, right: 20, itemGap: 14, itemWidth: 22, itemHeight: 10, selectedMode: false, data: keys.map((c) => (c.kind ? { name: c.name } : { name: c.name, itemStyle: { opacity: 0 } })), textStyle: { fontSize: 12, color: tone("@ink"), fontFamily: font } };
  return { option: o, height };
}

function svg(fig) {
  const e = exported(fig);
  const chart = echarts.init(null, null, { renderer: "svg", ssr: true, width: exportWidth, height: e.height });
  chart.setOption(e.option);
  const text = chart.renderToSVGString();
  chart.dispose();
  return text;
}

function png(fig) {
  const e = exported(fig);
  const chart = echarts.init(document.createElement("div"), null, { renderer: "canvas", width: exportWidth, height: e.height });
  chart.setOption(e.option);
  const canvas = chart.renderToCanvas({ pixelRatio: 3, backgroundColor: e.option.backgroundColor });
  return new Promise((done) => canvas.toBlob((b) => { chart.dispose(); done(b); }, "image/png"));
}

// A drawing that stands in the page without the script, as a picture of its own:
// styles become attributes in the colours of print, title and key are added.
function drawing(fig) {
  const tone = toneOf(false), inner = $("svg.chart", fig), [, , w, h] = inner.getAttribute("viewBox").split(" ").map(Number);
  const make = (tag, attributes, text) => {
    const e = document.createElementNS("http://www.w3.org/2000/svg", tag);
    for (const [k, v] of Object.entries(attributes)) e.setAttribute(k, v);
    if (text !== undefined) e.textContent = text;
    return e;
  };
  const plain = (e) => {
    const out = e.cloneNode(true);
    for (const x of [out, ...$$("*", out)]) {
      const set = (o) => { for (const [k, v] of Object.entries(o)) x.setAttribute(k, v); };
      const has = (c) => x.classList.contains(c);
      const role = [...x.classList].find((c) => page.palette["@" + c.slice(2).replace("-", ".")] && c.startsWith("c-"));
      if (role) {
        const c = tone("@" + role.slice(2).replace("-", "."));
        set({ fill: c, stroke: c });
      }
      if (has("area")) set({ stroke: "none" });
      if (has("line")) set({ fill: "none", "stroke-linejoin": "round" });
      if (has("frame")) set({ fill: "none", stroke: tone("@quiet") });
      if (has("axis")) set({ stroke: tone("@quiet") });
      if (has("mesh")) set({ stroke: "#1c2529", opacity: 0.62 });
      if (has("meshdot")) set({ fill: "#1c2529", opacity: 0.72 });
      if (has("open")) set({ fill: tone("@panel"), stroke: tone("@ink"), "stroke-width": 2.4 });
      if (x.localName === "text") set({ "font-size": 14, "font-family": font, fill: tone("@quiet"), stroke: "none" });
      if (has("name")) set({ fill: tone("@ink"), "font-weight": 650 });
      if (has("say")) set({ fill: tone("@ink"), stroke: tone("@panel"), "stroke-width": 3, "paint-order": "stroke" });
      for (const a of ["class", "role", "aria-label", "aria-hidden"]) x.removeAttribute(a);
    }
    return out;
  };
  const keys = [];
  let x = 11, y = 0;
  for (const li of $$(".key li", fig)) {
    const name = clip(li.textContent.trim(), 90), wide = 34 + widthOf(name, 12) + 20;
    if (x > 11 && x + wide > w - 11) [x, y] = [11, y + 20];
    keys.push([plain($("svg", li)), name, x, y]);
    x += wide;
  }
  const top = 40, foot = 26, height = top + h + y + 20 + foot;
  const out = make("svg", { width: w, height, viewBox: "0 0 " + w + " " + height, role: "img" });
  out.append(make("title", {}, $("h3", fig).textContent));
  for (const d of $$("svg.unseen > defs")) out.append(plain(d));
  out.append(make("rect", { width: w, height, fill: tone("@panel") }));
  const words = (text, at) => out.append(make("text", { "font-family": font, "font-size": 12, fill: tone("@ink"), ...at }, text));
  words($("h3", fig).textContent, { x: 11, y: 26, "font-size": 17, "font-weight": 600 });
  const body = plain(inner);
  for (const [k, v] of Object.entries({ x: 0, y: top, width: w, height: h })) body.setAttribute(k, v);
  out.append(body);
  for (const [swatch, name, kx, ky] of keys) {
    const at = top + h + ky + 4;
    swatch.setAttribute("x", kx);
    swatch.setAttribute("y", at);
    out.append(swatch);
    words(name, { x: kx + 32, y: at + 10 });
  }
  words(page.label, { x: 11, y: height - 9, "font-size": 11, fill: tone("@quiet") });
  return { text: new XMLSerializer().serializeToString(out), width: w, height };
}

async function raster(d) {
  const image = new Image();
  image.src = "data:image/svg+xml;charset=utf-8," + encodeURIComponent(d.text);
  await image.decode();
  const canvas = el("canvas", { width: d.width * 3, height: d.height * 3 });
  canvas.getContext("2d").drawImage(image, 0, 0, canvas.width, canvas.height);
  return new Promise((done) => canvas.toBlob(done, "image/png"));
}

for (const fig of $$(".figure")) {
  if (!$("svg.chart", fig)) continue;
  const tools = el("div", { class: "tools", role: "group", "aria-label": "Save: " + $("h3", fig).textContent });
  for (const kind of fig.dataset.numbers ? ["svg", "png", "csv"] : ["svg", "png"]) tools.append(el("button", { type: "button", "data-save": kind, "data-drawing": fig.id }, kind.toUpperCase()));
  $(".figure-head", fig).append(tools);
}

document.addEventListener("click", async (ev) => {
  const b = ev.target.closest("button");
  if (!b) return;
  if (b.dataset.curve) {
    const k = Number(b.dataset.curve), on = b.getAttribute("aria-pressed") !== "true";
    b.setAttribute("aria-pressed", on);
    if (on) view.hidden.delete(k); else view.hidden.add(k);
    redraw();
  } else if (b.dataset.save && b.dataset.figure) {
    const f = figures.find((g) => g.id === b.dataset.figure), name = page.file + "-" + f.id + "." + b.dataset.save;
    if (b.dataset.save === "csv") save(name, new Blob([csv(columnsOf(f))], { type: "text/csv" }));
    if (b.dataset.save === "svg") save(name, new Blob([svg(f)], { type: "image/svg+xml" }));
    if (b.dataset.save === "png") save(name, await png(f));
  } else if (b.dataset.drawing) {
    const fig = document.getElementById(b.dataset.drawing), name = page.file + "-" + fig.id + "." + b.dataset.save;
    if (b.dataset.save === "csv") save(name, new Blob([document.getElementById(fig.dataset.numbers).textContent], { type: "text/csv" }));
    if (b.dataset.save === "svg") save(name, new Blob([drawing(fig).text], { type: "image/svg+xml" }));
    if (b.dataset.save === "png") save(name, await raster(drawing(fig)));
  } else if (b.dataset.save === "rows") {
    save(page.file + "-history.csv", new Blob([csv([...columns.values()])], { type: "text/csv" }));
  } else if (b.dataset.save) {
    // An ending alone goes with the name of the page's files.
    const name = (b.dataset.save[0] === "." ? page.file : "") + b.dataset.save;
    save(name, new Blob([$("#" + b.dataset.from).textContent], { type: "text/plain" }));
  } else if (b.dataset.copy) {
    const from = $("#" + b.dataset.copy);
    getSelection().selectAllChildren(from);
    let done = false;
    try { await navigator.clipboard.writeText(from.textContent); done = true; } catch { /* the selection remains */ }
    b.textContent = done ? "Copied" : "Selected";
  }
});

for (const box of $$("[data-filter]")) {
  box.addEventListener("change", () => $("#" + box.dataset.filter).classList.toggle("only-set", box.checked));
}

// ---- start ---------------------------------------------------------------

function failed(err) {
  for (const p of $$(".plot")) p.textContent = "This browser could not draw the figure (" + err.message + "). The caption and the numbers below hold all the same.";
  document.documentElement.dataset.ready = "failed";
}

try {
  if (page.figures.length) {
    const [rows, library] = await Promise.all([unpack("page-rows"), unpack("page-library")]);
    decode(rows);
    const s = document.createElement("script");
    s.textContent = new TextDecoder().decode(library);
    document.head.append(s);

    view.from = time()[0];
    view.to = time()[n - 1];
    for (const spec of page.figures) {
      const place = document.getElementById(spec.id), stage = $(".stage", place);
      const chart = echarts.init($(".plot", stage), null, { renderer: "svg" });
      figures.push({ ...spec, el: place, stage, chart });
      for (const p of spec.panels) for (const c of p.curves) {
        const v = columns.get(c.column).values, u = c.upper ? columns.get(c.upper).values : null;
        units.set(c.index, (j) => (u ? show(v[j], 4) + " to " + show(u[j], 4) + " " + c.unit : quantity(v[j], c.unit)).trim());
      }
    }
    for (const f of figures) {
      scales(f);
      pointing(f);
    }
    $("#clock").hidden = false;
    $("#cursor").max = n - 1;
    $("#cursor").addEventListener("input", (ev) => setCursor(Number(ev.target.value)));
    const typed = () => {
      const of = (id) => (view.clock === "age" ? Number($(id).value) : page.present - Number($(id).value));
      zoom(of("#from"), of("#to"));
    };
    $("#from").addEventListener("change", typed);
    $("#to").addEventListener("change", typed);
    $("#whole").addEventListener("click", () => zoom(time()[0], time()[n - 1]));
    $("#clock").addEventListener("submit", (ev) => ev.preventDefault());
    for (const r of $$("[name=clock]")) r.addEventListener("change", () => {
      view.clock = r.value;
      readout();
      redraw();
      setCursor(view.cursor);
    });
    readout();
    drawAll();
    setCursor(page.present === null ? n - 1 : nearest(page.present));

    new ResizeObserver(() => {
      if (printing || $(".stage").clientWidth < 120) return; // hidden, or on its way to another size
      for (const f of figures) if (f.chart.getWidth() !== f.stage.clientWidth) f.chart.resize({ width: "auto", height: "auto" });
      redraw();
    }).observe($(".stage"));
    dark.addEventListener("change", redraw);
    addEventListener("beforeprint", () => {
      printing = true;
      for (const f of figures) {
        f.chart.resize({ width: paper, height: f.height });
        draw(f, paper, false);
        f.chart.getZr().flush();
      }
      placeCursor();
    });
    addEventListener("afterprint", () => {
      printing = false;
      for (const f of figures) f.chart.resize({ width: "auto", height: "auto" });
      redraw();
    });
  }
  document.documentElement.dataset.ready = Math.round(performance.now());
} catch (err) {
  failed(err);
  throw err;
}
})();
