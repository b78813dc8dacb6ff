// The eye: it turns about a target, y upwards, and sees in perspective. Axes may be stretched.
const VIEWS = {
  oblique: [-0.95, 0.36], x: [-Math.PI / 2, 0], y: [-Math.PI / 2, Math.PI / 2], z: [0, 0],
};
const OPENING = 28 * Math.PI / 180;
const STEEPEST = Math.PI / 2;

function makeCamera() {
  const camera = {
    target: [0, 0, 0], azimuth: 0, elevation: 0, distance: 1, stretch: [1, 1, 1],
    width: 1, height: 1, focal: 1, right: [1, 0, 0], up: [0, 1, 0], toward: [0, 0, 1], near: 0.01,
    m: new Float64Array(12),
  };

  camera.aim = () => {
    // rows of m: right, up, toward, each with the stretch in it, and the target's share
    const { azimuth: a, elevation: e, stretch: s, target: t } = camera;
    const ca = Math.cos(a), sa = Math.sin(a), ce = Math.cos(e), se = Math.sin(e);
    camera.right = [ca, 0, -sa];
    camera.up = [-sa * se, ce, -ca * se];
    camera.toward = [sa * ce, se, ca * ce];
    [camera.right, camera.up, camera.toward].forEach((row, r) => {
      let offset = 0;
      for (let axis = 0; axis < 3; axis++) {
        camera.m[4 * r + axis] = row[axis] * s[axis];
        offset -= row[axis] * s[axis] * t[axis];
      }
      camera.m[4 * r + 3] = offset;
    });
    camera.focal = 0.5 * Math.min(camera.height, 1.3 * camera.width) / Math.tan(OPENING / 2);
    camera.near = 0.02 * camera.distance;
  };

  // x, y in pixels and depth into out at place i; whether it lies before the eye
  camera.project = (x, y, z, out, i) => {
    const m = camera.m;
    const depth = camera.distance - (m[8] * x + m[9] * y + m[10] * z + m[11]);
    out[i + 2] = depth;
    if (depth < camera.near) return false;
    const scale = camera.focal / depth;
    out[i] = 0.5 * camera.width + scale * (m[0] * x + m[1] * y + m[2] * z + m[3]);
    out[i + 1] = 0.5 * camera.height - scale * (m[4] * x + m[5] * y + m[6] * z + m[7]);
    return true;
  };

  camera.turn = (azimuth, elevation) => {
    camera.azimuth = azimuth;
    camera.elevation = Math.min(Math.max(elevation, -STEEPEST), STEEPEST);
  };

  camera.shift = (dx, dy) => {
    const scale = camera.distance / camera.focal;
    for (let axis = 0; axis < 3; axis++) {
      const by = -dx * camera.right[axis] + dy * camera.up[axis];
      camera.target[axis] += by * scale / camera.stretch[axis];
    }
  };

  camera.zoom = (factor) => { camera.distance *= factor; };

  // look at a box from where the eye is turned, so that it fills the picture
  camera.fit = (low, high) => {
    camera.aim();
    camera.target = low.map((x, axis) => 0.5 * (x + high[axis]));
    const half = low.map((x, axis) => 0.5 * (high[axis] - x) * camera.stretch[axis]);
    const wide = 0.5 * camera.width / camera.focal, tall = 0.5 * camera.height / camera.focal;
    let distance = 0;
    for (let corner = 0; corner < 8; corner++) {
      const p = half.map((x, axis) => ((corner >> axis) & 1 ? x : -x));
      const dot = (row) => p[0] * row[0] + p[1] * row[1] + p[2] * row[2];
      const reach = Math.max(Math.abs(dot(camera.right)) / wide, Math.abs(dot(camera.up)) / tall);
      distance = Math.max(distance, 1.08 * reach + dot(camera.toward));
    }
    camera.distance = distance || 1;
    camera.aim();
  };
  return camera;
}
