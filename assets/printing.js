/* On paper every page is light, and a chart fits the width of the sheet. */
(function () {
  "use strict";
  const pricewake = (window.pricewake = window.pricewake || {});
  const SHEET = 700; // pixels between the margins of A4 or Letter
  const LOWER = 0.75; // of the height on screen: three views to a sheet rather than two
  const TALL = ".strip, .contributions, .surface, .scatter, .overlay, .quantiles, .gap, .fold-plot";
  let before = null;

  const shown = () => [...document.querySelectorAll(".js-plotly-plot")].filter((c) => c._fullLayout && c.checkVisibility());

  function redraw(pick) {
    for (const [id, figure] of pricewake.theme.figures) {
      const chart = document.querySelector(`#${CSS.escape(id)} .js-plotly-plot`);
      if (chart && chart._fullLayout) window.Plotly.react(chart, pick(figure).data, pick(figure).layout);
    }
  }

  const heightOf = (chart) => Math.round(chart._fullLayout.height * (chart.closest(TALL) ? 1 : LOWER));

  window.addEventListener("beforeprint", () => {
    const root = document.documentElement;
    before = root.dataset.theme;
    if (before === "dark") {
      root.dataset.theme = "light";
      redraw((figure) => structuredClone(figure));
    }
    for (const chart of shown()) {
      window.Plotly.relayout(chart, { width: SHEET, height: heightOf(chart), autosize: false });
    }
    pricewake.legends.mend();
    for (const drawing of document.querySelectorAll(".js-plotly-plot .main-svg")) {
      const [width, height] = ["width", "height"].map((name) => drawing.getAttribute(name));
      drawing.setAttribute("viewBox", `0 0 ${width} ${height}`);
      drawing.closest(".svg-container").style.aspectRatio = `${width} / ${height}`;
    }
  });

  window.addEventListener("afterprint", () => {
    for (const drawing of document.querySelectorAll(".js-plotly-plot .main-svg")) {
      drawing.removeAttribute("viewBox");
      drawing.closest(".svg-container").style.aspectRatio = "";
    }
    for (const chart of shown()) window.Plotly.relayout(chart, { width: null, height: null, autosize: true });
    if (before !== "dark") return;
    document.documentElement.dataset.theme = "dark";
    for (const [id, figure] of [...pricewake.theme.figures]) pricewake.theme.show(id, figure);
  });
})();
