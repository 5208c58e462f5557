// The parts of the page that are text: targets, what is told of the chosen one, legend, facts.
// Texts are always set as text, never as markup.

function node(name, attributes = {}, ...children) {
  const element = document.createElement(name);
  for (const [key, value] of Object.entries(attributes)) element.setAttribute(key, value);
  element.append(...children);
  return element;
}

function isolated(name) {
  return node("bdi", {}, name);
}

function swatch(colour) {
  const mark = node("span", { class: "swatch" });
  mark.style.background = colour;
  return mark;
}

function pairs(list) {
  const box = node("dl", { class: "facts" });
  for (const [name, value, beyond] of list) {
    const row = node("div", beyond ? { class: "beyond" } : {});
    row.append(node("dt", {}, name), node("dd", {}, value));
    box.append(row);
  }
  return box;
}

function spread(values, digits) {
  return values.map((value) => fixed(value, digits)).join(", ");
}

function drawLegend(data, list) {
  const line = (colour, dashes) => {
    const svg = shape("svg", { width: 30, height: 10, "aria-hidden": "true" });
    svg.append(shape("line", { x1: 1, x2: 29, y1: 5, y2: 5, stroke: colour, "stroke-width": 4,
      "stroke-dasharray": dashes }));
    return svg;
  };
  const item = (...children) => list.append(node("li", {}, ...children));
  for (const mode of data.modes) item(line(mode.colour, "none"), mode.name);
  item(line("#9aa4ab", "none"), "pale: the front has not come yet");
  item(line("#55606a", "6 4"), "another route of the chosen target");
  item("★ event", " · ○ target, ● once a front has come");
}

// What the dashed line in the waveforms is, and what its parts are.
function tellSum(data, note) {
  note.hidden = data.modes.length < 2;
  const shares = data.modes.map((mode) => `${fixed(100 * mode.share, 0)} % ${mode.name}`).join(", ");
  note.textContent = "Each mode is told as if all of the signal were in it. A gauge sees their sum, " +
    `dashed, here with the shares that a lasting wind raises at the source: ${shares}.`;
}

function drawTargets(data, list, choose) {
  const bars = [];
  data.targets.forEach((target, i) => {
    const button = node("button", { type: "button" }, isolated(target.name));
    const reached = target.rows.map((row, m) => [row, m]).filter(([row]) => row.plan);
    for (const [row, m] of reached) {
      const window = `${dateOf(data, row.plan.look_from).slice(0, 10)} to ` +
        dateOf(data, row.plan.look_until).slice(0, 10);
      button.append(node("span", {}, `${data.modes[m].name}: ${window}`));
    }
    if (!reached.length) button.append(node("span", {}, target.rows[0].status));
    const bar = windowBars(data, i);
    if (reached.length) button.append(bar.svg);
    bars.push(bar);
    button.addEventListener("click", () => choose(i));
    list.append(node("li", {}, button));
  });
  return bars;
}

function drawRows(data, target, box) {
  box.replaceChildren();
  data.targets[target].rows.forEach((row, m) => {
    const mode = data.modes[m];
    const part = node("div", { class: "row" });
    part.append(node("h3", {}, swatch(mode.colour), mode.name));
    if (row.plan) tellRow(data, target, m, row, part); else part.append(node("p", {}, row.status));
    box.append(part);
  });
}

function tellRow(data, target, m, row, part) {
  const plan = row.plan;
  const metres = plan.metres.some((value) => value !== null);
  part.append(
    node("p", {}, `Look from ${dateOf(data, plan.look_from)} until ` +
      `${dateOf(data, plan.look_until)}.`),
    pairs([
      ["Front, days (P10, P50, P90)", spread(plan.front, 1)],
      ["Half height, days", spread(plan.half, 1)],
      ["Peak, days", spread(plan.peak, 1)],
      [metres ? "Peak, m" : "Peak, ratio to the source", spread(metres ? plan.metres : plan.ratio, metres ? 3 : 2)],
      ["Chance above the threshold", plan.seen === null ? "–" : `${fixed(100 * plan.seen, 0)} %`],
      ["Path and mean speed", `${fixed(row.km, 0)} km, ${fixed(row.speed, 2)} m/s`],
      ["Longest gap between samples", `${fixed(plan.gap_days, 1)} days or ${fixed(plan.gap_km, 0)} km`],
      ["Reach off the guide (factor e)", `${fixed(plan.reach_km, 0)} km`],
      ["Measure first", measured(plan)],
      ["Time hangs on", shares(plan.time_from)],
      ["Height hangs on", shares(plan.height_from)],
    ]),
  );
  if (row.instruments.length) {
    const guide = data.event.metres === null ? `${fixed(row.instruments[0].guide, 2)} of that at the source`
      : `${fixed(100 * row.instruments[0].guide * data.event.metres, 1)} cm`;
    part.append(node("h3", {}, `Its instruments, per cm of sea level on the guide, which peaks at ${guide}`), pairs(
      row.instruments.map((i) => [`${fixed(i.depth, 0)} m`, `isopycnals ${fixed(i.rise, 1)} m, ` +
        `current ${fixed(i.flow, 1)} cm/s, bottom pressure ${fixed(i.pressure, 2)} cm`])));
  }
  tellBudget(data, target, m, part);
  part.append(node("h3", {}, "Where the theory stands"), pairs(
    row.checks.map(([name, value, limit, beyond]) =>
      [name, `${value} (${beyond ? "not " : ""}${limit})`, beyond])));
  if (row.cautions.length) {
    const list = node("ul", { class: "cautions" });
    list.append(...row.cautions.map((text) => node("li", {}, text)));
    part.append(list);
  }
}

