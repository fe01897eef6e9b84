/* The Lag page in the browser: one state, two sliders, the map and the scatter linked both ways.
   A move draws at once (ghost.js); when the hand rests the charts, the address and the files follow.
   No request is made while a slider moves. */
(function () {
  "use strict";
  const pricewake = (window.pricewake = window.pricewake || {});
  const { ghost, theme, controls, words, lagCell, lagMap, lagScatter, lagTime } = pricewake;
  const RESTING = 140, HOLDING = 500; // milliseconds without a move; while the pointer is held down
  const READABLE = 90; // milliseconds between words: nobody reads numbers that change more often
  const SLIDERS = ["window", "shift", "band_place", "band_width"]; // moved by the hand
  const DRAWN_HERE = ["points", "band", "band_place", "band_width"]; // the server need not answer
  const OF_THE_CELL = ["window", "shift", "without", "pinned", "peaks", "other_responses", ...DRAWN_HERE];
  const page = { data: null, state: null, cell: null, timer: 0, frame: 0, moves: 0, held: false, words: 0, said: 0 };

  const byId = (id) => document.getElementById(id);
  const { counted, signed, write } = words;

  /* Words ------------------------------------------------------------------------------------ */

  /* A part of the headline that is a number: it leads to its slider. */
  function numberPart(name) {
    const unbroken = document.createElement("span"), button = document.createElement("button");
    unbroken.className = "unbroken";
    Object.assign(button, { type: "button", className: "number", title: `Move the ${name} slider` });
    button.onclick = () => controls.field(name).focus();
    unbroken.append(button, "");
    return unbroken;
  }

  /* Written over while only its digits change, else made anew: what is there never slides. */
  function showHeadline(parts) {
    const head = byId("lag-sentence");
    const shape = parts.join("|").replace(/\d/g, "0");
    if (head.shape !== shape || head.childNodes.length !== parts.length) {
      head.replaceChildren(...parts.map((part) => (typeof part === "string" ? document.createTextNode("") : numberPart(part[0]))));
      head.shape = shape;
    }
    parts.forEach((part, place) => {
      const there = head.childNodes[place];
      if (typeof part === "string") { if (there.data !== part) there.data = part; return; }
      write(there.firstChild, part[1]);
      if (there.lastChild.data !== part[2]) there.lastChild.data = part[2];
    });
  }

  function showWords() {
    const { state, cell, data } = page;
    showHeadline(words.sentenceParts(data, state));
    write(byId("lag-equation"), cell ? words.equation(data, cell) : "");
    write(byId("lag-readout"), words.readout(page));
    write(byId("lag-driver-words"), data.driver.name);
    write(byId("lag-response-words"), words.movedResponse(page));
    for (const [name, said] of [
      ["window", counted(state.window, data.noun)],
      ["shift", `${signed(state.shift, 0)} ${data.noun}${Math.abs(state.shift) === 1 ? "" : "s"}`],
    ]) {
      controls.field(name).setAttribute("aria-valuetext", said);
    }
  }

  function say() {
    clearTimeout(page.words);
    Object.assign(page, { words: 0, said: performance.now() });
    if (byId("lag-sentence")) showWords(); // else the page is left already
  }

  /* The words of a move: at once, or when those before could be read. */
  function saySoon() {
    const left = page.said + READABLE - performance.now();
    if (left <= 0) say();
    else if (!page.words) page.words = setTimeout(say, left);
  }

  /* A move: drawn in the next frame, latest wins ---------------------------------------------- */

  function draw() {
    page.frame = 0;
    const { window, shift } = page.state;
    page.cell = lagCell.cellAt(page.data, window, shift);
    page.overlay = lagCell.overlayAt(page.data, window, shift);
    lagMap.placeCross();
    saySoon();
    lagScatter.paint(page);
    lagTime.paint(page);
    pricewake.player.follow();
    page.moves += 1;
    page.painted = { window, shift };
  }

  /* `changes` may name window, shift and the place of the band; sliders, map and charts follow. */
  function move(changes) {
    if (!page.data || page.data.error) return;
    page.state = { ...page.state, ...changes };
    reflect(SLIDERS);
    if (page.state.without && ("window" in changes || "shift" in changes)) page.state.without = "";
    if ("window" in changes || "shift" in changes) document.querySelector(".lag-page").classList.add("stale");
    clearTimeout(page.timer);
    page.timer = 0;
    if (!page.frame) page.frame = requestAnimationFrame(() => { draw(); wait(); });
  }

  /* The rest is counted from the frame that was drawn, so that a slow machine does not redraw charts
     between two moves. */
  function wait() {
    page.timer = page.held ? 0 : setTimeout(settle, page.pressed ? HOLDING : RESTING);
  }

  /* While the player plays, nothing settles. */
  function hold(on) {
    page.held = on;
    byId("lag-readout").setAttribute("aria-live", on ? "off" : "polite");
    if (on) clearTimeout(page.timer);
    else settle();
  }

  /* Put the state into the controls that stand on the page. */
  function reflect(names) {
    for (const name of names) {
      const field = controls.field(name);
      if (field && field.value !== String(page.state[name])) field.value = page.state[name];
    }
  }

  /* The hand rests: charts, address, files ---------------------------------------------------- */

  const query = () => controls.query(page.state, page.data.defaults);

  /* The server is told of a state once. */
  function publish() {
    const text = JSON.stringify(page.state);
    controls.publish("lag", page.state, page.data.defaults, text !== page.told);
    page.told = text;
    pricewake.trail.rested();
  }

  function settle() {
    clearTimeout(page.timer);
    page.timer = 0;
    if (!page.data || page.data.error || !byId("lag-sentence")) return; // the page may be left already
    if (page.frame) { cancelAnimationFrame(page.frame); draw(); }
    if (page.words) say();
    publish();
    lagMap.layOver(page.known);
    if (page.cell) theme.show("lag-scatter", lagScatter.figure(page));
    showTime();
    whenDrawn("lag-scatter");
    whenDrawn("lag-overlay");
  }

  function showTime() {
    page.peaksShown = JSON.stringify((page.peaks && page.peaks.cell === page.cellName() && page.peaks.traces) || []);
    theme.show("lag-overlay", lagTime.figure(page));
  }

  /* Take the canvas away once the chart under it has the same numbers. */
  function whenDrawn(id) {
    const chart = ghost.chartOf(id);
    const moves = page.moves;
    if (!chart || !chart.once) return;
    chart.once("plotly_afterplot", () => {
      if (page.moves === moves) ghost.hide(id);
    });
  }

  /* Changes that the server answers: of the question, or of what folds out below. */
  function ask(changes) {
    page.state = { ...page.state, ...changes };
    reflect(Object.keys(changes));
    page.told = JSON.stringify(page.state);
    window.dash_clientside.set_props("lag-state", { data: page.state });
  }

  function put(changes) {
    page.state = { ...page.state, ...changes };
    reflect(Object.keys(changes));
    publish();
  }

  /* Another state of this page, from the history of the browser. */
  function take(state) {
    const same = asked(state) === asked(page.state);
    page.state = state;
    reflect(Object.keys(state));
    if (!same) { ask({}); return; }
    document.querySelector(".lag-page").classList.add("stale");
    draw();
    settle();
  }

  /* What the server sends ---------------------------------------------------------------------- */

  function adopt(data) {
    if (!data) return "";
    if (!data.fresh && asked(data.state) !== page.question) return window.dash_clientside.no_update;
    const before = data.fresh ? null : page.state;
    page.data = data = { ...data, figures: parsed(data.figures || {}) };
    page.question = asked(data.state);
    page.state = data.state;
    if (data.fresh) Object.assign(page, { known: null, peaks: null, closer: null, told: JSON.stringify(data.state) });
    document.querySelector(".lag-page").classList.toggle("broken", Boolean(data.error));
    if (data.error) {
      byId("lag-sentence").textContent = "Nothing to show for this choice.";
      byId("lag-readout").textContent = "";
      return pricewake.words.asSentence(data.error);
    }
    if (before) for (const name of DRAWN_HERE) page.state[name] = before[name];
    if (before && within(before.window, data.windows) && within(before.shift, data.shifts)) {
      page.state = { ...page.state, window: before.window, shift: before.shift };
    }
    for (const [name, bounds] of [["window", data.windows], ["shift", data.shifts]]) {
      const field = controls.field(name);
      [field.min, field.max] = bounds;
    }
    reflect(SLIDERS);
    page.cell = lagCell.cellAt(data, page.state.window, page.state.shift);
    page.overlay = lagCell.overlayAt(data, page.state.window, page.state.shift);
    page.laid = "";
    say();
    settle();
    pricewake.player.follow();
    if (data.fresh) pricewake.trail.begin();
    untilThere(lagMap.listen, () => ghost.chartOf("lag-surface")?.on);
    untilThere(lagScatter.listen, () => ghost.chartOf("lag-scatter")?.on);
    untilThere(lagTime.listen, () => ghost.chartOf("lag-overlay")?.on);
    return (data.notes || []).join(" ");
  }

  const parsed = (texts) => Object.fromEntries(Object.entries(texts).map(([name, text]) => [name, JSON.parse(text)]));
  const within = (value, [low, high]) => value >= low && value <= high;

  function untilThere(act, there, tries = 100) {
    if (there()) act();
    else if (tries) setTimeout(() => untilThere(act, there, tries - 1), 50);
  }

  /* What the server has to answer anew: everything in the state but the cell and its tools. */
  function asked(state) {
    return JSON.stringify(Object.entries(state).filter(([name]) => !OF_THE_CELL.includes(name)));
  }

  function question(state) {
    if (!state || !page.data || asked(state) === page.question) return window.dash_clientside.no_update;
    page.question = asked(state);
    return page.question;
  }

  /* A pause in the middle of a drag is no rest: on a slow machine a redraw would break the drag. */
  document.addEventListener("pointerdown", (event) => {
    page.pressed = Boolean(event.target.closest?.("input[type=range], .plot.scatter"));
  }, true);
  for (const kind of ["pointerup", "pointercancel"]) {
    document.addEventListener(kind, () => {
      if (page.pressed && page.timer) { clearTimeout(page.timer); page.timer = setTimeout(settle, RESTING); }
      page.pressed = false;
    }, true);
  }

  controls.on("input", (field, element) => {
    if (SLIDERS.includes(field) && byId("lag-sentence")) move({ [field]: Number(element.value) });
  });
  controls.on("change", (field, element) => {
    if (!page.state || !byId("lag-sentence") || SLIDERS.includes(field) || field === "scrub") return;
    if (DRAWN_HERE.includes(field)) {
      move({ [field]: controls.valueOf(element) });
      settle();
    } else if (OF_THE_CELL.includes(field)) put({ [field]: controls.valueOf(element) });
    else ask({ [field]: controls.valueOf(element) });
  });

  window.dash_clientside = Object.assign({}, window.dash_clientside, { lag: { adopt, question } });
  pricewake.lag = page;
  Object.assign(page, { move, publish, query, settle, hold, ask, put, take, showTime, layOver: lagMap.layOver });
  page.busy = () => Boolean(page.timer || page.frame || page.words || document.querySelector(".plot.moving"));
  /* What an answer of the server must be about to be shown: all but what is drawn here. */
  page.answerable = (state) => JSON.stringify(Object.entries(state).filter(([name]) => !DRAWN_HERE.includes(name)).sort(([a], [b]) => (a < b ? -1 : 1)));
  page.cellName = () => `${page.question} ${page.state.window} ${page.state.shift} ${page.state.peaks}`;
  page.sentence = () => words.sentence(page);
  page.subtitle = (view) => words.subtitle(page, view);
  page.source = () => page.data.source;
  page.stem = (view, letters) => words.stem(page.state, view, letters);
  page.equation = () => (page.cell ? words.equation(page.data, page.cell) : "");
})();
