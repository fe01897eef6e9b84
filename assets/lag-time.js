/* Both series through time: the lines, peaks laid over them, and months chosen by dragging. */
(function () {
  "use strict";
  const pricewake = (window.pricewake = window.pricewake || {});
  const { ghost, theme, calendar } = pricewake;
  const byId = (id) => document.getElementById(id);
  const chosen = { codes: null, days: null };

  /* First moment of a period, looked up: a move asks for a thousand. */
  function momentOf(data) {
    const known = (data.moments = data.moments || new Map());
    return (ordinal) => {
      if (!known.has(ordinal)) known.set(ordinal, calendar.firstMoment(ordinal, data.perYear));
      return known.get(ordinal);
    };
  }

  function paint(page) {
    const { ordinals, driver, response } = page.overlay;
    const days = ordinals.map(momentOf(page.data));
    ghost.show("lag-overlay", (pen, x, y) => {
      pen.strokeStyle = theme.colour("driver");
      ghost.line(pen, days, driver, x, y);
      pen.strokeStyle = theme.colour("response");
      ghost.line(pen, days, response, x, y, 5, 2);
    });
  }

  function figure(page) {
    const { data, overlay } = page;
    const made = structuredClone(data.figures.overlay);
    const x = overlay.ordinals.map((o) => calendar.firstDay(o, data.perYear));
    const text = overlay.ordinals.map((o) => calendar.label(o, data.perYear));
    Object.assign(made.data[0], { x, text, y: overlay.driver });
    Object.assign(made.data[1], { x, text, y: overlay.response });
    if (page.peaks && page.peaks.cell === page.cellName()) made.data.push(...page.peaks.traces);
    if (page.closer) made.layout.xaxis.range = page.closer;
    return made;
  }

  /* Months chosen by a drag across the chart: leave them out, use only them, or look closer. */
  function choose([from, to]) {
    const { data } = pricewake.lag;
    const ordinalOf = (day) => {
      const [year, month] = day.split("-").map(Number); // read as written: a Date would be of the time zone
      return Math.floor(((year - 1970) * 12 + month - 1) / (12 / data.perYear));
    };
    const least = data.ordinal, most = data.ordinal + data.driver.values.length - 1;
    const ends = [ordinalOf(from), ordinalOf(to)].sort((a, b) => a - b).map((o) => Math.max(least, Math.min(most, o)));
    chosen.codes = ends.map((o) => calendar.code(o, data.perYear));
    chosen.days = [from, to];
    byId("range-words").textContent = `${calendar.label(ends[0], data.perYear)} to ${calendar.label(ends[1], data.perYear)}`;
    byId("range-choice").hidden = false;
    byId("range-closer").textContent = "Look closer";
  }

  function drop() {
    const place = byId("range-choice"), chart = ghost.chartOf("lag-overlay");
    if (!place || place.hidden) return false;
    place.hidden = true;
    chosen.codes = null;
    if (chart && window.Plotly) window.Plotly.relayout(chart, { selections: [] });
    return true;
  }

  function listen() {
    const chart = ghost.chartOf("lag-overlay");
    if (!chart || !chart.on || chart.dataset.heard) return;
    chart.dataset.heard = "yes";
    chart.on("plotly_selected", (event) => {
      if (event && event.range) choose(event.range.x);
    });
    chart.on("plotly_deselect", drop);
  }

  document.addEventListener("click", (event) => {
    const page = pricewake.lag, { id } = event.target;
    if (id === "range-cancel") {
      drop();
      if (page.closer) { page.closer = null; page.settle(); }
    }
    if (!chosen.codes) return;
    const [first, last] = chosen.codes;
    if (id === "range-without") {
      const spans = [...page.state.left_out.split(",").filter(Boolean), `${first}:${last}`];
      drop();
      page.ask({ left_out: spans.slice(-10).join(",") });
    }
    if (id === "range-only") {
      drop();
      page.ask({ first, last });
    }
    if (id === "range-closer") {
      page.closer = chosen.days;
      page.settle();
      event.target.textContent = "Closer";
    }
  });

  pricewake.lagTime = { paint, figure, listen, drop };
})();
