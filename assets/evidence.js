/* What the exploration was worth, on the Lag page: long work asked for chunk by chunk, so that
   dragging never waits for it; progress, cancel, and the charts of the fold-outs. */
(function () {
  "use strict";
  const pricewake = window.pricewake;
  const WORDS = {
    search: "Searching the map against unrelated drivers",
    shift_set: "Looking for shifts that fit as well",
    directions: "Searching both directions",
    opinions: "Asking other methods",
    stability: "Following the slope through time",
    responses: "Searching one response after another",
  };
  const work = { running: null, turn: 0, stopped: new Set(), refused: new Set() };
  const byId = (id) => document.getElementById(id);

  function say(kind, done, total) {
    const place = byId("lag-work");
    if (!place) return;
    place.hidden = kind === null;
    if (kind === null) return;
    const stopped = done === null;
    byId("lag-progress").hidden = stopped;
    byId("lag-cancel").hidden = stopped;
    byId("lag-resume").hidden = !stopped;
    byId("lag-progress-words").textContent = stopped ? "The search was stopped." : `${WORDS[kind]}${total > 1 ? `, ${done} of ${total}` : ""}`;
    if (!stopped) { byId("lag-progress").max = total; byId("lag-progress").value = done; }
  }

  /* What was stopped stays so while sliders move: another cell is the same search. */
  const stopName = (kind) => `${kind} ${pricewake.lag.question}`;

  /* Ask for one chunk after another until the work is done, the question changes or it is stopped. */
  async function run(kind, query) {
    const name = `${kind}?${query}`;
    if (work.running === name) return;
    work.running = name;
    const turn = (work.turn += 1);
    const over = () => work.running !== name || work.turn !== turn;
    say(kind, 0, 1);
    try {
      for (;;) {
        const answer = await fetch(`/lag/work/${name}`);
        const progress = await answer.json();
        if (over()) return;
        if (!answer.ok) { work.refused.add(name); break; } // the page is told why with the next answer
        say(kind, progress.done, progress.total);
        if (progress.done === progress.total) break;
      }
    } catch (_) {
      if (over()) return;
      byId("lag-progress-words").textContent = "The program does not answer; is it still running?";
      work.running = null;
      return;
    }
    work.running = null;
    say(null);
    if (byId("lag-sentence")) window.dash_clientside.set_props("lag-tick", { data: Date.now() });
  }

  /* A button that was pressed and made anew keeps the focus. */
  function refocus() {
    const { refocus: selector } = pricewake.lag;
    if (!selector) return;
    const button = document.querySelector(selector);
    if (button && document.activeElement === document.body) button.focus({ preventScroll: true });
  }

  function adopt(data) {
    if (!data) return window.dash_clientside.no_update;
    const page = pricewake.lag;
    if (!page.state || page.answerable(data.state) !== page.answerable(page.state)) {
      return window.dash_clientside.no_update; // the hand has moved on; its own answer is coming
    }
    page.known = data;
    document.querySelector(".lag-page").classList.remove("stale");
    for (const place of document.querySelectorAll(".place")) {
      const name = place.id.slice("place-".length);
      place.hidden = !data.figures[name];
      if (data.figures[name] && place.closest("details").open) pricewake.theme.show(`lag-${name}`, data.figures[name]);
    }
    page.layOver(data);
    setTimeout(refocus, 0);
    page.peaks = { cell: page.cellName(), traces: data.peaks };
    if (JSON.stringify(data.peaks) !== page.peaksShown && !page.busy()) page.showTime();
    const query = page.query();
    const jobs = data.jobs.filter((kind) => !work.refused.has(`${kind}?${query}`));
    const next = jobs.find((kind) => !work.stopped.has(stopName(kind)));
    if (next) run(next, query);
    else {
      work.running = null;
      if (jobs.length) say(jobs[0], null); else say(null);
    }
    return window.dash_clientside.no_update;
  }

  document.addEventListener("click", (event) => {
    const page = pricewake.lag;
    if (event.target.id === "lag-cancel" && work.running) {
      const [kind] = work.running.split("?");
      work.stopped.add(stopName(kind));
      work.running = null;
      say(kind, null);
    }
    if (event.target.id === "lag-resume") {
      work.stopped.clear();
      if (byId("lag-sentence")) window.dash_clientside.set_props("lag-tick", { data: Date.now() });
    }
    const episode = event.target.closest && event.target.closest("[data-without]");
    if (episode) {
      page.state = { ...page.state, without: episode.dataset.without };
      page.publish();
    }
  });

  document.addEventListener(
    "toggle",
    (event) => {
      if (!event.target.dataset || !event.target.dataset.fold) return;
      const open = [...document.querySelectorAll("details[data-fold]")].filter((fold) => fold.open);
      window.dash_clientside.set_props("lag-open", { data: open.map((fold) => fold.dataset.fold) });
    },
    true,
  );

  window.dash_clientside = Object.assign({}, window.dash_clientside, { evidence: { adopt } });
  pricewake.work = work;
})();
