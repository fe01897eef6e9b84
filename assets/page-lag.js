/* The Lag page in the browser: one state, two sliders, the map and the scatter linked both ways.
   A move draws at once (ghost.js); when the hand rests the charts, the address and the files follow.
   No request is made while a slider moves. */
(function () {
  "use strict";
  const pricewake = (window.pricewake = window.pricewake || {});
  const { numbers, calendar, ghost, theme, controls, words } = pricewake;
  const RESTING = 140; // milliseconds without a move
  const page = { data: null, state: null, cell: null, timer: 0, frame: 0, moves: 0 };

  const byId = (id) => document.getElementById(id);
  const { counted, signed } = pricewake.words;

  /* The part of the sample that a cell may use: compute.cell_span. */
  function span(data, window, shift) {
    const n = data.driver.values.length;
    if (!data.same) return [0, n];
    const first = data.windows[1] - 1 + Math.max(0, -data.shifts[0]);
    const last = n - 1 - Math.max(0, data.shifts[1]);
    return [
      Math.max(0, first - window + 1 + Math.min(0, shift)),
      Math.min(n, last + 1 + Math.max(0, shift)),
    ];
  }

  function cellAt(window, shift) {
    const data = page.data;
    const [from, to] = span(data, window, shift);
    const cut = (side) => (data.same ? data[side].values.slice(from, to) : data[side].values);
    const cell = numbers.cell(cut("driver"), cut("response"), window, shift, data.minPairs);
    if (cell) cell.start += from;
    return cell;
  }

  /* Both smoothed series on the driver's calendar: compute.Bridge.overlay. */
  function overlayAt(window, shift) {
    const data = page.data;
    const driver = numbers.trailingMean(data.driver.values, window);
    const response = numbers.trailingMean(data.response.values, window);
    const low = Math.min(0, -shift), high = driver.length - 1 + Math.max(0, -shift);
    const ordinals = [], d = [], r = [];
    for (let k = low; k <= high; k++) {
      if (!(k < driver.length && k >= 0) && !(k + shift >= 0 && k + shift < response.length)) continue;
      ordinals.push(data.ordinal + window - 1 + k);
      d.push(k >= 0 && k < driver.length ? driver[k] : null);
      r.push(k + shift >= 0 && k + shift < response.length ? response[k + shift] : null);
    }
    return { ordinals, driver: d, response: r };
  }

  /* Words ------------------------------------------------------------------------------------ */

  function showWords() {
    const { state, cell, data } = page;
    const head = byId("lag-sentence");
    head.replaceChildren(
      ...words.sentenceParts(page.data, state).map((part) => {
        if (typeof part === "string") return document.createTextNode(part);
        const button = document.createElement("button");
        button.type = "button";
        button.className = "number";
        button.textContent = part[1];
        button.title = `Move the ${part[0]} slider`;
        button.onclick = () => controls.field(part[0]).focus();
        const unbroken = document.createElement("span");
        unbroken.className = "unbroken";
        unbroken.append(button, part[2]);
        return unbroken;
      }),
    );
    byId("lag-equation").textContent = cell ? words.equation(data, cell) : "";
    byId("lag-readout").textContent = cell
      ? `Correlation ${signed(cell.correlation, 2)} over ${counted(cell.n, data.noun)}, ${data.span}.`
      : `This cell is undefined: it leaves fewer than ${data.minPairs} ${data.noun}s, or one side does not vary.`;
    const away = counted(Math.abs(state.shift), data.noun);
    const moved = state.shift === 0 ? "" : `, moved ${state.shift > 0 ? "back" : "forward"} by ${away}`;
    byId("lag-driver-words").textContent = data.driver.name;
    byId("lag-response-words").textContent = data.response.name + moved;
    for (const [name, said] of [
      ["window", counted(state.window, data.noun)],
      ["shift", `${signed(state.shift, 0)} ${data.noun}${Math.abs(state.shift) === 1 ? "" : "s"}`],
    ]) {
      controls.field(name).setAttribute("aria-valuetext", said);
    }
  }

  /* The map ---------------------------------------------------------------------------------- */

  function placeCross() {
    const chart = ghost.chartOf("lag-surface");
    const cross = byId("lag-cross");
    if (!chart || !chart._fullLayout || !chart._fullLayout.xaxis || !cross || !page.state) return;
    const { xaxis, yaxis } = chart._fullLayout;
    const left = xaxis._offset + xaxis.c2p(page.state.shift);
    const top = yaxis._offset + yaxis.c2p(page.state.window);
    cross.style.transform = `translate(${left}px, ${top}px)`;
    cross.style.setProperty("--left", `${xaxis._offset - left}px`);
    cross.style.setProperty("--right", `${xaxis._offset + xaxis._length - left}px`);
    cross.style.setProperty("--top", `${yaxis._offset - top}px`);
    cross.style.setProperty("--bottom", `${yaxis._offset + yaxis._length - top}px`);
    cross.hidden = false;
  }

  /* The sliders lie on the axes of the map: thumb centre over cell centre. */
  function placeSliders() {
    const chart = ghost.chartOf("lag-surface");
    if (!chart || !chart._fullLayout || !chart._fullLayout.xaxis || !page.data) return;
    const { xaxis, yaxis } = chart._fullLayout;
    const thumb = 16;
    const cells = (bounds) => bounds[1] - bounds[0] + 1;
    const across = controls.field("shift"), up = controls.field("window");
    if (!across || !up) return;
    const wide = xaxis._length / cells(page.data.shifts), tall = yaxis._length / cells(page.data.windows);
    Object.assign(across.parentElement.parentElement.style, {
      left: `${xaxis._offset + wide / 2 - thumb / 2}px`,
      width: `${xaxis._length - wide + thumb}px`,
      top: `${yaxis._offset + yaxis._length - thumb / 2 + 1}px`,
    });
    Object.assign(up.parentElement.parentElement.style, {
      top: `${yaxis._offset + tall / 2 - thumb / 2}px`,
      height: `${yaxis._length - tall + thumb}px`,
      left: `${xaxis._offset - thumb / 2 - 1}px`,
    });
    placeCross();
  }

  function listenToMap() {
    const chart = ghost.chartOf("lag-surface");
    if (!chart || !chart.on || chart.dataset.heard) return;
    chart.dataset.heard = "yes";
    chart.on("plotly_afterplot", placeSliders);
    chart.on("plotly_click", (event) => {
      const point = event.points[0];
      move({ window: point.y, shift: point.x });
      settle();
    });
    placeSliders();
  }

  /* A move: drawn in the next frame, latest wins ---------------------------------------------- */

  function pointColours(scatter) {
    const { colorscale, cmin, cmax } = scatter.data[0].marker;
    const stops = colorscale.map(([at, hex]) => [at, [1, 3, 5].map((i) => parseInt(hex.slice(i, i + 2), 16))]);
    return (year) => {
      const at = Math.max(0, Math.min(1, (year - cmin) / (cmax - cmin)));
      const k = Math.max(1, stops.findIndex(([stop]) => stop >= at));
      const [[a, from], [b, to]] = [stops[k - 1], stops[k]];
      const rgb = from.map((c, i) => Math.round(c + ((to[i] - c) * (at - a)) / (b - a || 1)));
      return `rgba(${rgb.join(",")},0.75)`;
    };
  }

  function paintScatter() {
    const cell = page.cell;
    ghost.show("lag-scatter", (pen, x, y) => {
      if (!cell) return;
      for (let i = 0; i < cell.n; i++) {
        pen.fillStyle = page.colours[cell.start + i];
        pen.beginPath();
        pen.arc(x(cell.driver[i]), y(cell.response[i]), 2.5, 0, 2 * Math.PI);
        pen.fill();
      }
      pen.lineWidth = 1.2;
      pen.strokeStyle = theme.colour("mark");
      pen.setLineDash([9, 9]);
      ghost.path(pen, cell.ellipse.x, cell.ellipse.y, x, y);
      pen.setLineDash([]);
      pen.lineWidth = 2;
      pen.strokeStyle = theme.colour("fit");
      const ends = endsOf(cell.driver);
      ghost.path(pen, ends, ends.map((end) => cell.intercept + cell.slope * end), x, y);
      pen.lineWidth = 1;
      pen.strokeStyle = theme.colour("response");
      ghost.path(pen, cell.driverSlices.centre, cell.driverSlices.mean, x, y);
      pen.strokeStyle = theme.colour("driver");
      ghost.path(pen, cell.responseSlices.mean, cell.responseSlices.centre, x, y);
    });
  }

  function paintOverlay() {
    const { ordinals, driver, response } = page.overlay;
    const days = ordinals.map((o) => Date.parse(calendar.firstDay(o, page.data.perYear)));
    ghost.show("lag-overlay", (pen, x, y) => {
      pen.lineWidth = 1.8;
      pen.strokeStyle = theme.colour("driver");
      ghost.path(pen, days, driver, x, y);
      pen.strokeStyle = theme.colour("response");
      pen.setLineDash([5, 2]);
      ghost.path(pen, days, response, x, y);
    });
  }

  function draw() {
    page.frame = 0;
    const { window, shift } = page.state;
    page.cell = cellAt(window, shift);
    page.overlay = overlayAt(window, shift);
    placeCross();
    showWords();
    paintScatter();
    paintOverlay();
    page.moves += 1;
    performance.mark("pricewake-painted", { detail: { window, shift } });
  }

  /* `changes` may name window and shift; the sliders, the map and the charts follow. */
  function move(changes) {
    if (!page.data || page.data.error) return;
    page.state = { ...page.state, ...changes };
    for (const name of ["window", "shift"]) {
      const field = controls.field(name);
      if (Number(field.value) !== page.state[name]) field.value = page.state[name];
    }
    if (page.state.without) page.state.without = "";
    document.querySelector(".lag-page").classList.add("stale");
    if (!page.frame) page.frame = requestAnimationFrame(draw);
    clearTimeout(page.timer);
    page.timer = setTimeout(settle, RESTING);
  }

  /* The hand rests: charts, address, files ---------------------------------------------------- */

  const endsOf = (values) => values.reduce(([a, b], v) => [Math.min(a, v), Math.max(b, v)], [Infinity, -Infinity]);

  const escaped = (text) => text.replaceAll("&", "&amp;").replaceAll("<", "&lt;").replaceAll(">", "&gt;");

  /* figures.lag.axis_title */
  function title(side) {
    const { name, unit } = page.data[side];
    const shown = name.length <= 32 ? name : `${name.slice(0, 30)}…`;
    const smoothed = page.state.window === 1 ? "" : `${page.state.window}-${page.data.noun} mean, `;
    return `${escaped(shown)}${side === "driver" ? ", " : "<br>"}${smoothed}${escaped(unit)}`;
  }

  function scatterFigure() {
    const { cell, data, state } = page;
    const figure = structuredClone(data.figures.scatter);
    const [points, line, ellipse, across, along] = figure.data;
    const months = Array.from({ length: cell.n }, (_, i) => data.ordinal + cell.start + i);
    const ends = endsOf(cell.driver);
    Object.assign(points, {
      x: [...cell.driver], y: [...cell.response],
      text: months.map((o) => `${calendar.label(o, data.perYear)} → ${calendar.label(o + state.shift, data.perYear)}`),
    });
    points.marker.color = months.map((o) => calendar.decimalYear(o, data.perYear));
    Object.assign(line, { x: ends, y: ends.map((end) => cell.intercept + cell.slope * end) });
    Object.assign(ellipse, cell.ellipse);
    Object.assign(across, { x: cell.driverSlices.centre, y: cell.driverSlices.mean, customdata: cell.driverSlices.count });
    Object.assign(along, { x: cell.responseSlices.mean, y: cell.responseSlices.centre, customdata: cell.responseSlices.count });
    figure.layout.xaxis.title.text = title("driver");
    figure.layout.yaxis.title.text = title("response");
    return figure;
  }

  function overlayFigure() {
    const { data, overlay } = page;
    const figure = structuredClone(data.figures.overlay);
    const x = overlay.ordinals.map((o) => calendar.firstDay(o, data.perYear));
    const text = overlay.ordinals.map((o) => calendar.label(o, data.perYear));
    Object.assign(figure.data[0], { x, text, y: overlay.driver });
    Object.assign(figure.data[1], { x, text, y: overlay.response });
    return figure;
  }

  const query = () => controls.query(page.state, page.data.defaults);

  /* Lay over the map what the search says of its cells, and the shift set on its row. */
  function layOver(known) {
    const { figures } = page.data;
    const extra = [...known.support];
    if (known.set.length) {
      extra.push({
        type: "scatter", mode: "markers", x: known.set, y: known.set.map(() => page.state.window),
        marker: { symbol: "square", size: 5, color: "#20242C" }, hoverinfo: "skip", name: "shift set",
      });
    }
    const text = JSON.stringify(extra);
    if (page.laid === text) return;
    page.laid = text;
    theme.show("lag-surface", { ...figures.surface, data: [...figures.surface.data, ...extra] });
  }

  const publish = () => controls.publish("lag", page.state, page.data.defaults);

  function settle() {
    clearTimeout(page.timer);
    page.timer = 0;
    if (!page.data || page.data.error || !byId("lag-sentence")) return; // the page may be left already
    if (page.frame) { cancelAnimationFrame(page.frame); draw(); }
    publish();
    if (page.cell) theme.show("lag-scatter", scatterFigure());
    theme.show("lag-overlay", overlayFigure());
    whenDrawn("lag-scatter");
    whenDrawn("lag-overlay");
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

  /* What the server sends ---------------------------------------------------------------------- */

  function adopt(data) {
    if (!data) return "";
    if (!data.fresh && asked(data.state) !== page.question) return window.dash_clientside.no_update;
    const before = data.fresh ? null : page.state;
    page.data = data;
    page.question = asked(data.state);
    page.state = data.state;
    document.querySelector(".lag-page").classList.toggle("broken", Boolean(data.error));
    byId("lag-invented").hidden = !data.invented;
    if (data.error) {
      byId("lag-sentence").textContent = "Nothing to show for this choice.";
      byId("lag-readout").textContent = "";
      return data.error;
    }
    if (before && within(before.window, data.windows) && within(before.shift, data.shifts)) {
      page.state = { ...data.state, window: before.window, shift: before.shift };
    }
    for (const [name, bounds] of [["window", data.windows], ["shift", data.shifts]]) {
      const field = controls.field(name);
      [field.min, field.max] = bounds;
      field.value = page.state[name];
    }
    const colour = pointColours(data.figures.scatter);
    page.colours = data.driver.values.map((_, i) => colour(calendar.decimalYear(data.ordinal + i, data.perYear)));
    page.cell = cellAt(page.state.window, page.state.shift);
    page.overlay = overlayAt(page.state.window, page.state.shift);
    page.laid = "";
    theme.show("lag-surface", data.figures.surface);
    showWords();
    settle();
    untilThere(listenToMap, () => ghost.chartOf("lag-surface")?.on);
    return (data.notes || []).join(" ");
  }

  const within = (value, [low, high]) => value >= low && value <= high;

  function untilThere(act, there, tries = 100) {
    if (there()) act();
    else if (tries) setTimeout(() => untilThere(act, there, tries - 1), 50);
  }

  /* What the server has to answer anew: everything in the state but the cell. */
  function asked(state) {
    return JSON.stringify({ ...state, window: 0, shift: 0, without: "" });
  }

  function question(state) {
    if (!state || !page.data || asked(state) === page.question) return window.dash_clientside.no_update;
    page.question = asked(state);
    return page.question;
  }

  controls.on("input", (field, element) => {
    if (field === "window" || field === "shift") move({ [field]: Number(element.value) });
  });
  controls.on("change", (field, element) => {
    if (!page.state || !byId("lag-sentence")) return;
    if (field === "window" || field === "shift") return;
    page.state = { ...page.state, [field]: controls.valueOf(element) };
    window.dash_clientside.set_props("lag-state", { data: page.state });
  });

  window.dash_clientside = Object.assign({}, window.dash_clientside, { lag: { adopt, question } });
  pricewake.lag = page;
  Object.assign(page, { move, publish, layOver, query });
  page.busy = () => Boolean(page.timer || page.frame || document.querySelector(".plot.moving"));
  page.settle = settle;
  page.sentence = () => words.sentenceParts(page.data, page.state).map((p) => (typeof p === "string" ? p : p[1] + p[2])).join("");
  page.subtitle = (view) => words.subtitle(page, view);
  page.source = () => page.data.source;
  page.stem = (view, letters) => words.stem(page.state, view, letters);
  page.equation = () => (page.cell ? words.equation(page.data, page.cell) : "");
})();
