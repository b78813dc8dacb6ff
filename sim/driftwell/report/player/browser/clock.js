// Time in the run against time at the wall: at speed 1 all of it passes in ten seconds.
const WHOLE = 10;

function makeClock(first, last, moved) {
  const clock = { time: first, first, last, playing: false, speed: 1, loop: false };
  let before = null;

  clock.seek = (time) => {
    clock.time = Math.min(Math.max(time, first), last);
    moved();
  };
  clock.play = () => {
    if (clock.playing || last <= first) return;
    if (clock.time >= last) clock.time = first;
    clock.playing = true;
    before = null;
    requestAnimationFrame(step);
    moved();
  };
  clock.pause = () => {
    clock.playing = false;
    moved();
  };

  function step(stamp) {
    if (!clock.playing) return;
    if (before !== null) {
      const by = Math.min((stamp - before) / 1000, 0.25) * clock.speed * (last - first) / WHOLE;
      clock.time += by;
      if (clock.time >= last) {
        if (clock.loop) clock.time = first + ((clock.time - first) % (last - first));
        else { clock.time = last; clock.playing = false; }
      }
      moved();
    }
    before = stamp;
    if (clock.playing) requestAnimationFrame(step);
  }
  return clock;
}
