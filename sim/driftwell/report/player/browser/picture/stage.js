// The picture: layers of surfaces kept while the eye rests, trails and charges drawn each time.
const MOST_PIXELS = 1.7e6;

function makeStage(canvas, data, ways, theme) {
  const context = canvas.getContext("2d", { alpha: false });
  const camera = makeCamera(), surfaces = makeSurfaces(data);
  const now = ways.room(), seen = new Float64Array(3 * ways.n);
  const order = new Float64Array(ways.n);
  const stage = {
    canvas, camera, surfaces, now, frames: 0, colour: "cloud", trail: 0, showSurfaces: true, follow: false,
    ratio: 1, moved: true,
  };
  let image, front, back, frontCanvas, frontImage;

  stage.resize = () => {
    const box = canvas.getBoundingClientRect();
    let ratio = Math.min(window.devicePixelRatio || 1, 2);
    ratio = Math.min(ratio, Math.sqrt(MOST_PIXELS / Math.max(box.width * box.height, 1)));
    const width = Math.max(16, Math.round(box.width * ratio)), height = Math.max(16, Math.round(box.height * ratio));
    if (canvas.width === width && canvas.height === height && image) return;
    canvas.width = width;
    canvas.height = height;
    stage.ratio = ratio;
    Object.assign(camera, { width, height });
    image = context.createImageData(width, height);
    stage.picture = { pixels: new Uint32Array(image.data.buffer), width, height };
    back = { sheet: makeSheet(width, height), pixels: new Uint32Array(width * height), width, height };
    frontCanvas = document.createElement("canvas");
    Object.assign(frontCanvas, { width, height });
    frontImage = new ImageData(width, height);
    front = { sheet: makeSheet(width, height), pixels: new Uint32Array(frontImage.data.buffer), width, height };
    stage.moved = true;
  };

  // how charges look, and in what shape, by what colours stand for
  stage.look = () => {
    const fates = stage.colour === "fate", toned = stage.colour in data.tones;
    const kind = stage.colour === "species" ? (c) => ways.species[ways.cloud[c]] : (c) => ways.cloud[c];
    const palette = theme.palette.map((c) => word(c)), tones = theme.tones.map((c) => word(c));
    const pale = word(theme.pale);
    const tone = (shade) => (shade === 255 ? pale : tones[Math.min(TONES.light.length - 1, shade * TONES.light.length / 255 | 0)]);
    return {
      colour: (c, shade) => (toned ? tone(shade) : fates ? palette[fateLook(ways.wall[c])[0]] : palette[kind(c) % palette.length]),
      shape: (c) => (fates ? SHAPES[fateLook(ways.wall[c])[1]] : toned ? "disc" : SHAPES[Math.floor(kind(c) / palette.length) % SHAPES.length]),
    };
  };

  stage.draw = (t) => {
    ways.at(t, now);
    if (stage.follow) {
      const centre = centreOf(ways, now);
      if (centre && centre.some((x, axis) => x !== camera.target[axis])) {
        camera.target = centre;
        stage.moved = true;
      }
    }
    camera.aim();
    if (stage.moved) {
      stage.moved = false;
      drawSurfaces(stage.showSurfaces ? surfaces : { all: [], spine: null }, camera, theme, back, front);
      frontCanvas.getContext("2d").putImageData(frontImage, 0, 0);
    }
    const { picture } = stage;
    picture.pixels.set(back.pixels);
    const look = stage.look();
    drawTrails(picture, camera, ways, now, t, stage.trail, look, ways.n > 400 ? 110 : 190);
    drawCharges(look);
    context.putImageData(image, 0, 0);
    context.drawImage(frontCanvas, 0, 0);
    drawOverlay(context, camera, theme, stage.ratio, stage.showSurfaces ? surfaces : null);
    stage.frames++;
  };

  function drawCharges(look) {
    const n = ways.n, place = now.place;
    let nearest = Infinity, farthest = 0;
    for (let c = 0; c < n; c++) {
      const before = camera.project(place[3 * c], place[3 * c + 1], place[3 * c + 2], seen, 3 * c);
      const depth = before && place[3 * c] === place[3 * c] ? seen[3 * c + 2] : NaN;
      seen[3 * c + 2] = depth;
      if (depth < nearest) nearest = depth;
      if (depth > farthest) farthest = depth;
    }
    const range = Math.max(farthest - nearest, 1e-3 * farthest) || 1;
    for (let c = 0; c < n; c++) {
      const depth = seen[3 * c + 2];
      // the farthest first; what cannot be seen at the end
      order[c] = depth === depth ? Math.round((farthest - depth) / range * 1e6) * n + c : Infinity;
    }
    order.sort();
    const base = stage.ratio * (n > 1000 ? 2.3 : n > 300 ? 2.7 : n > 60 ? 3.6 : 5.5);
    const rim = word(mixed(theme.ink, theme.paper, theme.dark ? 0.9 : 0.15)), pale = word(theme.pale);
    const { depth: behind } = back.sheet, { width, height } = back;
    for (let place = 0; place < n && order[place] < Infinity; place++) {
      const c = order[place] % n, x = seen[3 * c], y = seen[3 * c + 1], depth = seen[3 * c + 2];
      if (!(x > -20 && y > -20 && x < width + 20 && y < height + 20)) continue;
      const state = now.state[c];
      if (state === NOT_YET && stage.colour !== "fate") continue;
      const size = base * Math.min(Math.max(camera.distance / depth, 0.55), 2.2);
      const away = (depth - nearest) / range;
      let alpha = 256 - 90 * Math.min(away, 1);
      const i = Math.floor(y) * width + Math.floor(x);
      if (x >= 0 && y >= 0 && x < width && y < height && behind[i] * 0.99 > 1 / depth) alpha *= 0.3;
      const colour = look.colour(c, now.shade[c]);
      if (state === NOT_YET) drawMark(stage.picture, x, y, "ring", size, pale, pale, 110);
      else if (state === LOST) drawMark(stage.picture, x, y, "cross", 1.15 * size, colour, colour, 0.85 * alpha);
      else drawMark(stage.picture, x, y, look.shape(c), size, colour, rim, alpha);
    }
  }
  return stage;
}

function fateLook(wall) {
  // number of colour and of shape
  if (wall === -1) return [0, 0];
  if (wall < 0) return [6, 4];
  return [1 + (wall % 5), 1 + (wall % 4)];
}
