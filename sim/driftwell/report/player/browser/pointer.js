// Turning, shifting and zooming by mouse, touch and keys.
const TURN = 0.0085, KEY_TURN = 0.08, KEY_ZOOM = 1.15;

function listenToPointers(player) {
  const { stage } = player, { canvas, camera } = stage;
  const down = new Map();
  let apart = 0;

  canvas.addEventListener("pointerdown", (event) => {
    canvas.setPointerCapture(event.pointerId);
    down.set(event.pointerId, [event.clientX, event.clientY]);
    apart = spread(down);
    canvas.focus({ preventScroll: true });
  });
  canvas.addEventListener("pointermove", (event) => {
    const before = down.get(event.pointerId);
    if (!before) return;
    const dx = event.clientX - before[0], dy = event.clientY - before[1];
    down.set(event.pointerId, [event.clientX, event.clientY]);
    if (down.size > 1) {
      const now = spread(down);
      if (apart > 0 && now > 0) camera.zoom(apart / now);
      apart = now;
      camera.shift(dx * stage.ratio / down.size, dy * stage.ratio / down.size);
    } else if (event.shiftKey || event.buttons & 6) {
      camera.shift(dx * stage.ratio, dy * stage.ratio);
    } else {
      camera.turn(camera.azimuth - dx * TURN, camera.elevation + dy * TURN);
    }
    player.controls.moved();
  });
  for (const name of ["pointerup", "pointercancel"]) {
    canvas.addEventListener(name, (event) => { down.delete(event.pointerId); apart = spread(down); });
  }
  canvas.addEventListener("contextmenu", (event) => event.preventDefault());
  canvas.addEventListener("wheel", (event) => {
    // the page scrolls as ever until the picture has been chosen
    if (document.activeElement !== canvas && !event.ctrlKey) return;
    event.preventDefault();
    camera.zoom(Math.exp(Math.min(Math.max(event.deltaY, -200), 200) * 0.0015));
    player.controls.moved();
  }, { passive: false });

  canvas.addEventListener("keydown", (event) => {
    if (event.ctrlKey || event.altKey || event.metaKey) return;
    const action = keyAction(player, event.key);
    if (!action) { player.controls.onArrows(event); return; }
    event.preventDefault();
    action();
  });
}

function keyAction(player, key) {
  const { clock, controls } = player, { camera } = player.stage;
  const turn = (a, e) => () => { camera.turn(camera.azimuth + a, camera.elevation + e); controls.moved(); };
  const zoom = (factor) => () => { camera.zoom(factor); controls.moved(); };
  return {
    " ": () => controls.toggle(),
    Home: () => { clock.pause(); clock.seek(clock.first); },
    End: () => { clock.pause(); clock.seek(clock.last); },
    a: turn(KEY_TURN, 0), d: turn(-KEY_TURN, 0), w: turn(0, KEY_TURN), s: turn(0, -KEY_TURN),
    "+": zoom(1 / KEY_ZOOM), "=": zoom(1 / KEY_ZOOM), "-": zoom(KEY_ZOOM),
    o: () => player.view("oblique"), x: () => player.view("x"), y: () => player.view("y"), z: () => player.view("z"),
    f: () => player.fit("all"),
  }[key.length === 1 ? key.toLowerCase() : key];
}

function spread(down) {
  const [one, other] = [...down.values()];
  return other ? Math.hypot(one[0] - other[0], one[1] - other[1]) : 0;
}
