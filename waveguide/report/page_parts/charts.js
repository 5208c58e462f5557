// Charts as SVG: distance and time, waveforms, bars of windows, budgets, cross-shelf sections.

const SVG = "http://www.w3.org/2000/svg";

function shape(name, attributes, text) {
  const element = document.createElementNS(SVG, name);
  for (const [key, value] of Object.entries(attributes)) element.setAttribute(key, value);
  if (text !== undefined) element.textContent = text;
  return element;
}

// A picture with a description for those who do not see it.
function picture(width, height, description) {
  const svg = shape("svg", { viewBox: `0 0 ${width} ${height}`, role: "img" });
  svg.append(shape("title", {}, description));
  return svg;
}

// About `count` round values between two ends.
function roundValues(low, high, count) {
  const rough = (high - low) / count;
  if (!(rough > 0)) return [low];
  const power = Math.pow(10, Math.floor(Math.log10(rough)));
  const step = power * [1, 2, 5, 10].find((s) => s * power >= rough);
  const values = [];
  for (let v = Math.ceil(low / step) * step; v <= high + 1e-9 * step; v += step) {
    values.push(Math.abs(v) < 1e-9 * step ? 0 : v);
  }
  return values;
}

class Frame {
  constructor(width, height, x, y, names, description) {
    Object.assign(this, { width, height, xs: x, ys: y });
    this.left = 52; this.right = width - 12; this.top = 10; this.bottom = height - 38;
    this.svg = picture(width, height, description);
    this.axes(names);
  }

  x(value) {
    return this.left + (value - this.xs[0]) / (this.xs[1] - this.xs[0]) * (this.right - this.left);
  }

  y(value) {
    return this.bottom - (value - this.ys[0]) / (this.ys[1] - this.ys[0]) * (this.bottom - this.top);
  }

  axes([across, up]) {
    const line = { stroke: "#dfe4e7" };
    for (const v of roundValues(...this.xs, 7)) {
      this.add("line", { x1: this.x(v), x2: this.x(v), y1: this.top, y2: this.bottom, ...line });
      this.add("text", { x: this.x(v), y: this.bottom + 15, "text-anchor": "middle" },
        significant(v, 6));
    }
    for (const v of roundValues(...this.ys, 5)) {
      this.add("line", { x1: this.left, x2: this.right, y1: this.y(v), y2: this.y(v), ...line });
      this.add("text", { x: this.left - 6, y: this.y(v) + 4, "text-anchor": "end" },
        significant(v, 6));
    }
    const middle = (this.top + this.bottom) / 2;
    this.add("text", { x: (this.left + this.right) / 2, y: this.height - 6, "text-anchor": "middle" },
      across);
    this.add("text", { x: 13, y: middle, "text-anchor": "middle",
      transform: `rotate(-90 13 ${middle})` }, up);
  }

  add(name, attributes, text) {
    const element = shape(name, attributes, text);
    this.svg.append(element);
    return element;
  }

  line(xs, ys, attributes) {
    let path = "";
    for (let i = 0; i < xs.length; i++) {
      path += (i ? "L" : "M") + this.x(xs[i]).toFixed(1) + " " + this.y(ys[i]).toFixed(1);
    }
    return this.add("path", { d: path, fill: "none", ...attributes });
  }
}

// How far the front has come at which time, for every mode of a target, and the kinds of legs.
function distanceTime(data, target) {
  const rows = data.targets[target].rows;
  const routes = data.modes.map((_, m) => headline(data, target, m));
  const first = routes.find((route) => route);
  if (!first) return null;
  const far = Math.max(...routes.filter(Boolean).map((r) => r.km[r.km.length - 1]), 1);
  const late = Math.max(...rows.filter((r) => r.plan).map((r) => r.plan.front[2]), 0.1);
  const frame = new Frame(520, 300, [0, far], [0, 1.03 * late],
    ["Distance along the route, km", "Days since the event began"],
    "Distance along the route against time of the front");
  drawLegs(frame, data, first);
  routes.forEach((route, m) => {
    if (!route) return;
    drawSpreadBand(frame, data, route, data.modes[m].colour);
    frame.line(route.km, route.days, { stroke: data.modes[m].colour, "stroke-width": 2.4 });
  });
  frame.now = frame.add("line", { x1: frame.left, x2: frame.right, stroke: "#7b2d5b",
    "stroke-width": 1.5, "stroke-dasharray": "5 3" });
  frame.mark = frame.add("circle", { r: 6, fill: "none", stroke: "#20262b", "stroke-width": 2.5,
    visibility: "hidden" });
  frame.routes = routes;
  return frame;
}

