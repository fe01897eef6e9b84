/* A page that the server answers whole: a control changes the state, the server answers with words
   and charts. app/pages/plain.py is the other half. */
(function () {
  "use strict";
  const pricewake = window.pricewake;
  const { controls } = pricewake;
  const page = { data: null, state: null, timer: 0, waiting: null };
  const DRAGGING = 120; // milliseconds between answers while a slider is dragged

  const root = () => document.querySelector("[data-page]");

  const key = (state) => JSON.stringify(Object.entries(state).sort(([a], [b]) => (a < b ? -1 : 1)));

  function send() {
    page.timer = 0;
    page.waiting = key(page.state);
    if (root()) controls.publish(root().dataset.page, page.state, page.data.defaults);
  }

  function change(field, element, wait) {
    if (!root() || !page.state) return;
    page.state = { ...page.state, [field]: controls.valueOf(element) };
    clearTimeout(page.timer);
    page.timer = setTimeout(send, wait);
  }

  /* A chart that is drawn is not sent again. Answers may cross, so the last ones are kept. */
  const CHARTS_KEPT = 12;

  function kept(place, mark, chart) {
    const charts = (place.charts = place.charts || new Map());
    const text = chart || charts.get(mark);
    charts.delete(mark);
    if (text) charts.set(mark, text);
    if (charts.size > CHARTS_KEPT) charts.delete(charts.keys().next().value);
    return text;
  }

  /* What the server answered: {asked, state, defaults, sentence, subtitles, source, stem, figures}. */
  function adopt(data) {
    if (!data || !root()) return window.dash_clientside.no_update;
    const name = root().dataset.page;
    page.data = data;
    const late = page.waiting && data.asked && key(data.asked) !== page.waiting;
    if (!page.timer && !late) { // else the hand has moved on, and its own answer is coming
      page.waiting = null;
      page.state = data.state;
      for (const [name, value] of Object.entries(data.state)) {
        const field = data.asked && data.asked[name] !== value && controls.field(name);
        if (field) field.value = value; // what is shown is not what was asked for
      }
      controls.publish(name, page.state, data.defaults, false);
    }
    const drawn = {};
    let missed = false;
    for (const place of root().querySelectorAll(".plain-plot")) {
      const view = place.id.slice(name.length + 1, -"-place".length);
      const { mark, chart } = (data.figures || {})[view] || {};
      const section = place.closest(".view");
      place.hidden = !mark;
      if (section) section.querySelector(".save").hidden = !mark;
      const text = kept(place, mark, chart);
      if (mark && text) drawn[view] = mark;
      else missed = missed || Boolean(mark);
      if (mark === place.drawn) continue;
      place.drawn = mark;
      if (text) pricewake.theme.show(`${name}-${view}`, JSON.parse(text));
      else pricewake.theme.figures.delete(`${name}-${view}`);
    }
    window.dash_clientside.set_props(`${name}-drawn`, { data: drawn });
    if (missed) window.dash_clientside.set_props(`${name}-tick`, { data: Date.now() }); // to be sent it after all
    work(name, data);
    return window.dash_clientside.no_update;
  }

  /* Long work: one chunk after another until it is done, the state changes or it is stopped. */
  const job = { running: null, stopped: new Set() };

  function say(name, kind, done, total) {
    const at = (part) => document.getElementById(`${name}-${part}`);
    if (!at("work")) return;
    at("work").hidden = kind === null;
    if (kind === null) return;
    const stopped = done === null;
    for (const part of ["progress", "cancel"]) at(part).hidden = stopped;
    at("resume").hidden = !stopped;
    const words = (page.data.jobWords || {})[kind] || kind.replaceAll("_", " ");
    at("progress-words").textContent = stopped ? `Stopped: ${words}.` : `${words}${total > 1 ? `, ${done} of ${total}` : ""}`;
    if (!stopped) { at("progress").max = total; at("progress").value = done; }
  }

  function work(name, data) {
    const query = controls.query(data.state, data.defaults);
    const wanted = (data.jobs || []).map((kind) => [kind, `/${name}/work/${kind}?${query}`]);
    const next = wanted.find(([, address]) => !job.stopped.has(address));
    if (next) run(name, ...next);
    else {
      job.running = null;
      if (wanted.length) say(name, wanted[0][0], null); else say(name, null);
    }
  }

  async function run(name, kind, address) {
    if (job.running === address) return;
    job.running = address;
    say(name, kind, 0, 1);
    try {
      for (;;) {
        const answer = await fetch(address);
        const progress = await answer.json();
        if (job.running !== address) return;
        if (!answer.ok) { job.stopped.add(address); break; }
        say(name, kind, progress.done, progress.total);
        if (progress.done === progress.total) break;
      }
    } catch (_) {
      if (job.running === address) job.stopped.add(address);
    }
    if (job.running !== address) return;
    job.running = null;
    say(name, null);
    if (document.querySelector(`[data-page="${name}"]`)) window.dash_clientside.set_props(`${name}-tick`, { data: Date.now() });
  }

  document.addEventListener("click", (event) => {
    if (!root() || !page.data) return;
    const name = root().dataset.page;
    if (event.target.id === `${name}-cancel` && job.running) {
      job.stopped.add(job.running);
      job.running = null;
      work(name, page.data);
    }
    if (event.target.id === `${name}-resume`) {
      job.stopped.clear();
      work(name, page.data);
    }
  });

  controls.on("change", (field, element) => change(field, element, 0));
  controls.on("input", (field, element) => { if (element.type === "range") change(field, element, DRAGGING); });
  function choose(name, value) {
    page.state = { ...page.state, [name]: value };
    const field = controls.field(name);
    if (field) field.value = value;
    send();
  }
  document.addEventListener("click", (event) => {
    const chosen = event.target.closest && event.target.closest("[data-set]");
    if (chosen && root() && page.state) choose(chosen.dataset.set, chosen.dataset.value);
  });

  window.dash_clientside = Object.assign({}, window.dash_clientside, { plain: { adopt } });
  Object.assign(page, {
    choose,
    sentence: () => page.data.sentence,
    subtitle: (view) => (page.data.subtitles || {})[view] || "",
    source: () => page.data.source,
    stem: (view, letters) => `${view}-${letters(page.data.stem).slice(0, 100)}`,
    busy: () => Boolean(page.timer || page.waiting || job.running),
  });
  pricewake.plain = page;
})();
