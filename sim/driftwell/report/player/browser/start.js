// Everything put together. `window.driftwellPlayer` tells what is shown, to tests and to the curious:
// time, playing, frames (drawn so far), colour, trail (s), camera, stretched, charges, records;
// it also has play(), pause(), seek(s), view(name), fit(what).
const LONG = 5;               // scenes this much longer than wide are stretched to begin with
const ROOMY = 3;              // surfaces that reach this much farther than charges are not all fitted

function startPlayer() {
  const root = document.getElementById("dwp");
  const data = JSON.parse(document.getElementById("dwp-data").textContent);
  root.querySelector(".dwp-live").hidden = false;
  const theme = makeTheme(root), ways = makeWays(data);
  const stage = makeStage(document.getElementById("dwp-canvas"), data, ways, theme);
  const player = { root, data, ways, stage, theme };
  let asked = false;
  const redraw = player.redraw = () => {
    if (asked) return;
    asked = true;
    requestAnimationFrame(() => {
      asked = false;
      stage.draw(player.clock.time);
      root.dataset.frames = stage.frames;
    });
  };
  player.clock = makeClock(ways.first, ways.last, () => {
    player.controls.showState();
    document.dispatchEvent(new CustomEvent("driftwell:time", { detail: { time: player.clock.time } }));
    redraw();
  });
  player.boxes = boxesOf(data, stage.surfaces);
  player.start = startOf(data, player.boxes);

  player.stretch = (on) => {
    stage.camera.stretch = on ? stretchOf(player.boxes.all) : [1, 1, 1];
    root.dataset.stretched = on;
  };
  player.fit = (what) => {
    stage.camera.fit(...player.boxes[what]);
    root.dataset.fit = what;
    stage.moved = true;
    redraw();
  };
  player.view = (name, fit) => {
    stage.camera.turn(...VIEWS[name]);
    root.dataset.view = name;
    player.fit(fit || root.dataset.fit || "all");
  };
  player.controls = makeControls(player);
  listenToPointers(player);
  document.addEventListener("driftwell:seek", (event) => {
    const time = Number(event.detail && event.detail.time);
    if (isFinite(time)) player.clock.seek(time);
  });

  stage.resize();
  player.controls.reset();
  player.charts = makeCharts(document.getElementById("dwp-charts"), data, theme, player.clock);
  for (const chart of document.querySelectorAll(".dwp-chart svg")) chart.addEventListener("keydown", player.controls.onArrows);
  new ResizeObserver(() => { stage.resize(); redraw(); }).observe(stage.canvas);
  watchTheme(() => {
    theme.read();
    stage.moved = true;
    player.controls.setColour(stage.colour);
    player.charts.build();
  });
  player.clock.seek(ways.first);
  window.driftwellPlayer = handle(player);
}

function handle(player) {
  const { stage, clock, ways } = player;
  return Object.freeze({
    get time() { return clock.time; },
    get playing() { return clock.playing; },
    get frames() { return stage.frames; },
    get colour() { return stage.colour; },
    get trail() { return stage.trail; },
    get speed() { return clock.speed; },
    get stretched() { return stage.camera.stretch.some((x) => x !== 1); },
    get camera() {
      const { target, azimuth, elevation, distance } = stage.camera;
      return { target: [...target], azimuth, elevation, distance };
    },
    get there() { return stage.now.state.filter((state) => state === THERE).length; },
    charges: ways.n, records: ways.k,
    play: clock.play, pause: clock.pause, seek: clock.seek, view: player.view, fit: player.fit,
  });
}

function boxesOf(data, surfaces) {
  const { low, high, core } = data.box;
  const held = [[...low], [...high]];
  for (const { vertices } of surfaces.all) {
    for (let i = 0; i < vertices.length; i++) {
      const axis = i % 3;
      if (vertices[i] < held[0][axis]) held[0][axis] = vertices[i];
      if (vertices[i] > held[1][axis]) held[1][axis] = vertices[i];
    }
  }
  return { all: padded(held), charges: padded([[...core[0]], [...core[1]]]) };
}

function padded([low, high]) {
  // a box without width in some direction gets a little of its longest side
  const longest = Math.max(...low.map((x, axis) => high[axis] - x)) || 1e-6;
  low.forEach((x, axis) => {
    const lack = Math.max(0, 0.04 * longest - (high[axis] - x));
    low[axis] -= lack / 2;
    high[axis] += lack / 2;
  });
  return [low, high];
}

function spans([low, high]) {
  return low.map((x, axis) => high[axis] - x);
}

function stretchOf(box) {
  // the longest side as it is, the two others by one factor, to a third of it
  const side = spans(box), longest = side.indexOf(Math.max(...side));
  const others = Math.max(...side.filter((_, axis) => axis !== longest));
  const factor = Math.max(1, side[longest] / (3 * others));
  const round = Number(factor.toPrecision(2));
  return side.map((_, axis) => (axis === longest ? 1 : round));
}

function startOf(data, boxes) {
  const side = spans(boxes.all).sort((a, b) => a - b);
  const far = Math.max(...spans(boxes.all).map((x, axis) => x / spans(boxes.charges)[axis]));
  return {
    stretch: side[2] > LONG * side[1],
    fit: far > ROOMY * 4 ? "charges" : "all",
    trail: data.jagged ? 0 : 25,
  };
}

function watchTheme(changed) {
  matchMedia("(prefers-color-scheme: dark)").addEventListener("change", changed);
  new MutationObserver(changed).observe(document.documentElement, { attributes: true, attributeFilter: ["data-theme"] });
}

startPlayer();
