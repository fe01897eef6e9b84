/* Save a view as PNG or SVG: the light chart with the state's sentence on top and sources below. */
(function () {
  "use strict";
  const { theme, ghost } = window.pricewake;
  const SIZES = { surface: [1100, 760], scatter: [900, 860], overlay: [1200, 560] };

  const MAP_KEY = "Outside the black line the search-adjusted p is above 5 % (paler).";

  function wrapped(text, width) {
    const lines = [""];
    for (const word of text.split(" ")) {
      const last = lines.length - 1;
      if (lines[last] && lines[last].length + word.length > width) lines.push(word);
      else lines[last] = lines[last] ? `${lines[last]} ${word}` : word;
    }
    return lines;
  }

  const escaped = (text) => text.replaceAll("&", "&amp;").replaceAll("<", "&lt;").replaceAll(">", "&gt;");

  function printed(view, page) {
    const figure = structuredClone(theme.figures.get(`lag-${view}`));
    const [width, height] = SIZES[view] || [1000, 680];
    const title = wrapped(page.sentence(), Math.floor(width / 9.5));
    const under = view === "surface" ? `${page.data.span}. The cross marks the chosen cell.${page.known ? ` ${MAP_KEY}` : ""}` : `${page.equation()}    ${page.data.span}`;
    const source = wrapped(page.data.source, Math.floor(width / 6.5));
    const { layout } = figure;
    const top = 50 + 24 * title.length + (view === "surface" ? 0 : 22), bottom = 62 + 15 * source.length;
    layout.margin = { ...layout.margin, t: top, b: bottom, l: 70 };
    layout.title = {
      text: `${title.map(escaped).join("<br>")}<br><span style="font-size:13px">${escaped(under)}</span>`,
      x: 0.01, xanchor: "left", y: 1 - 18 / height, yanchor: "top", yref: "container",
      font: { size: 18, family: "Georgia, Liberation Serif, serif" },
    };
    layout.annotations = [...(layout.annotations || []), {
      text: source.map(escaped).join("<br>"), showarrow: false, xref: "paper", yref: "paper", x: 0, y: 0,
      xanchor: "left", yanchor: "top", yshift: -52, align: "left", font: { size: 11 },
    }];
    if (view === "surface") {
      const { window, shift } = page.state;
      const line = { color: "#20242C", width: 1 };
      layout.shapes = [...(layout.shapes || []),
        { type: "line", xref: "x", yref: "paper", x0: shift, x1: shift, y0: 0, y1: 1, line },
        { type: "line", xref: "paper", yref: "y", x0: 0, x1: 1, y0: window, y1: window, line }];
    }
    if (view !== "surface") {
      layout.showlegend = true;
      layout.legend = { orientation: "h", x: 0, y: 1, yanchor: "bottom" };
    }
    if (view === "scatter") layout.margin.r = 90;
    layout.width = width;
    layout.height = height;
    layout.autosize = false;
    return figure;
  }

  function stem(view, page) {
    const { driver, response, window, shift } = page.state;
    return `${view} ${driver} ${response} window ${window} shift ${shift < 0 ? "minus " : ""}${Math.abs(shift)}`
      .normalize("NFKD").replace(/[^\x00-\x7f]/g, "").replace(/[^A-Za-z0-9]+/g, "-").replace(/^-+|-+$/g, "").toLowerCase().slice(0, 120);
  }

  document.addEventListener("click", (event) => {
    const button = event.target.closest && event.target.closest("[data-save]");
    if (!button || !ghost.chartOf(`lag-${button.dataset.view}`)) return;
    const page = window.pricewake.lag;
    page.settle();
    const { view, save } = button.dataset;
    const figure = printed(view, page);
    window.Plotly.downloadImage(figure, {
      format: save, scale: 2, width: figure.layout.width, height: figure.layout.height, filename: stem(view, page),
    });
  });

  window.pricewake.printed = printed;
})();
