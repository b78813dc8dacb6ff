// Trails: the way of each charge over the time just past, fading towards its beginning.
const MOST_SEGMENTS = 60000;

function drawTrails(picture, camera, ways, now, t, length, look, alpha) {
  const { n, k, time, place, born, lost, cell } = ways;
  if (!(length > 0)) return;
  const begin = t - length, head = ways.frameAt(t), tail = ways.frameAt(Math.max(begin, ways.first));
  const stride = Math.max(1, Math.ceil((head - tail + 1) * n / MOST_SEGMENTS));
  const a = [0, 0, 0], b = [0, 0, 0];
  for (let c = 0; c < n; c++) {
    if (now.state[c] === NOT_YET || lost[c] <= begin) continue;
    const colour = look.colour(c, now.shade[c]);
    let x = now.place[3 * c], y = now.place[3 * c + 1], z = now.place[3 * c + 2];
    if (x !== x) continue;
    let seen = camera.project(x, y, z, a, 0), when = Math.min(t, lost[c]);
    let f = lost[c] <= t ? ways.frameAt(lost[c]) : head;
    // frames are taken at the same numbers always, so that a trail does not tremble
    let next = stride > 1 ? f - (f % stride) : f;
    let going = true;
    while (going) {
      let px, py, pz, then;
      if (next < 0 || time[next] <= begin || time[next] < born[c]) {
        going = false;
        const earliest = Math.max(begin, born[c], ways.first);
        const i = 3 * (c * k + Math.max(next, 0));
        const from = time[Math.max(next, 0)] < born[c];
        const qx = from ? ways.birthplace[3 * c] : place[i];
        const qy = from ? ways.birthplace[3 * c + 1] : place[i + 1];
        const qz = from ? ways.birthplace[3 * c + 2] : place[i + 2];
        const since = from ? born[c] : time[Math.max(next, 0)];
        const part = when > since ? Math.min(Math.max((when - earliest) / (when - since), 0), 1) : 0;
        px = x + part * (qx - x); py = y + part * (qy - y); pz = z + part * (qz - z);
        then = earliest;
      } else {
        const i = 3 * (c * k + next);
        px = place[i]; py = place[i + 1]; pz = place[i + 2]; then = time[next];
      }
      if (px !== px) {
        if (!going) break;
        next -= stride;
        continue;
      }
      const jumps = cell && Math.abs((cell.axis === 0 ? px - x : cell.axis === 1 ? py - y : pz - z)) > 0.5 * cell.length;
      const visible = camera.project(px, py, pz, b, 0);
      if (seen && visible && !jumps && then < when) {
        const first = alpha * Math.max(0, 1 - (t - when) / length), last = alpha * Math.max(0, 1 - (t - then) / length);
        drawLine(picture, a[0], a[1], b[0], b[1], colour, first, last);
      }
      a[0] = b[0]; a[1] = b[1]; a[2] = b[2];
      x = px; y = py; z = pz; seen = visible; when = then; next -= stride;
    }
  }
}