function measured(plan) {
  const names = ["sea level", "isopycnal displacement", "current along the guide", "bottom pressure"];
  const i = names.indexOf(plan.first);
  if (plan.depth[i] === null) return plan.first;
  const size = plan.per_metre[i];
  const each = [`${fixed(size, 2)} cm`, `${fixed(size / 100, 1)} m`, `${fixed(size, 1)} cm/s`,
    `${fixed(size, 2)} cm`][i];
  const off = plan.off[i] > 0.5 ? `, ${fixed(plan.off[i], 0)} km off the shore` : "";
  return `${plan.first} at ${fixed(plan.depth[i], 0)} m${off} (${each} per cm of sea level)`;
}

function shares(list) {
  const named = list.slice(0, 3).map(([name, share]) => `${name} ${fixed(100 * share, 0)} %`);
  return named.join(", ") || "nothing";
}

function tellBudget(data, target, m, part) {
  const route = headline(data, target, m);
  if (!route) return;
  const figure = node("figure", { class: "budget" });
  const key = node("figcaption", {}, "Energy left at the end of each leg, and what it lost to: ");
  [["left", "#56636d"], ...data.fates.map((fate) => [fate.name, fate.colour])].forEach(
    ([name, colour]) => key.append(swatch(colour), ` ${name}  `));
  figure.append(key, budget(data, route));
  part.append(figure);
}

// What is known of one place on a route.
function tellPlace(data, route, k) {
  const mode = data.modes[route.mode];
  const days = route.days[k];
  const box = node("div", {});
  const spanned = [0, 2].map((end) => fixed(new Spread(data, route, end).at(days), 1)).join(" to ");
  const lines = [
    `${mode.name}, ${legAt(route, k).kind}`,
    `day ${fixed(days, 2)} (P10 to P90: ${spanned})`,
    dateOf(data, days),
    `${fixed(route.km[k], 0)} km from the source, ${speedAt(route, k)}`,
    `sea level about ${significant(route.amplitude[k], 2)} of the source's`,
  ];
  box.append(...lines.map((text) => node("div", {}, text)));
  const section = nearestSection(data, route.lon[k], route.lat[k]);
  if (section && legAt(route, k).kind === "coast") box.append(thumbnail(section));
  return { box, lines, colour: mode.colour };
}

function legAt(route, k) {
  let end = 0;
  for (const leg of route.legs) {
    end += leg.vertices;
    if (k < end) return leg;
  }
  return route.legs[route.legs.length - 1];
}

// Below the critical frequency sea level rises along a leg almost at once: that is no speed.
function speedAt(route, k) {
  const front = `${fixed(localSpeed(route, k), 2)} m/s`;
  return legAt(route, k).at_once ? `front ${front}, the rest almost at once` : front;
}

function localSpeed(route, k) {
  const low = Math.max(k - 1, 0), high = Math.min(k + 1, route.km.length - 1);
  const days = route.days[high] - route.days[low];
  return days > 0 ? (route.km[high] - route.km[low]) * 1e3 / (days * 86400) : NaN;
}

function nearestSection(data, lon, lat) {
  const away = (s) => Math.hypot(wrapped(s.lon - lon) * Math.cos(lat / RADIAN), s.lat - lat);
  const best = data.sections.reduce((a, b) => (!a || away(b) < away(a) ? b : a), null);
  return best && away(best) < 1.3 ? best : null;
}
