"use strict";
// The document of the page, with its whole numbers turned back into degrees, days and kilometres.

const DAY = 86400e3;

function summed(steps, scale) {
  const values = new Float64Array(steps.length);
  let sum = 0;
  steps.forEach((step, i) => { sum += step; values[i] = sum / scale; });
  return values;
}

function waveOf(packed) {
  return packed.values.map((value) => value * packed.top / 1000);
}

// Amplitude at a vertex: that of the ends of the leg, in between as a constant rate per length.
function amplitudes(legs, km) {
  const values = new Float64Array(km.length);
  let first = 0, before = 1;
  for (const leg of legs) {
    const last = first + leg.vertices - 1;
    for (let i = first; i <= last; i++) {
      const share = km[last] > km[first] ? (km[i] - km[first]) / (km[last] - km[first]) : 1;
      values[i] = before * Math.pow(leg.factor, i === first ? 0 : share);
    }
    before *= leg.factor;
    first = last + 1;
  }
  return values;
}

function readData() {
  const data = JSON.parse(document.getElementById("data").textContent);
  data.start = Date.parse(data.event.start);
  for (const route of data.routes) {
    route.lon = summed(route.lon, 1e3);
    route.lat = summed(route.lat, 1e3);
    route.days = summed(route.days, 1e3);
    route.km = summed(route.km, 10);
    route.amplitude = amplitudes(route.legs, route.km);
  }
  data.waves.time = Array.from({ length: data.waves.count }, (_, i) => i * data.waves.step);
  data.waves.modes = data.waves.modes.map((target) => target.map(waveOf));
  data.waves.sum = data.waves.sum.map(waveOf);
  data.waves.source = waveOf(data.waves.source);
  data.end = endOfTime(data);
  return data;
}

// The clock runs until the last window has closed.
function endOfTime(data) {
  let end = data.event.days;
  for (const target of data.targets) {
    for (const row of target.rows) {
      if (row.plan) end = Math.max(end, row.front, row.plan.look_until || 0, row.plan.front[2]);
    }
  }
  return 1.04 * end;
}

// P10 (end 0) and P90 (end 2) of the front on its way: at the source those of the event's start,
// at the target those of the plan, in between in proportion to the time it takes.
class Spread {
  constructor(data, route, end) {
    const front = data.targets[route.target].rows[route.mode].plan.front;
    this.whole = Math.max(route.days[route.days.length - 1], 1e-6);
    this.first = (end - 1) * 1.2816 * data.event.start_error;
    this.last = front[end] - front[1];
  }

  // When the front passes a place that it should pass at `days`.
  at(days) {
    return days + this.first + (this.last - this.first) * days / this.whole;
  }

  // The inverse: where it is at a time, as the days at which it should be there.
  place(time) {
    return (time - this.first) / (1 + (this.last - this.first) / this.whole);
  }
}

// The first route of a target in a mode; the others are alternatives.
function headline(data, target, mode) {
  return data.routes.find((r) => r.target === target && r.mode === mode && r.kind === "earliest");
}

// Index of the last value that is not above x, and the share of the way to the next one.
function locate(values, x) {
  let low = 0, high = values.length - 1;
  if (x >= values[high]) return { at: Math.max(high - 1, 0), share: 1 };
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if (values[middle] <= x) low = middle; else high = middle;
  }
  const span = values[low + 1] - values[low];
  return { at: low, share: span > 0 ? Math.max(0, (x - values[low]) / span) : 1 };
}

function between(values, place) {
  return values[place.at] + place.share * (values[place.at + 1] - values[place.at]);
}

function fixed(value, digits) {
  if (value === null || value === undefined || !isFinite(value)) { return "–"; }
  return value.toFixed(digits).replace(/^-(0(\.0*)?)$/, "$1"); // no negative nothing
}

function significant(value, digits) {
  return value === null || !isFinite(value) ? "–" : String(Number(value.toPrecision(digits)));
}

function dateOf(data, days) {
  return new Date(data.start + days * DAY).toISOString().slice(0, 16).replace("T", " ") + " UTC";
}
