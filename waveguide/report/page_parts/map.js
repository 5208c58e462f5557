// The map: land, routes, fronts and targets on a canvas that can be moved and magnified.

const NEAR = 14;  // pixels within which a route is pointed at
const CLOSEST = 60;  // times closer than the whole
const INK = "#20262b";

function pale(colour) {
  const parts = [1, 3, 5].map((i) => parseInt(colour.slice(i, i + 2), 16));
  return "rgb(" + parts.map((c) => Math.round(c + 0.62 * (255 - c))).join(",") + ")";
}

class SeaMap {
  constructor(canvas, data, told) {
    this.canvas = canvas;
    this.data = data;
    this.told = told;  // told.pointed(route, place, x, y), told.chosen(target)
    this.projection = new Projection(data.view.middle, data.view.pole);
    this.land = landPaths(this.projection, data.land);
    this.lines = data.routes.map((route) => this.projection.line(route.lon, route.lat));
    this.spots = data.targets.map((t) => this.projection.point(t.lon, t.lat));
    this.source = this.projection.point(data.event.lon, data.event.lat);
    this.still = document.createElement("canvas");
    this.time = 0;
    this.target = 0;
    this.pointed = null;
    this.listen();
    new ResizeObserver(() => this.resize()).observe(canvas);
    this.resize();
  }

  // Size and scale

  resize() {
    const box = this.canvas.getBoundingClientRect();
    if (!box.width || !box.height) return;
    const density = window.devicePixelRatio || 1;
    const first = !this.scale;
    for (const canvas of [this.canvas, this.still]) {
      canvas.width = Math.round(box.width * density);
      canvas.height = Math.round(box.height * density);
    }
    Object.assign(this, { width: box.width, height: box.height, density });
    this.measure();
    if (first) this.showWhole(); else this.redraw();
  }

  // What must be seen, in plane coordinates, and the scale at which it just is.
  measure() {
    const xs = [this.source[0]], ys = [this.source[1]];
    this.spots.forEach(([x, y]) => { xs.push(x); ys.push(y); });
    this.lines.forEach((line) => line.x.forEach((x, i) => { xs.push(x); ys.push(line.y[i]); }));
    if (this.projection.pole) { xs.push(0); ys.push(0); }
    const bounds = [xs, ys].map((v) => v.reduce(
      ([low, high], value) => [Math.min(low, value), Math.max(high, value)], [1e9, -1e9]));
    this.home = bounds.map(([low, high]) => (low + high) / 2);
    const spans = bounds.map(([low, high]) => Math.max(1.16 * (high - low), 3));
    this.fit = Math.min(this.width / spans[0], this.height / spans[1]);
  }

  // Bring a vertex into sight, if it is not.
  reveal(i, k) {
    const place = [this.lines[i].x[k], this.lines[i].y[k]];
    const [px, py] = this.pixel(...place);
    if (px > 20 && py > 20 && px < this.width - 20 && py < this.height - 20) return;
    [this.x, this.y] = place;
    this.redraw();
  }

  showWhole() {
    this.scale = this.fit;
    [this.x, this.y] = this.home;
    this.redraw();
  }

  zoom(factor, px = this.width / 2, py = this.height / 2) {
    this.point(null);
    const [x, y] = this.plane(px, py);
    this.scale = Math.min(Math.max(this.scale * factor, 0.6 * this.fit), CLOSEST * this.fit);
    this.x = x - (px - this.width / 2) / this.scale;
    this.y = y + (py - this.height / 2) / this.scale;
    this.redraw();
  }

  move(px, py) {
    this.point(null);
    this.x -= px / this.scale;
    this.y += py / this.scale;
    if (!this.projection.pole) this.x = this.home[0] + wrapped(this.x - this.home[0]);
    this.redraw();
  }

  plane(px, py) {
    return [this.x + (px - this.width / 2) / this.scale, this.y - (py - this.height / 2) / this.scale];
  }

  pixel(x, y) {
    return [(x - this.x) * this.scale + this.width / 2, (this.y - y) * this.scale + this.height / 2];
  }

  // Drawing. What does not depend on time is kept until the view changes.

  redraw() {
    this.drawStill();
    this.draw();
  }