function drawLegs(frame, data, route) {
  let at = 0;
  for (const leg of route.legs) {
    const end = at + leg.vertices;
    const from = frame.x(route.km[at]), until = frame.x(route.km[end - 1]);
    at = end;
    if (leg.kind === "attachment" || until - from < 0.5) continue;
    frame.add("rect", { x: from, y: frame.bottom - 7, width: until - from, height: 7,
      fill: data.kinds[leg.kind] || "#999", stroke: "#fff", "stroke-width": 0.6 })
      .append(shape("title", {}, `${leg.kind}, ${fixed(leg.km, 0)} km, ${fixed(leg.days, 1)} days`));
    if (until - from > 46) {
      frame.add("text", { x: (from + until) / 2, y: frame.bottom - 11, "text-anchor": "middle" },
        leg.kind);
    }
  }
}

function drawSpreadBand(frame, data, route, colour) {
  const every = Math.max(1, Math.floor(route.km.length / 120));
  const points = [];
  for (let i = 0; i < route.km.length; i += every) points.push(i);
  points.push(route.km.length - 1);
  const side = (end) => {
    const spread = new Spread(data, route, end);
    return points.map((i) => frame.x(route.km[i]).toFixed(1) + "," +
      Math.min(frame.y(spread.at(route.days[i])), frame.bottom).toFixed(1));
  };
  const outline = [...side(0), ...side(2).reverse()];
  frame.add("polygon", { points: outline.join(" "), fill: colour, opacity: 0.2 });
}

// Sea level at a target in every mode and in sum, with the windows.
function waveforms(data, target) {
  const rows = data.targets[target].rows;
  if (!rows.some((row) => row.plan)) return null;
  const waves = data.waves.modes[target];
  const sum = data.waves.sum[target];
  const values = [0, ...sum];
  waves.forEach((wave) => values.push(...wave));
  const low = Math.min(...values), high = Math.max(...values, 1e-6);
  const end = Math.min(data.waves.time[data.waves.time.length - 1], data.end);
  const frame = new Frame(520, 300, [0, end], [low - 0.04 * (high - low), high + 0.1 * (high - low)],
    ["Days since the event began", "Ratio to the source"],
    "Waveforms at the target by mode and their sum");
  const until = data.waves.time.findIndex((t) => t > end);
  const count = until < 0 ? data.waves.time.length : until;
  const time = data.waves.time.slice(0, count);
  rows.forEach((row, m) => {
    if (row.plan) drawWindow(frame, row.plan, data.modes[m].colour, m);
  });
  waves.forEach((wave, m) => {
    if (wave.length) frame.line(time, wave, { stroke: data.modes[m].colour, "stroke-width": 2.2 });
  });
  if (data.modes.length > 1 && sum.length) {
    frame.line(time, sum, { stroke: "#20262b", "stroke-width": 1.3, "stroke-dasharray": "6 3" });
  }
  frame.now = frame.add("line", { y1: frame.top, y2: frame.bottom, stroke: "#7b2d5b",
    "stroke-width": 1.5, "stroke-dasharray": "5 3" });
  return frame;
}

function drawWindow(frame, plan, colour, rank) {
  if (plan.look_from === null) return;
  const limit = (value) => Math.min(Math.max(frame.x(value), frame.left), frame.right);
  const from = limit(plan.look_from), until = limit(plan.look_until);
  frame.add("rect", { x: from, y: frame.top, width: until - from,
    height: frame.bottom - frame.top, fill: colour, opacity: 0.12 });
  const y = frame.top + 6 + 6 * rank, middle = limit(plan.half[1]);
  frame.add("line", { x1: from, x2: until, y1: y, y2: y, stroke: colour, "stroke-width": 3 });
  frame.add("line", { x1: middle, x2: middle, y1: y - 4, y2: y + 4, stroke: "#20262b",
    "stroke-width": 2 });
}

