/* Light and dark. Charts are kept in the light colours; the dark ones are put in on the way to the
   screen, token by token, so that a saved chart is always the printed, light one. */
(function () {
  "use strict";
  const pricewake = (window.pricewake = window.pricewake || {});
  const shown = new Map();

  function current() {
    return document.documentElement.dataset.theme === "dark" ? "dark" : "light";
  }

  function tokens() {
    if (tokens.found) return tokens.found;
    const found = { light: {}, dark: {} };
    for (const sheet of document.styleSheets) {
      if (!sheet.href || !sheet.href.includes("tokens")) continue;
      for (const rule of sheet.cssRules) {
        if (!rule.selectorText || !rule.selectorText.startsWith(":root")) continue;
        const theme = rule.selectorText.includes("dark") ? "dark" : "light";
        for (const name of rule.style) {
          if (name.startsWith("--")) found[theme][name.slice(2)] = rule.style.getPropertyValue(name).trim();
        }
      }
    }
    return (tokens.found = found);
  }

  function colour(name) {
    return tokens()[current()][name] || tokens().light[name];
  }

  /* A copy of the figure in the colours of the theme. */
  function themed(figure) {
    if (current() === "light") return figure;
    const { light, dark } = tokens();
    const swap = new Map(Object.keys(dark).filter((n) => light[n] && light[n][0] === "#").map((n) => [light[n].toLowerCase(), dark[n]]));
    const walk = (value) => {
      if (typeof value === "string") return swap.get(value.toLowerCase()) || value;
      if (ArrayBuffer.isView(value)) return value;
      if (Array.isArray(value)) return value.length > 8 && typeof value[0] === "number" ? value : value.map(walk);
      if (value && typeof value === "object") {
        return Object.fromEntries(Object.entries(value).map(([key, each]) => [key, walk(each)]));
      }
      return value;
    };
    return walk(figure);
  }

  /* What a chart that Dash does not keep is drawn with: app/figures/theme.CONFIG. */
  const CONFIG = { displayModeBar: false, displaylogo: false, showSendToCloud: false, plotlyServerURL: "" };
  const own = new Set();

  function draw(id) {
    const place = document.getElementById(id);
    if (!place) return;
    const figure = themed(shown.get(id));
    if (!("chart" in place.dataset)) { window.dash_clientside.set_props(id, { figure }); return; }
    if (!place.offsetParent) return; // folded away: it is drawn when it is shown
    if (!place.firstElementChild) place.append(document.createElement("div"));
    for (const chart of own) if (!chart.isConnected) { window.Plotly.purge(chart); own.delete(chart); }
    const chart = place.firstElementChild;
    own.add(chart);
    window.Plotly.react(chart, structuredClone(figure.data), { ...structuredClone(figure.layout), autosize: true }, CONFIG);
  }

  window.addEventListener("resize", () => {
    for (const chart of own) if (chart.isConnected && chart.offsetParent) window.Plotly.Plots.resize(chart);
  });

  /* Put a figure on screen; `id` is the id of a dcc.Graph, or of a place with data-chart. */
  function show(id, figure) {
    shown.set(id, figure);
    draw(id);
  }

  function choose(theme) {
    document.documentElement.dataset.theme = theme;
    try { localStorage.setItem("pricewake-theme", theme); } catch (_) { /* a locked-down browser */ }
    const button = document.getElementById("theme");
    if (button) {
      button.textContent = theme === "dark" ? "Light" : "Dark";
      button.setAttribute("aria-pressed", String(theme === "dark"));
      button.setAttribute("aria-label", theme === "dark" ? "Use light colours" : "Use dark colours");
    }
    for (const id of shown.keys()) draw(id);
  }

  let saved = null;
  try { saved = localStorage.getItem("pricewake-theme"); } catch (_) { /* as above */ }
  document.documentElement.dataset.theme =
    saved || (window.matchMedia("(prefers-color-scheme: dark)").matches ? "dark" : "light");
  document.addEventListener("click", (event) => {
    if (event.target.id === "theme") choose(current() === "dark" ? "light" : "dark");
  });
  new MutationObserver((_, observer) => {
    if (!document.getElementById("theme")) return;
    observer.disconnect();
    choose(current());
  }).observe(document.documentElement, { childList: true, subtree: true });

  pricewake.theme = { show, colour, current, figures: shown };
})();