  drawStill() {
    const pen = this.still.getContext("2d");
    pen.setTransform(1, 0, 0, 1, 0, 0);
    pen.fillStyle = "#eaf1f5";
    pen.fillRect(0, 0, this.still.width, this.still.height);
    const span = this.width / this.scale;
    const step = [1, 2, 5, 10, 15, 30].find((s) => span / s <= 9) || 30;
    const lines = graticule(this.projection, step);
    for (const turn of this.projection.turns) {
      const d = this.density * this.scale;
      pen.setTransform(d, 0, 0, -d, this.density * (this.width / 2 - (this.x - turn) * this.scale),
        this.density * (this.height / 2 + this.y * this.scale));
      pen.lineWidth = 1 / this.scale;
      pen.strokeStyle = "#cfdbe2";
      pen.stroke(lines);
      pen.fillStyle = pen.strokeStyle = "#dcd8cf";
      pen.fill(this.land[0]);
      pen.lineWidth = 0.4 / this.scale;
      pen.stroke(this.land[0]);
      pen.fillStyle = "#eaf1f5";
      pen.fill(this.land[1]);
    }
    pen.setTransform(this.density, 0, 0, this.density, 0, 0);
    this.writeDegrees(pen, step);
  }

  writeDegrees(pen, step) {
    pen.font = "11px system-ui, sans-serif";
    pen.fillStyle = "#55606a";
    pen.textAlign = "center";
    for (let lon = -180; lon < 180; lon += step) {
      for (const turn of this.projection.turns) {
        const [x, y] = this.projection.place(wrapped(lon - this.projection.middle) + turn,
          this.projection.pole ? this.projection.pole * 48 : 0);
        const px = this.pixel(x, y);
        const at = this.projection.pole ? px : [px[0], this.height - 5];
        if (at[0] < 24 || at[0] > this.width - 30) continue;
        pen.fillText(degrees(lon, "E", "W"), at[0], at[1]);
      }
    }
    pen.textAlign = "right";
    for (let lat = -80; lat <= 80; lat += step) {
      const [x, y] = this.projection.place(0, lat);
      const px = this.pixel(x, y);
      if (this.projection.pole * lat < 0) continue;
      const at = this.projection.pole ? [px[0] + 14, px[1]] : [this.width - 4, px[1] - 3];
      pen.fillText(degrees(lat, "N", "S"), at[0], at[1]);
    }
  }

  draw() {
    const pen = this.canvas.getContext("2d");
    pen.setTransform(1, 0, 0, 1, 0, 0);
    pen.drawImage(this.still, 0, 0);
    pen.setTransform(this.density, 0, 0, this.density, 0, 0);
    pen.lineJoin = pen.lineCap = "round";
    for (const turn of this.projection.turns) {
      this.turn = turn;
      this.drawRoutes(pen);
    }
    this.turn = 0;
    this.drawFronts(pen);
    this.drawPlaces(pen);
    if (this.pointed) this.ring(pen, this.pixel(...this.pointed), 9, INK);
  }

  shownRoutes() {
    return this.data.routes.map((route, i) => [route, i]).filter(
      ([route]) => route.kind === "earliest" || route.target === this.target);
  }

  drawRoutes(pen) {
    const shown = this.shownRoutes();
    for (const passed of [false, true]) {
      for (const [route, i] of shown) {
        const mine = route.target === this.target;
        const mode = this.data.modes[route.mode];
        pen.lineWidth = (mine ? 3.4 : 1.8) + 1.7 * (this.data.modes.length - 1 - route.mode);
        pen.strokeStyle = passed ? mode.colour : pale(mode.colour);
        pen.setLineDash(route.kind === "earliest" ? [] : [7, 6]);
        this.strokePart(pen, i, passed ? 0 : null, passed ? this.time : null);
      }
    }
    pen.setLineDash([]);
    for (const [route, i] of shown) {
      if (route.target === this.target && route.kind === "earliest") this.drawSpread(pen, route, i);
    }
  }

  // The stretch on which the front may be now, with a chance of 80 %.
  drawSpread(pen, route, i) {
    const [last, first] = [0, 2].map((end) => new Spread(this.data, route, end).place(this.time));
    if (first >= route.days[route.days.length - 1]) return;
    pen.globalAlpha = 0.32;
    pen.lineWidth = 15;
    pen.lineCap = "butt";
    pen.strokeStyle = this.data.modes[route.mode].colour;
    this.strokePart(pen, i, first, last);
    pen.globalAlpha = 1;
    pen.lineCap = "round";
  }

  // The part of a route between two times, or all of it.
  strokePart(pen, i, from, until) {
    const route = this.data.routes[i], line = this.lines[i];
    const days = route.days;
    if (until !== null && until <= 0) return;
    const first = from === null ? { at: 0, share: 0 } : locate(days, from);
    const last = until === null ? { at: days.length - 2, share: 1 } : locate(days, until);
    pen.beginPath();
    pen.moveTo(...this.pixel(between(line.x, first) + this.turn, between(line.y, first)));
    for (let k = first.at + 1; k <= last.at; k++) {
      pen.lineTo(...this.pixel(line.x[k] + this.turn, line.y[k]));
    }
    pen.lineTo(...this.pixel(between(line.x, last) + this.turn, between(line.y, last)));
    pen.stroke();
  }