// The windows of a target in every mode on the common axis of time.
function windowBars(data, target) {
  const rows = data.targets[target].rows.map((row, m) => [row, m]).filter(([row]) => row.plan);
  const height = 11 * Math.max(rows.length, 1);
  const x = (days) => 320 * Math.min(Math.max(days / data.end, 0), 1);
  const svg = picture(320, height, "When to look");
  rows.forEach(([row, m], rank) => {
    const y = 11 * rank + 2, middle = x(row.plan.half[1]);
    svg.append(
      shape("rect", { x: 0, y: y + 3, width: 320, height: 1.5, fill: "#dfe4e7" }),
      shape("rect", { x: x(row.plan.look_from), y, height: 7, fill: data.modes[m].colour,
        width: Math.max(x(row.plan.look_until) - x(row.plan.look_from), 2), opacity: 0.55 }),
      shape("line", { x1: middle, x2: middle, y1: y - 1, y2: y + 8, stroke: "#20262b",
        "stroke-width": 2 }),
    );
  });
  const now = shape("line", { y1: 0, y2: height, stroke: "#7b2d5b", "stroke-width": 1.5 });
  svg.append(now);
  return { svg, show: (days) => { now.setAttribute("x1", x(days)); now.setAttribute("x2", x(days)); } };
}

// Where the energy goes: for every leg a bar as long as what is left at its start.
function budget(data, route) {
  const legs = route.legs.filter((leg) => leg.kind !== "attachment" && leg.left !== null);
  const row = 19, left = 170, width = 520 - left - 10;
  const svg = picture(520, row * legs.length + 8, "Energy left and lost, leg by leg");
  let before = 1;
  legs.forEach((leg, i) => {
    const y = row * i + 4;
    svg.append(shape("text", { x: left - 8, y: y + 12, "text-anchor": "end" },
      `${leg.kind} ${fixed(leg.km, 0)} km`));
    const parts = [["left at its end", "#56636d", leg.left],
      ...leg.lost.map((share, k) => [data.fates[k].name, data.fates[k].colour, share])];
    let x = left;
    for (const [name, colour, share] of parts) {
      const long = width * Math.max(share || 0, 0);
      const bar = shape("rect", { x, y, width: long, height: row - 5, fill: colour,
        stroke: "#fff", "stroke-width": 0.5 });
      bar.append(shape("title", {}, `${name}: ${fixed(100 * share, 1)} % of the source's energy`));
      svg.append(bar);
      x += long;
    }
    before = leg.left;
    if (x + 44 < 520) {
      svg.append(shape("text", { x: x + 4, y: y + 12 }, `${fixed(100 * before, 0)} %`));
    }
  });
  return svg;
}

// A cross-shelf section with the deformation radius.
function thumbnail(section) {
  const width = 170, height = 70, deep = Math.max(...section.h, 100);
  const far = section.x[section.x.length - 1];
  const svg = picture(width, height + 14, "Cross-shelf section");
  svg.setAttribute("width", 1.2 * width);
  const x = (km) => width * km / far, y = (m) => 4 + (height - 8) * m / deep;
  let path = `M0 ${y(section.h[0])}`;
  section.x.forEach((km, i) => { path += `L${x(km).toFixed(1)} ${y(section.h[i]).toFixed(1)}`; });
  svg.append(
    shape("rect", { width, height, fill: "#eaf1f5" }),
    shape("path", { d: `${path}L${width} ${height}L0 ${height}Z`, fill: "#b9a98c" }),
    shape("line", { x1: x(section.radius), x2: x(section.radius), y1: 0, y2: height,
      stroke: "#7b2d5b", "stroke-dasharray": "3 2" }),
    shape("text", { x: 2, y: height + 12 }, `${fixed(far, 0)} km, ${deep} m; R ${fixed(section.radius, 0)} km`),
  );
  return svg;
}
