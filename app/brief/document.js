(function () {
  "use strict";
  const charts = JSON.parse(document.getElementById("charts").textContent);
  const drawn = [];
  for (const place of document.querySelectorAll(".chart")) {
    const { figure, options } = charts[place.dataset.chart];
    place.style.height = `${figure.layout.height}px`;
    Plotly.newPlot(place, figure.data, figure.layout, options);
    drawn.push(place);
  }
  const fit = () => drawn.forEach((place) => Plotly.Plots.resize(place));
  window.addEventListener("beforeprint", fit);
  window.addEventListener("afterprint", fit);
})();
