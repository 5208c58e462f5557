// Putting the parts together: one moment, one chosen target, one place pointed at.

(function () {
  const get = (id) => document.getElementById(id);
  const data = readData();
  const steps = 1000;
  let time = 0, target = 0, walked = 0, ticking = null;
  let path = null, wave = null;

  get("title").textContent = data.title;
  get("event").textContent = `${data.event.name}: from ${dateOf(data, 0)}, ${data.event.days} days` +
    (data.event.metres === null ? "" : `, ${data.event.metres} m`) + `. ${data.summary}`;
  for (const [name, value] of data.facts) {
    get("facts").append(node("dt", {}, name), node("dd", {}, value));
  }
  drawLegend(data, get("legend"));
  get("box").hidden = !data.event.box;
  tellSum(data, get("sum"));

  const map = new SeaMap(get("map"), data, { pointed: showPlace, chosen: choose });
  const bars = drawTargets(data, get("list"), choose);

  // Time

  function setTime(days) {
    time = Math.min(Math.max(days, 0), data.end);
    const text = `day ${time.toFixed(1)}\n${dateOf(data, time)}`;
    get("time").value = Math.round(steps * time / data.end);
    get("time").setAttribute("aria-valuetext", text.replace("\n", ", "));
    get("now").textContent = text;
    map.time = time;
    map.draw();
    bars.forEach((bar) => bar.show(time));
    showNow();
  }

  function showNow() {
    if (path) {
      const y = path.y(Math.min(time, path.ys[1]));
      path.now.setAttribute("y1", y);
      path.now.setAttribute("y2", y);
    }
    if (wave) {
      const x = wave.x(Math.min(time, wave.xs[1]));
      wave.now.setAttribute("x1", x);
      wave.now.setAttribute("x2", x);
    }
  }

  function toggle() {
    const playing = ticking !== null;
    get("play").textContent = playing ? "▶" : "❚❚";
    get("play").setAttribute("aria-label", playing ? "Start the clock" : "Stop the clock");
    if (playing) { cancelAnimationFrame(ticking); ticking = null; return; }
    if (time >= data.end) setTime(0);
    let before = null;
    const tick = (now) => {
      if (before !== null) setTime(time + data.end * (now - before) / 20000);
      before = now;
      if (time >= data.end) { toggle(); return; }
      ticking = requestAnimationFrame(tick);
    };
    ticking = requestAnimationFrame(tick);
  }

  // The chosen target

  function choose(i) {
    target = i;
    walked = 0;
    map.target = i;
    get("name").replaceChildren(isolated(data.targets[i].name));
    path = put(get("path"), distanceTime(data, i));
    wave = put(get("wave"), waveforms(data, i));
    if (path) listenPath();
    drawRows(data, i, get("rows"));
    [...get("list").querySelectorAll("button")].forEach((button, k) =>
      button.setAttribute("aria-current", String(k === i)));
    map.point(null);
    map.draw();
    showNow();
  }

  function put(place, frame) {
    place.replaceChildren(frame ? frame.svg : node("p", {}, "No mode reaches this target."));
    return frame;
  }

  // The diagram of distance and time points at the map, and the map at the diagram.
  function listenPath() {
    path.svg.addEventListener("pointermove", (event) => {
      const box = path.svg.getBoundingClientRect();
      const px = (event.clientX - box.left) * path.width / box.width;
      const py = (event.clientY - box.top) * path.height / box.height;
      let best = null;
      for (const route of path.routes.filter(Boolean)) {
        for (let k = 0; k < route.km.length; k++) {
          const away = Math.hypot(path.x(route.km[k]) - px, path.y(route.days[k]) - py);
          if (!best || away < best.away) best = { away, route, k };
        }
      }
      map.point(data.routes.indexOf(best.route), best.k);
    });
    path.svg.addEventListener("pointerleave", () => map.point(null));
  }

  function showPlace(route, k, px, py) {
    const tip = get("tip");
    tip.hidden = !route;
    if (path) path.mark.setAttribute("visibility", "hidden");
    if (!route) return;
    const told = tellPlace(data, route, k);
    tip.replaceChildren(told.box);
    tip.style.borderLeftColor = told.colour;
    const left = px + 18 + tip.offsetWidth < map.width ? px + 18 : px - 18 - tip.offsetWidth;
    tip.style.left = `${Math.max(left, 4)}px`;
    tip.style.top = `${Math.max(Math.min(py + 14, map.height - tip.offsetHeight - 6), 4)}px`;
    if (path && route.target === target) {
      path.mark.setAttribute("cx", path.x(route.km[k]));
      path.mark.setAttribute("cy", path.y(route.days[k]));
      path.mark.setAttribute("visibility", "visible");
    }
    return told;
  }

  // With keys: along the first route of the chosen target, twenty places from end to end.
  function walk(direction) {
    const route = data.modes.map((_, m) => headline(data, target, m)).find(Boolean);
    if (!route) return;
    const last = route.km.length - 1;
    walked = Math.min(Math.max(walked + direction * Math.max(1, Math.round(last / 20)), 0), last);
    map.reveal(data.routes.indexOf(route), walked);
    map.point(data.routes.indexOf(route), walked);
    get("said").textContent = tellPlace(data, route, walked).lines.join(", ");
  }

  const mapKeys = {
    ArrowLeft: () => map.move(60, 0), ArrowRight: () => map.move(-60, 0),
    ArrowUp: () => map.move(0, 60), ArrowDown: () => map.move(0, -60),
    "+": () => map.zoom(1.4), "=": () => map.zoom(1.4), "-": () => map.zoom(1 / 1.4),
    0: () => map.showWhole(), ">": () => walk(1), "<": () => walk(-1),
  };
  const pageKeys = {
    "[": () => choose((target + data.targets.length - 1) % data.targets.length),
    "]": () => choose((target + 1) % data.targets.length),
    " ": toggle,
  };

  get("map").addEventListener("keydown", (event) => {
    if (mapKeys[event.key]) { event.preventDefault(); mapKeys[event.key](); }
  });
  document.addEventListener("keydown", (event) => {
    const typing = event.key === " " && event.target.closest("button, summary, input");
    if (pageKeys[event.key] && !typing && !event.ctrlKey && !event.metaKey && !event.altKey) {
      event.preventDefault();
      pageKeys[event.key]();
    }
  });
  get("time").max = steps;
  get("time").addEventListener("input", (event) => setTime(data.end * event.target.value / steps));
  get("play").addEventListener("click", toggle);
  get("closer").addEventListener("click", () => map.zoom(1.5));
  get("farther").addEventListener("click", () => map.zoom(1 / 1.5));
  get("whole").addEventListener("click", () => map.showWhole());
  get("print").addEventListener("click", () => window.print());
  get("help").addEventListener("click", () => {
    get("keys").hidden = !get("keys").hidden;
    get("help").setAttribute("aria-expanded", String(!get("keys").hidden));
  });
  window.addEventListener("beforeprint", () => { get("all").open = true; });

  const fronts = data.targets.flatMap((t) => t.rows.filter((r) => r.plan).map((r) => r.front));
  choose(Math.max(data.targets.findIndex((t) => t.rows.some((r) => r.plan)), 0));
  setTime(fronts.sort((a, b) => a - b)[Math.floor(fronts.length / 2)] || 0);
})();
