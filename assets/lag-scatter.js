/* The scatter of the chosen cell: its points, the band that slices it, and counts of months. */
(function () {
  "use strict";
  const pricewake = (window.pricewake = window.pricewake || {});
  const { ghost, theme, calendar } = pricewake;
  const { endsOf } = pricewake.lagCell;
  const byId = (id) => document.getElementById(id);
  const ONE_LINE = 20; // figures/lag.ONE_LINE
  const MARGIN = 0.86; // figures/lag_slices.MARGIN

  /* The colour of each month of the calendar, [red, green, blue]: figures/theme.time_scale. */
  function monthColours({ driver, ordinal, perYear, figures }) {
    const { cmin, cmax } = figures.scatter.data[0].marker;
    const stops = ["early", "middle", "late"].map((name) => {
      const hex = theme.colour(name);
      return [1, 3, 5].map((i) => parseInt(hex.slice(i, i + 2), 16));
    });
    return driver.values.map((_, i) => {
      const at = 2 * Math.max(0, Math.min(1, (calendar.decimalYear(ordinal + i, perYear) - cmin) / (cmax - cmin)));
      const [from, to, way] = at < 1 ? [stops[0], stops[1], at] : [stops[1], stops[2], at - 1];
      return from.map((part, k) => part + (to[k] - part) * way);
    });
  }

  /* The same, found once for the data and the theme that are shown. */
  function coloursOf(page) {
    const shown = theme.current();
    if (page.coloursFor !== page.data || page.coloursIn !== shown) {
      Object.assign(page, { coloursFor: page.data, coloursIn: shown, colours: monthColours(page.data) });
    }
    return page.colours;
  }

  /* The band of the state on the cell: {along, other, low, high, held, path, mean, count}; or null. */
  function sliceOf({ state, cell }) {
    if (!cell || state.band === "off") return null;
    const across = state.band === "driver";
    const [along, other] = across ? [cell.driver, cell.response] : [cell.response, cell.driver];
    const path = pricewake.numbers.slicePath(along, other, state.band_width / 100);
    const low = path.low[state.band_place], high = path.high[state.band_place];
    const held = [];
    for (let i = 0; i < along.length; i++) if (along[i] >= low && along[i] <= high) held.push(i);
    return { across, low, high, held, path, mean: path.mean[state.band_place], count: held.length };
  }

  function bars(pen, { xaxis, yaxis }, counts, x, y) {
    const wide = xaxis._length, tall = yaxis._length, room = 0.12 / MARGIN;
    const most = Math.max(...counts.driver, ...counts.response);
    pen.fillStyle = theme.colour("quiet");
    const low = counts.driverEdges, up = counts.responseEdges;
    counts.driver.forEach((n, k) => {
      const height = (n / most) * room * tall;
      pen.fillRect(x(low[k]), yaxis._offset - 0.02 * tall - height, x(low[k + 1]) - x(low[k]), height);
    });
    counts.response.forEach((n, k) => {
      pen.fillRect(xaxis._offset + 1.02 * wide, y(up[k + 1]), (n / most) * room * wide, y(up[k]) - y(up[k + 1]));
    });
  }

  function squares(pen, counts, x, y, shades) {
    const low = counts.driverEdges, up = counts.responseEdges;
    const most = Math.max(...counts.both.flat());
    counts.both.forEach((line, row) => line.forEach((n, column) => {
      if (!n) return;
      pen.fillStyle = shades(most > 1 ? (n - 1) / (most - 1) : 1);
      pen.fillRect(x(low[column]), y(up[row + 1]), x(low[column + 1]) - x(low[column]), y(up[row]) - y(up[row + 1]));
    }));
  }

  function paint(page) {
    const { cell, state } = page;
    const slice = (page.slice = sliceOf(page));
    const counts = cell && state.points !== "points" ? pricewake.numbers.pairCounts(cell.driver, cell.response) : null;
    ghost.show("lag-scatter", (pen, x, y) => {
      if (!cell) return;
      if (state.points === "counts") squares(pen, counts, x, y, shadeOf);
      else {
        const colours = coloursOf(page), { size, opacity } = page.data.figures.scatter.data[0].marker;
        ghost.dots(pen, cell.driver, cell.response, x, y, (i) => colours[cell.months[i]], size / 2, opacity);
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
      if (!slice) {
        pen.strokeStyle = theme.colour("response");
        ghost.path(pen, cell.driverSlices.centre, cell.driverSlices.mean, x, y);
        pen.strokeStyle = theme.colour("driver");
        ghost.path(pen, cell.responseSlices.mean, cell.responseSlices.centre, x, y);
        return;
      }
      pen.fillStyle = theme.colour("mark");
      pen.strokeStyle = theme.colour("ink");
      for (const i of slice.held) {
        pen.beginPath();
        pen.arc(x(cell.driver[i]), y(cell.response[i]), 3.5, 0, 2 * Math.PI);
        pen.fill();
        pen.stroke();
      }
      pen.lineWidth = 2;
      const { centre, mean } = slice.path;
      ghost.path(pen, slice.across ? centre : mean, slice.across ? mean : centre, x, y);
    }, counts && ((pen, axes, x, y) => bars(pen, axes, counts, x, y)));
    placeBand(page);
  }

  function shadeOf(at) {
    const names = ["few-2", "few-3", "few-4", "few-5", "few-6"];
    return theme.colour(names[Math.round(at * (names.length - 1))]);
  }

  /* figures.lag.axis_title */
  const escaped = (text) => text.replaceAll("&", "&amp;").replaceAll("<", "&lt;").replaceAll(">", "&gt;");
  function title({ data, state }, side) {
    const { name, unit } = data[side];
    const shown = name.length <= 32 ? name : `${name.slice(0, 30)}…`;
    const smoothed = state.window === 1 ? "" : `${state.window}-${data.noun} mean, `;
    return `${escaped(shown)}${side === "driver" && name.length <= ONE_LINE ? ", " : "<br>"}${smoothed}${escaped(unit)}`;
  }

  /* The chart of the cell: the traces of figures.lag.cell_scatter with these numbers. */
  function figure(page) {
    const { cell, data, state } = page;
    const made = structuredClone(data.figures.scatter);
    const [points, line, ellipse, across, along, held, path, left, right, both] = made.data;
    const months = cell.months.map((month) => data.ordinal + month);
    const ends = endsOf(cell.driver);
    Object.assign(points, {
      x: [...cell.driver], y: [...cell.response], visible: state.points !== "counts",
      text: months.map((o) => `${calendar.label(o, data.perYear)} → ${calendar.label(o + state.shift, data.perYear)}`),
    });
    points.marker.color = months.map((o) => calendar.decimalYear(o, data.perYear));
    points.marker.showscale = state.points === "points";
    Object.assign(line, { x: ends, y: ends.map((end) => cell.intercept + cell.slope * end) });
    Object.assign(ellipse, cell.ellipse);
    const slice = (page.slice = sliceOf(page));
    Object.assign(across, {
      x: cell.driverSlices.centre, y: cell.driverSlices.mean, customdata: cell.driverSlices.count, visible: !slice,
    });
    Object.assign(along, {
      x: cell.responseSlices.mean, y: cell.responseSlices.centre, customdata: cell.responseSlices.count, visible: !slice,
    });
    held.visible = path.visible = Boolean(slice);
    if (slice) {
      Object.assign(held, { x: slice.held.map((i) => cell.driver[i]), y: slice.held.map((i) => cell.response[i]) });
      const { centre, mean, count } = slice.path;
      Object.assign(path, { x: slice.across ? centre : mean, y: slice.across ? mean : centre, customdata: count });
      path.hovertemplate = `mean ${slice.across ? "response %{y:.2f}" : "driver %{x:.2f}"} over %{customdata} points<extra></extra>`;
    }
    const sides = state.points !== "points";
    left.visible = right.visible = sides;
    both.visible = state.points === "counts";
    if (sides) {
      const counts = pricewake.numbers.pairCounts(cell.driver, cell.response);
      const middles = (edges) => edges.slice(1).map((edge, k) => (edge + edges[k]) / 2);
      const x = middles(counts.driverEdges), y = middles(counts.responseEdges);
      Object.assign(left, { x, y: counts.driver, width: counts.driverEdges[1] - counts.driverEdges[0] });
      Object.assign(right, { x: counts.response, y, width: counts.responseEdges[1] - counts.responseEdges[0] });
      Object.assign(both, { x, y, z: counts.both.map((row) => row.map((n) => n || null)) });
    }
    const { layout } = made;
    layout.xaxis.title.text = title(page, "driver");
    layout.yaxis.title.text = title(page, "response");
    for (const axis of [layout.xaxis, layout.yaxis]) axis.domain = [0, sides ? MARGIN : 1];
    if (sides) for (const axis of [layout.xaxis2, layout.yaxis2]) axis.visible = true;
    else { delete layout.xaxis2; delete layout.yaxis2; } // fewer axes are drawn sooner
    made.data.length = sides ? 10 : slice ? 7 : 5;
    return made;
  }

  /* The band over the chart, on the axes that it shows. */
  function placeBand(page) {
    const band = byId("lag-band"), chart = ghost.chartOf("lag-scatter");
    if (!band) return;
    const slice = page.slice || null;
    if (band.hidden && !slice && band.choice === page.state.band) return;
    band.choice = page.state.band;
    band.hidden = !slice;
    for (const each of document.querySelectorAll(".band-only")) each.hidden = page.state.band === "off";
    byId("lag-slice-words").hidden = !slice;
    if (!slice || !chart || !chart._fullLayout || !chart._fullLayout.xaxis) return;
    const { xaxis, yaxis } = chart._fullLayout;
    const axis = slice.across ? xaxis : yaxis;
    const clip = (pixel) => Math.max(0, Math.min(axis._length, pixel));
    const ends = [axis.c2p(slice.low), axis.c2p(slice.high)].map(clip).sort((a, b) => a - b);
    Object.assign(band.style, slice.across
      ? { left: `${xaxis._offset + ends[0]}px`, width: `${ends[1] - ends[0]}px`, top: `${yaxis._offset}px`, height: `${yaxis._length}px` }
      : { left: `${xaxis._offset}px`, width: `${xaxis._length}px`, top: `${yaxis._offset + ends[0]}px`, height: `${ends[1] - ends[0]}px` });
    pricewake.words.write(byId("lag-slice-words"), pricewake.words.sliceSentence(page));
  }

  function listen() {
    const chart = ghost.chartOf("lag-scatter");
    if (!chart || !chart.on || chart.dataset.heard) return;
    chart.dataset.heard = "yes";
    chart.on("plotly_afterplot", () => placeBand(pricewake.lag));
    placeBand(pricewake.lag);
  }

  /* Drag the band: a press inside it is the band's, and the chart below does not get it. */
  const drag = { on: false, offset: 0 };
  const inside = (event) => {
    const box = byId("lag-band")?.getBoundingClientRect();
    return box && box.width > 0 && event.clientX >= box.left - 4 && event.clientX <= box.right + 4
      && event.clientY >= box.top - 4 && event.clientY <= box.bottom + 4;
  };
  function valueUnder(event, { slice }) {
    const chart = ghost.chartOf("lag-scatter"), box = chart.getBoundingClientRect();
    const { xaxis, yaxis } = chart._fullLayout;
    return slice.across ? xaxis.p2c(event.clientX - box.left - xaxis._offset) : yaxis.p2c(event.clientY - box.top - yaxis._offset);
  }
  document.addEventListener("mousedown", (event) => {
    const page = pricewake.lag;
    if (!page || !page.slice || event.button !== 0 || !event.target.closest?.(".plot.scatter") || !inside(event)) return;
    event.preventDefault();
    event.stopPropagation();
    const { centre } = page.slice.path;
    drag.on = true;
    drag.offset = valueUnder(event, page) - centre[page.state.band_place];
  }, true);
  document.addEventListener("mousemove", (event) => {
    const page = pricewake.lag, plot = event.target.closest?.(".plot.scatter");
    if (!drag.on) {
      if (plot && page) plot.classList.toggle("over-band", Boolean(page.slice) && inside(event));
      return;
    }
    event.preventDefault();
    event.stopPropagation();
    const { centre } = page.slice.path;
    const at = (valueUnder(event, page) - drag.offset - centre[0]) / (centre[centre.length - 1] - centre[0]);
    const place = Math.max(0, Math.min(100, Math.round(100 * at)));
    if (place !== page.state.band_place) page.move({ band_place: place });
  }, true);
  document.addEventListener("mouseup", () => {
    if (!drag.on) return;
    drag.on = false;
    pricewake.lag.settle();
  }, true);

  pricewake.lagScatter = { sliceOf, paint, figure, listen };
})();