  // Where the fronts are now: one mark for those that travel together.
  fronts() {
    const found = [];
    for (const [route, i] of this.shownRoutes()) {
      if (route.kind !== "earliest" || this.time <= 0) continue;
      if (this.time > route.days[route.days.length - 1]) continue;
      const place = locate(route.days, this.time);
      const at = this.pixel(between(this.lines[i].x, place), between(this.lines[i].y, place));
      const near = ([mode, x, y]) => mode === route.mode && Math.hypot(x - at[0], y - at[1]) < 9;
      if (!found.some(near)) found.push([route.mode, ...at]);
    }
    return found;
  }

  drawFronts(pen) {
    pen.font = "bold 11px system-ui, sans-serif";
    pen.textAlign = "center";
    pen.textBaseline = "middle";
    for (const [m, x, y] of this.fronts()) {
      const mode = this.data.modes[m];
      this.ring(pen, [x, y], 9, mode.colour, "#fff");
      pen.fillStyle = INK;
      pen.fillText(mode.number, x, y + 0.5);
    }
    pen.textBaseline = "alphabetic";
  }

  ring(pen, [x, y], radius, colour, fill) {
    pen.beginPath();
    pen.arc(x, y, radius, 0, 2 * Math.PI);
    if (fill) { pen.fillStyle = fill; pen.fill(); }
    pen.lineWidth = 3;
    pen.strokeStyle = colour;
    pen.stroke();
  }

  drawPlaces(pen) {
    this.drawBox(pen);
    this.drawStar(pen, this.pixel(...this.source));
    const taken = [], way = this.wayPixels();
    const order = this.spots.map((_, i) => i).sort((a, b) => (b === this.target) - (a === this.target));
    for (const i of order) {
      const at = this.pixel(...this.spots[i]);
      const arrived = this.data.targets[i].rows.some((row) => row.plan && row.front <= this.time);
      pen.beginPath();
      pen.arc(at[0], at[1], i === this.target ? 6.5 : 4.5, 0, 2 * Math.PI);
      pen.fillStyle = arrived ? INK : "#fff";
      pen.fill();
      pen.lineWidth = 2;
      pen.strokeStyle = i === this.target ? "#7b2d5b" : INK;
      pen.stroke();
      this.write(pen, this.data.targets[i].name, at, taken, way, i === this.target);
    }
    this.write(pen, this.data.event.name, this.pixel(...this.source), taken, way, false);
  }

  drawBox(pen) {
    if (!this.data.event.box) return;
    const [west, south, east, north] = this.data.event.box;
    const width = ((east - west) % 360 + 360) % 360;
    const lon = [], lat = [];
    for (let k = 0; k <= 40; k++) { lon.push(west + width * k / 40); lat.push(south); }
    for (let k = 0; k <= 40; k++) { lon.push(west + width * (1 - k / 40)); lat.push(north); }
    const line = this.projection.line(lon, lat);
    pen.beginPath();
    lon.forEach((_, k) => pen[k ? "lineTo" : "moveTo"](...this.pixel(line.x[k], line.y[k])));
    pen.closePath();
    pen.lineWidth = 1.5;
    pen.setLineDash([5, 3]);
    pen.strokeStyle = "#6b5600";
    pen.stroke();
    pen.setLineDash([]);
  }

  drawStar(pen, [x, y]) {
    pen.beginPath();
    for (let k = 0; k < 10; k++) {
      const radius = k % 2 ? 4.5 : 11, angle = Math.PI * (k / 5 - 0.5);
      pen[k ? "lineTo" : "moveTo"](x + radius * Math.cos(angle), y + radius * Math.sin(angle));
    }
    pen.closePath();
    pen.fillStyle = "#ffd23f";
    pen.fill();
    pen.lineWidth = 1.4;
    pen.strokeStyle = INK;
    pen.stroke();
  }

  wayPixels() {
    return this.shownRoutes().flatMap(([, i]) =>
      Array.from(this.lines[i].x, (x, k) => this.pixel(x, this.lines[i].y[k])));
  }

