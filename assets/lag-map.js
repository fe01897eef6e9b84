/* The map of the Lag page: crosshair, sliders along its axes, keys, what the search says laid over. */
(function () {
  "use strict";
  const pricewake = (window.pricewake = window.pricewake || {});
  const { ghost, controls, theme } = pricewake;
  const byId = (id) => document.getElementById(id);
  const page = () => pricewake.lag;
  const THUMB = 16;

  function axesOf(id) {
    const chart = ghost.chartOf(id);
    return chart && chart._fullLayout && chart._fullLayout.xaxis ? chart._fullLayout : null;
  }

  /* Two lines over the whole map, which a move shifts and lays out not at all. */
  function placeCross() {
    const axes = axesOf("lag-surface"), cross = byId("lag-cross");
    if (!axes || !cross || !page().state) return;
    cross.style.setProperty("--across", `${axes.xaxis.c2p(page().state.shift)}px`);
    cross.style.setProperty("--down", `${axes.yaxis.c2p(page().state.window)}px`);
  }

  /* The sliders lie on the axes of the map: thumb centre over cell centre. */
  function placeSliders() {
    const axes = axesOf("lag-surface"), { data } = page();
    if (!axes || !data) return;
    const { xaxis, yaxis } = axes;
    const cells = (bounds) => bounds[1] - bounds[0] + 1;
    const across = controls.field("shift"), up = controls.field("window");
    if (!across || !up) return;
    const wide = xaxis._length / cells(data.shifts), tall = yaxis._length / cells(data.windows);
    Object.assign(across.closest(".slider").style, {
      left: `${xaxis._offset + wide / 2 - THUMB / 2}px`,
      width: `${xaxis._length - wide + THUMB}px`,
      top: `${yaxis._offset + yaxis._length - THUMB / 2 + 1}px`,
    });
    Object.assign(up.closest(".slider").style, {
      top: `${yaxis._offset + tall / 2 - THUMB / 2}px`,
      height: `${yaxis._length - tall + THUMB}px`,
      left: `${xaxis._offset - THUMB / 2 - 1}px`,
    });
    Object.assign(byId("lag-cross").style, {
      left: `${xaxis._offset}px`, width: `${xaxis._length}px`, top: `${yaxis._offset}px`, height: `${yaxis._length}px`,
    });
    placeCross();
  }

  function listen() {
    const chart = ghost.chartOf("lag-surface");
    if (!chart || !chart.on || chart.dataset.heard) return;
    chart.dataset.heard = "yes";
    chart.on("plotly_afterplot", placeSliders);
    chart.on("plotly_click", (event) => {
      const point = event.points[0];
      page().move({ window: point.y, shift: point.x });
      page().settle();
    });
    placeSliders();
  }

  /* Keys on the map itself; its sliders have the browser's own. */
  const within = (value, [low, high]) => Math.max(low, Math.min(high, value));
  document.addEventListener("keydown", (event) => {
    if (event.target.id !== "lag-map" || event.altKey || event.metaKey) return;
    const { state, data } = page();
    if (!state || !data || data.error) return;
    const year = data.perYear, { window, shift } = state;
    const far = event.shiftKey ? year : 1, ends = event.ctrlKey;
    const to = {
      ArrowLeft: { shift: shift - far }, ArrowRight: { shift: shift + far },
      ArrowUp: { window: window + 1 }, ArrowDown: { window: window - 1 },
      PageUp: { window: window + year }, PageDown: { window: window - year },
      Home: ends ? { window: data.windows[0] } : { shift: data.shifts[0] },
      End: ends ? { window: data.windows[1] } : { shift: data.shifts[1] },
    }[event.key];
    if (!to) return;
    event.preventDefault();
    if ("shift" in to) to.shift = within(to.shift, data.shifts);
    if ("window" in to) to.window = within(to.window, data.windows);
    page().move(to);
  });

  /* Lay over the map what the search says of its cells, the shift set on its row, the pinned cell. */
  function layOver(known) {
    const { data, state } = page();
    const extra = known ? [...known.support] : [];
    if (known && known.set.length) {
      extra.push({
        type: "scatter", mode: "markers", x: known.set, y: known.set.map(() => state.window),
        marker: { symbol: "square", size: 5, color: "#20242C" }, hoverinfo: "skip", name: "shift set",
      });
    }
    if (state.pinned) {
      const [window, shift] = state.pinned.split(":").map(Number);
      extra.push({
        type: "scatter", mode: "markers+text", x: [shift], y: [window], text: ["pinned"], textposition: "top center",
        textfont: { size: 11 }, marker: { symbol: "circle-open", size: 11, color: "#20242C", line: { width: 2 } },
        hoverinfo: "skip", name: "pinned cell",
      });
    }
    const text = JSON.stringify(extra);
    if (page().laid === text) return;
    page().laid = text;
    theme.show("lag-surface", { ...data.figures.surface, data: [...data.figures.surface.data, ...extra] });
  }

  pricewake.lagMap = { placeCross, placeSliders, listen, layOver };
})();
