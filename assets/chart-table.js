/* Every chart has a text alternative, and a table of its numbers behind its "Table" button. Charts
   are found as they come, so a new page needs nothing for it. */
(function () {
  "use strict";
  const pricewake = (window.pricewake = window.pricewake || {});
  const MOST_ROWS = 4000;
  const waiting = new WeakMap();

  const blockOf = (element) => element.closest(".view, .place, .fold");

  function headingOf(chart) {
    const block = blockOf(chart);
    const fold = chart.closest(".fold");
    const head = (block && block.querySelector("h2, h3")) || (fold && fold.querySelector("h2"));
    return head ? head.textContent : "Chart";
  }

  function element(tag, text, attributes = {}) {
    const made = document.createElement(tag);
    if (text !== null) made.textContent = text;
    for (const [name, value] of Object.entries(attributes)) made.setAttribute(name, value);
    return made;
  }

  function tableOf({ caption, head, rows }) {
    const table = element("table", null, { class: "table figures" });
    const top = element("tr", null), body = element("tbody", null);
    top.append(...head.map((text) => element(text ? "th" : "td", text, text ? { scope: "col" } : {})));
    for (const [first, ...rest] of rows.slice(0, MOST_ROWS)) {
      const row = element("tr", null);
      row.append(element("th", first, { scope: "row" }), ...rest.map((text) => element("td", text)));
      body.append(row);
    }
    const over = element("thead", null);
    over.append(top);
    table.append(element("caption", caption), over, body);
    return table;
  }

  function fill(place, chart) {
    const words = element("p", pricewake.chartWords.sentences(chart, headingOf(chart)));
    place.replaceChildren(words, ...pricewake.chartWords.tables(chart).map(tableOf));
  }

  function describe(chart) {
    if (!chart.isConnected) return;
    chart.setAttribute("role", "img");
    chart.setAttribute("aria-label", pricewake.chartWords.sentences(chart, headingOf(chart)));
    const place = chart.closest(".plot")?.parentElement.querySelector(":scope > .chart-numbers");
    if (place && !place.hidden) fill(place, chart);
  }

  /* After the hand has rested, so that a slider is never kept waiting. */
  function later(chart) {
    clearTimeout(waiting.get(chart));
    waiting.set(chart, setTimeout(() => describe(chart), 300));
  }

  function find() {
    for (const chart of document.querySelectorAll(".js-plotly-plot")) {
      if (chart.described || !chart.on) continue;
      chart.described = true;
      chart.on("plotly_afterplot", () => later(chart));
      later(chart);
    }
  }

  let soon = 0;
  new MutationObserver(() => {
    if (!soon) soon = setTimeout(() => { soon = 0; find(); }, 100);
  }).observe(document.documentElement, { childList: true, subtree: true });

  document.addEventListener("click", (event) => {
    const button = event.target.closest && event.target.closest("[data-table]");
    const block = button && blockOf(button);
    const chart = block && block.querySelector(".js-plotly-plot");
    if (!chart) return;
    const plot = chart.closest(".plot");
    let place = plot.parentElement.querySelector(":scope > .chart-numbers");
    if (!place) {
      place = element("div", null, { class: "chart-numbers", role: "region", tabindex: "0", "aria-label": `Numbers of ${headingOf(chart)}` });
      place.hidden = true;
      plot.after(place);
    }
    place.hidden = !place.hidden;
    button.setAttribute("aria-expanded", String(!place.hidden));
    if (place.hidden) place.replaceChildren();
    else fill(place, chart);
  });
})();
