/* Save a view as PNG or SVG: the light chart with the state's sentence on top and sources below.
   A page offers sentence(), subtitle(view), source() and stem(view, letters). */
(function () {
  "use strict";
  const pricewake = window.pricewake;
  const SIZES = { surface: [1100, 760], scatter: [900, 860], overlay: [1200, 560] };

  /* The page that is open: the Lag page, or one of the pages that the server answers whole. */
  function openPage() {
    if (document.querySelector(".lag-page")) return ["lag", pricewake.lag];
    const root = document.querySelector("[data-page]");
    return root ? [root.dataset.page, pricewake.plain] : [null, null];
  }

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

  /* Rows that the chart library sets a legend in: columns as wide as the longest name. */
  function legendRows({ data }, room) {
    const names = data.filter((t) => t.name && t.showlegend !== false && t.visible !== false).map((t) => t.name.length);
    return Math.max(1, Math.ceil(names.length / Math.max(1, Math.floor(room / (6.5 * Math.max(...names, 0) + 60)))));
  }

  function printed(view, page, prefix = "lag") {
    const figure = structuredClone(pricewake.theme.figures.get(`${prefix}-${view}`));
    const [width, height] = SIZES[view] || (figure.layout.meta || {}).size || [1000, 680];
    const title = wrapped(page.sentence(), Math.floor(width / 9.5));
    const source = wrapped(page.source(), Math.floor(width / 6.5));
    const { layout } = figure;
    const legend = layout.showlegend || (layout.meta || {}).key || view === "scatter" || view === "overlay";
    const top = 50 + 24 * title.length + (legend ? 7 + 19 * legendRows(figure, width - 160) : 0), bottom = 62 + 15 * source.length;
    layout.margin = { ...layout.margin, t: top, b: bottom, l: Math.max(70, (layout.margin || {}).l || 0) };
    layout.title = {
      text: `${title.map(escaped).join("<br>")}<br><span style="font-size:13px">${escaped(page.subtitle(view))}</span>`,
      x: 0.01, xanchor: "left", y: 1 - 18 / height, yanchor: "top", yref: "container",
      font: { size: 18, family: "Georgia, Liberation Serif, serif" },
    };
    layout.annotations = [...(layout.annotations || []), {
      text: source.map(escaped).join("<br>"), showarrow: false, xref: "paper", yref: "paper", x: 0, y: 0,
      xanchor: "left", yanchor: "top", yshift: -52, align: "left", font: { size: 11 },
    }];
    if (legend) {
      layout.showlegend = true;
      layout.legend = { orientation: "h", x: 0, y: 1, yanchor: "bottom" };
    }
    if (view === "surface") {
      const { window, shift } = page.state;
      const line = { color: "#20242C", width: 1 };
      layout.shapes = [...(layout.shapes || []),
        { type: "line", xref: "x", yref: "paper", x0: shift, x1: shift, y0: 0, y1: 1, line },
        { type: "line", xref: "paper", yref: "y", x0: 0, x1: 1, y0: window, y1: window, line }];
    }
    if (view === "scatter") layout.margin.r = 90;
    return Object.assign(figure, { layout: { ...layout, width, height, autosize: false } });
  }

  /* Plain letters only: exports._plain. */
  const letters = (text) =>
    text.normalize("NFKD").replace(/[^\x00-\x7f]/g, "").replace(/[^A-Za-z0-9]+/g, "-").replace(/^-+|-+$/g, "").toLowerCase();

  document.addEventListener("click", (event) => {
    const button = event.target.closest && event.target.closest("[data-save]");
    const [prefix, page] = openPage();
    if (!button || !page || !pricewake.theme.figures.has(`${prefix}-${button.dataset.view}`)) return;
    if (page.settle) page.settle();
    const { view, save } = button.dataset;
    const figure = printed(view, page, prefix);
    window.Plotly.downloadImage(figure, {
      format: save, scale: 2, width: figure.layout.width, height: figure.layout.height, filename: page.stem(view, letters).replace(/-+/g, "-"),
    });
  });

  pricewake.printed = printed;
})();
