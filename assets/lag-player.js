/* The player sweeps window or shift from end to end and back; a scrub beside it goes to any place.
   Who asks the system for less motion gets single steps instead. */
(function () {
  "use strict";
  const pricewake = (window.pricewake = window.pricewake || {});
  const { controls } = pricewake;
  const byId = (id) => document.getElementById(id);
  const player = { on: false, way: 1, last: 0, owed: 0, moved: 0 };
  const still = window.matchMedia("(prefers-reduced-motion: reduce)");

  const along = () => byId("play-along").value;
  const bounds = () => pricewake.lag.data[`${along()}s`];

  function label() {
    const button = byId("play");
    if (button) pricewake.words.write(button, still.matches ? "Step" : player.on ? "Pause" : "Play");
  }

  /* The scrub has the bounds and the place of what is swept. */
  function follow() {
    const scrub = controls.field("scrub"), { state, data } = pricewake.lag;
    if (!scrub || !state || !data || data.error || !byId("play-along")) return;
    const [low, high] = bounds();
    if (Number(scrub.min) !== low) scrub.min = low;
    if (Number(scrub.max) !== high) scrub.max = high;
    if (Number(scrub.value) !== state[along()]) scrub.value = state[along()];
    scrub.setAttribute("aria-valuetext", pricewake.words.counted(state[along()], data.noun));
    label();
  }

  function step() {
    const [low, high] = bounds(), at = pricewake.lag.state[along()];
    if (low === high) return;
    if (at >= high) player.way = -1;
    if (at <= low) player.way = 1;
    pricewake.lag.move({ [along()]: at + player.way });
    player.moved += 1;
  }

  function tick(now) {
    if (!player.on) return;
    if (!byId("play")) { stop(); return; } // another page
    player.owed += ((now - player.last) / 1000) * Number(byId("play-speed").value);
    player.last = now;
    if (player.owed >= 1) {
      player.owed = Math.min(player.owed - 1, 1); // a slow machine skips time, not cells
      step();
    }
    requestAnimationFrame(tick);
  }

  function play() {
    const { data } = pricewake.lag;
    if (player.on || !data || data.error) return;
    if (still.matches) {
      step();
      pricewake.lag.settle();
      return;
    }
    Object.assign(player, { on: true, last: performance.now(), owed: 0 });
    pricewake.lag.hold(true);
    label();
    requestAnimationFrame(tick);
  }

  function stop() {
    if (!player.on) return false;
    player.on = false;
    pricewake.lag.hold(false);
    label();
    return true;
  }

  const toggle = () => (player.on ? stop() : play());

  document.addEventListener("click", (event) => {
    if (event.target.id === "play") toggle();
  });
  document.addEventListener("change", (event) => {
    if (event.target.id === "play-along") follow();
  });
  controls.on("input", (field, element) => {
    if (field !== "scrub") return;
    stop();
    pricewake.lag.move({ [along()]: Number(element.value) });
  });
  document.addEventListener("toggle", (event) => {
    if (event.target.id === "tool-player" && !event.target.open) stop();
  }, true);
  still.addEventListener("change", () => { stop(); label(); });

  pricewake.player = { play, stop, toggle, follow, state: player };
})();
