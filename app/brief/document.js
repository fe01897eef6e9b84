(function () {
  "use strict";
  const charts = JSON.parse(document.getElementById("charts").textContent);
  const places = [...document.querySelectorAll(".chart")];
  const root = document.documentElement;
  let timer = 0;

  /* Draw the charts whose column has another width than they were drawn in. */
  function draw() {
    for (const place of places) {
      const { figure, options } = charts[place.dataset.chart];
      const width = place.clientWidth;
      if (place.dataset.width === String(width)) continue;
      if (place.dataset.width) Plotly.purge(place);
      place.dataset.width = width;
      place.style.height = `${figure.layout.height}px`;
      Plotly.newPlot(place, structuredClone(figure.data), { ...structuredClone(figure.layout), width }, options);
    }
  }

  draw();
  window.addEventListener("resize", () => { clearTimeout(timer); timer = setTimeout(draw, 150); });
  window.addEventListener("beforeprint", () => { root.classList.add("printing"); draw(); });
  window.addEventListener("afterprint", () => { root.classList.remove("printing"); draw(); });
})();
