// The controls, by mouse or by key, and what a screen reader is told of the moment shown.
function makeControls(player) {
  const { data, ways, stage, clock, theme, root, redraw } = player;
  const part = (name) => document.getElementById(`dwp-${name}`);
  const play = part("play"), slider = part("time"), read = part("clock"), words = part("words");
  const trail = part("trail"), trailWords = part("trail-words");
  const duration = clock.last - clock.first;
  const scale = prefixed(clock.last || 1, "s");
  const digits = 4;
  let spokenFor = null, waiting = 0;

  slider.min = clock.first;
  slider.max = clock.last;
  play.addEventListener("click", () => toggle());
  slider.addEventListener("input", () => clock.seek(Number(slider.value)));
  slider.addEventListener("keydown", onArrows);
  part("speed").addEventListener("change", (event) => { clock.speed = Number(event.target.value); });
  part("loop").addEventListener("change", (event) => { clock.loop = event.target.checked; });
  part("colour").addEventListener("change", (event) => setColour(event.target.value));
  trail.addEventListener("input", () => setTrail(Number(trail.value)));
  part("surfaces").addEventListener("change", (event) => {
    stage.showSurfaces = event.target.checked;
    moved();
  });
  part("follow").addEventListener("change", (event) => { stage.follow = event.target.checked; redraw(); });
  part("stretch").addEventListener("change", (event) => { player.stretch(event.target.checked); moved(); });
  part("reset").addEventListener("click", () => reset());
  for (const button of root.querySelectorAll("[data-view]")) {
    button.addEventListener("click", () => player.view(button.dataset.view));
  }
  for (const button of root.querySelectorAll("[data-fit]")) {
    button.addEventListener("click", () => player.fit(button.dataset.fit));
  }
  if (!data.surfaces.length) part("surfaces-label").hidden = true;

  function moved() {
    stage.moved = true;
    redraw();
  }
  function toggle() {
    if (clock.playing) clock.pause(); else clock.play();
  }
  function setColour(mode) {
    stage.colour = mode;
    ways.shadeBy(mode);
    part("colour").value = mode;
    root.dataset.colour = mode;
    showLegend(part("legend"), mode, data, ways, theme);
    redraw();
  }
  function setTrail(value) {
    // finer where it is short: the whole run at the far end
    stage.trail = duration * (value / 100) ** 2;
    trail.value = value;
    trailWords.textContent = value > 0 ? spelled(stage.trail, "s", 2) : "none";
    redraw();
  }
  function reset() {
    setTrail(player.start.trail);
    setColour("cloud");
    for (const [name, value] of [["surfaces", true], ["follow", false], ["loop", false]]) part(name).checked = value;
    Object.assign(stage, { showSurfaces: true, follow: false });
    Object.assign(clock, { loop: false, speed: 1 });
    part("speed").value = "1.0";
    part("stretch").checked = player.start.stretch;
    player.stretch(player.start.stretch);
    player.view("oblique", player.start.fit);
  }
  function step(by) {
    clock.pause();
    const f = ways.frameAt(clock.time), on = clock.time > ways.time[f] && by < 0 ? 1 : 0;
    clock.seek(ways.time[Math.min(Math.max(f + by + on, 0), ways.k - 1)]);
  }
  function onArrows(event) {
    const by = { ArrowLeft: -1, ArrowDown: -1, ArrowRight: 1, ArrowUp: 1, PageDown: -10, PageUp: 10 }[event.key];
    if (by && !event.ctrlKey && !event.altKey && !event.metaKey) { event.preventDefault(); step(by); }
  }

  function showState() {
    play.textContent = clock.playing ? "Pause" : "Play";
    play.setAttribute("aria-pressed", String(clock.playing));
    slider.value = clock.time;
    const text = `${(clock.time / scale.factor).toFixed(decimals(duration / scale.factor))} ${scale.unit}`;
    slider.setAttribute("aria-valuetext", text);
    read.textContent = text;
    Object.assign(root.dataset, { time: clock.time, playing: clock.playing });
    clearTimeout(waiting);
    if (!clock.playing) waiting = setTimeout(speak, 250);
  }
  function decimals(span) {
    return Math.max(0, digits - 1 - Math.floor(Math.log10(span || 1)));
  }
  function speak() {
    if (clock.playing || spokenFor === clock.time) return;
    spokenFor = clock.time;
    words.textContent = sentence(player, clock.time);
  }
  return { toggle, step, onArrows, setColour, setTrail, reset, showState, moved, speak };
}

function sentence(player, t) {
  const { data, ways, stage } = player;
  let there = 0, lost = 0, waiting = 0;
  for (const state of stage.now.state) {
    if (state === THERE) there++; else if (state === LOST) lost++; else waiting++;
  }
  const whole = ways.n === data.clouds.reduce((sum, cloud) => sum + cloud.count, 0);
  const all = `${counted(ways.n)} charge${ways.n === 1 ? "" : "s"}${whole ? "" : " shown"}`;
  const said = [`At ${spelled(t, "s", 4)}: ${there === ways.n ? `all ${all} there` : `of ${all} ${counted(there)} there`}`];
  if (lost) said.push(`${counted(lost)} lost`);
  if (waiting) said.push(`${counted(waiting)} not born yet`);
  const { groups } = data.curves;
  if (groups.length) {
    const time = player.curveTime || (player.curveTime = numbers(data.curves.time));
    const size = player.curveSize || (player.curveSize = groups[0].size.map(numbers));
    let i = 0;
    while (i < time.length - 1 && time[i + 1] <= t * (1 + 1e-12)) i++;
    if (isFinite(size[0][i])) {
      said.push(`rms size of all ${size.map((values, axis) => `${"xyz"[axis]} ${spelled(values[i], "m")}`).join(", ")}`);
    }
  }
  return said.join("; ") + ".";
}
