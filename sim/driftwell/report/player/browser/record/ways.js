// Where each charge is at any time: straight lines between the records, from birth to loss.
const NOT_YET = 0, THERE = 1, LOST = 2;
const NOWHERE = 65535, STEPS = 65534;

function makeWays(data) {
  const time = numbers(data.time), cloud = numbers(data.cloud), id = numbers(data.id);
  const n = cloud.length, k = time.length;
  const number = numbers(data.place.number), low = numbers(data.place.low);
  const span = numbers(data.place.span);
  const tones = Object.fromEntries(Object.entries(data.tones).map(([mode, each]) => [mode, numbers(each.number)]));
  let shade = tones.energy;
  const place = new Float64Array(3 * n * k);
  for (let c = 0, i = 0; c < n; c++) {
    for (let f = 0; f < k; f++) {
      for (let a = 0; a < 3; a++, i++) {
        const q = number[i];
        place[i] = q === NOWHERE ? NaN : low[3 * c + a] + (q / STEPS) * span[3 * c + a];
      }
    }
  }
  const born = numbers(data.born), birthplace = numbers(data.birthplace);
  const lost = numbers(data.lost), end = numbers(data.end), wall = numbers(data.wall);
  const cell = data.cell;

  function frameAt(t) {
    let lowest = 0, highest = k - 1;
    while (lowest < highest) {
      const middle = (lowest + highest + 1) >> 1;
      if (time[middle] <= t) lowest = middle; else highest = middle - 1;
    }
    return lowest;
  }

  // where everything is at time t: x, y, z in out.place, what has become of it in out.state
  function at(t, out) {
    const f = frameAt(t), g = Math.min(f + 1, k - 1);
    for (let c = 0; c < n; c++) {
      const o = 3 * c, i = 3 * (c * k + f), j = 3 * (c * k + g);
      out.shade[c] = shade[c * k + f];
      if (t < born[c]) {
        out.state[c] = NOT_YET;
        for (let a = 0; a < 3; a++) out.place[o + a] = birthplace[o + a];
        continue;
      }
      if (t >= lost[c]) {
        out.state[c] = LOST;
        for (let a = 0; a < 3; a++) out.place[o + a] = end[o + a];
        continue;
      }
      out.state[c] = THERE;
      let from = place, p = i, begin = time[f], to = place, q = j, stop = time[g];
      if (place[i] !== place[i]) { from = birthplace; p = o; begin = born[c]; }
      if (place[j] !== place[j]) { to = end; q = o; stop = lost[c]; }
      if (out.shade[c] === 255) out.shade[c] = shade[c * k + g];
      const w = stop > begin ? Math.min(Math.max((t - begin) / (stop - begin), 0), 1) : 0;
      for (let a = 0; a < 3; a++) {
        let step = to[q + a] - from[p + a];
        if (cell && a === cell.axis) step -= cell.length * Math.round(step / cell.length);
        let x = from[p + a] + w * (step === step ? step : 0);
        if (cell && a === cell.axis) x -= cell.length * Math.round(x / cell.length);
        out.place[o + a] = x;
      }
    }
    return out;
  }

  // what the steps of colour stand for from now on
  function shadeBy(mode) {
    shade = tones[mode] || shade;
  }
  const kinds = [...new Set(data.clouds.map((each) => each.species))];
  const species = data.clouds.map((each) => kinds.indexOf(each.species));
  const room = () => ({
    place: new Float64Array(3 * n), state: new Uint8Array(n), shade: new Uint8Array(n),
  });
  return {
    n, k, id, time, cloud, wall, born, lost, end, birthplace, place, cell, frameAt, at, room, shadeBy, kinds, species,
    first: time[0], last: time[k - 1],
  };
}

function centreOf(ways, now) {
  // the mean place of those that are there; null where none is
  const mean = [0, 0, 0];
  let count = 0;
  for (let c = 0; c < ways.n; c++) {
    if (now.state[c] !== THERE || now.place[3 * c] !== now.place[3 * c]) continue;
    for (let a = 0; a < 3; a++) mean[a] += now.place[3 * c + a];
    count++;
  }
  return count ? mean.map((x) => x / count) : null;
}
