/* The chart library places a legend above a chart by the margin of the drawing before. Where the two
   have parted, because the width has changed, the chart is drawn once more. */
(function () {
  "use strict";
  const pricewake = (window.pricewake = window.pricewake || {});
  const WAIT = 400; // milliseconds after the last change of size
  let timer = 0;

  function parted(chart) {
    const box = chart.querySelector("g.legend .bg"), layout = chart._fullLayout;
    if (!box || !layout || !layout.legend || layout.legend.y !== 1 || layout.legend.yanchor !== "bottom") return false;
    const bottom = box.getBoundingClientRect().bottom - chart.getBoundingClientRect().top;
    return Math.abs(bottom - layout._size.t) > 2;
  }

  function mend() {
    for (const chart of document.querySelectorAll(".js-plotly-plot")) {
      if (parted(chart)) window.Plotly.redraw(chart);
    }
  }

  new ResizeObserver(() => {
    clearTimeout(timer);
    timer = setTimeout(mend, WAIT);
  }).observe(document.documentElement);
  pricewake.legends = { mend };
})();