  // A name beside a place, where there is room for it and where it hides least of the routes.
  write(pen, name, [x, y], taken, way, must) {
    const text = name.length > 26 ? name.slice(0, 25) + "…" : name;
    pen.font = (must ? "bold " : "") + "12px system-ui, sans-serif";
    pen.textAlign = "left";
    const width = pen.measureText(text).width;
    const spots = [[10, 4], [-width - 10, 4], [-width / 2, -11], [-width / 2, 21]];
    const box = ([dx, dy]) => [x + dx - 2, y + dy - 12, x + dx + width + 2, y + dy + 4];
    const hidden = (spot) => {
      const [a, b, c, d] = box(spot);
      return way.filter(([p, q]) => a < p && p < c && b < q && q < d).length;
    };
    const open = spots.filter((spot) => {
      const [a, b, c, d] = box(spot);
      if (a < 0 || c > this.width || b < 0 || d > this.height) return false;
      return !taken.some(([e, f, g, h]) => a < g && e < c && b < h && f < d);
    });
    const free = open.sort((s, t) => hidden(s) - hidden(t))[0] || (must ? spots[0] : null);
    if (!free) return;
    taken.push(box(free));
    pen.lineWidth = 3.5;
    pen.strokeStyle = "#ffffffd8";
    pen.strokeText(text, x + free[0], y + free[1]);
    pen.fillStyle = INK;
    pen.fillText(text, x + free[0], y + free[1]);
  }

  // Pointing, dragging, keys

  listen() {
    const canvas = this.canvas;
    const held = new Map();
    const local = (event) => {
      const box = canvas.getBoundingClientRect();
      return [event.clientX - box.left, event.clientY - box.top];
    };
    canvas.addEventListener("pointerdown", (event) => {
      held.set(event.pointerId, local(event));
      canvas.setPointerCapture(event.pointerId);
      canvas.classList.add("held");
      this.dragged = 0;
    });
    canvas.addEventListener("pointermove", (event) => {
      const now = local(event), before = held.get(event.pointerId);
      if (!before) { this.pointAt(...now); return; }
      this.dragged += Math.hypot(now[0] - before[0], now[1] - before[1]);
      if (held.size === 2) this.pinch(held, event.pointerId, now);
      else this.move(now[0] - before[0], now[1] - before[1]);
      held.set(event.pointerId, now);
    });
    const release = (event) => {
      if (!held.delete(event.pointerId)) return;
      canvas.classList.remove("held");
      if (event.type === "pointerup" && this.dragged < 5) this.choose(...local(event));
    };
    canvas.addEventListener("pointerup", release);
    canvas.addEventListener("pointercancel", release);
    canvas.addEventListener("pointerleave", () => this.point(null));
    canvas.addEventListener("wheel", (event) => {
      event.preventDefault();
      this.zoom(Math.exp(-0.0016 * event.deltaY), ...local(event));
    }, { passive: false });
  }

  pinch(held, moved, now) {
    const [other] = [...held.entries()].filter(([id]) => id !== moved).map(([, place]) => place);
    const before = held.get(moved);
    const apart = (place) => Math.hypot(place[0] - other[0], place[1] - other[1]);
    this.zoom(apart(now) / Math.max(apart(before), 1), ...other);
  }

  choose(px, py) {
    const near = this.spots.map((spot, i) => {
      const [x, y] = this.pixel(...spot);
      return [Math.hypot(x - px, y - py), i];
    }).sort((a, b) => a[0] - b[0])[0];
    if (near && near[0] < NEAR) this.told.chosen(near[1]);
  }

  // The closest place on a shown route, the chosen target's before others.
  pointAt(px, py) {
    let best = null;
    for (const [route, i] of this.shownRoutes()) {
      const line = this.lines[i];
      for (const turn of this.projection.turns) {
        for (let k = 0; k < line.x.length; k++) {
          const [x, y] = this.pixel(line.x[k] + turn, line.y[k]);
          const away = Math.hypot(x - px, y - py) - (route.target === this.target ? 3 : 0);
          if (away < NEAR && (!best || away < best.away)) best = { away, i, k, turn };
        }
      }
    }
    this.point(best && best.i, best && best.k, best ? best.turn : 0);
  }

  // Mark vertex k of route i, or nothing; tells where it is on the canvas.
  point(i, k, turn = 0) {
    if (i === null) {
      if (this.pointed) { this.pointed = null; this.draw(); }
      this.told.pointed(null);
      return;
    }
    this.pointed = [this.lines[i].x[k] + turn, this.lines[i].y[k]];
    this.draw();
    this.told.pointed(this.data.routes[i], k, ...this.pixel(...this.pointed));
  }
}

function degrees(value, positive, negative) {
  const size = Math.abs(value);
  return size === 0 || size === 180 ? size + "°" : size + "°" + (value > 0 ? positive : negative);
}
