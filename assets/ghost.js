/* A canvas over a chart that draws the numbers of a slider move at once, on the axes that the chart
   shows. The chart itself follows when the hand rests, and the canvas is taken away. */
(function () {
  "use strict";
  const pricewake = (window.pricewake = window.pricewake || {});

  function chartOf(id) {
    return document.querySelector(`#${id} .js-plotly-plot`);
  }

  function canvasOver(chart) {
    const box = chart.closest(".plot");
    let canvas = box.querySelector(":scope > canvas.ghost");
    if (!canvas) {
      canvas = document.createElement("canvas");
      canvas.className = "ghost";
      canvas.setAttribute("aria-hidden", "true");
      box.appendChild(canvas);
    }
    const ratio = window.devicePixelRatio || 1;
    const width = chart.clientWidth, height = chart.clientHeight;
    if (canvas.width !== Math.round(width * ratio) || canvas.height !== Math.round(height * ratio)) {
      canvas.width = Math.round(width * ratio);
      canvas.height = Math.round(height * ratio);
      canvas.style.width = `${width}px`;
      canvas.style.height = `${height}px`;
    }
    const pen = canvas.getContext("2d");
    pen.setTransform(ratio, 0, 0, ratio, 0, 0);
    pen.clearRect(0, 0, width, height);
    box.classList.add("moving");
    return pen;
  }

  function scaleOf(axis) {
    const [low, high] = axis.range.map((end) => axis.r2l(end));
    const factor = axis._length / (high - low);
    return axis._id[0] === "x"
      ? (value) => axis._offset + (value - low) * factor
      : (value) => axis._offset + axis._length - (value - low) * factor;
  }

  /* Draw with `paint(pen, x, y)` inside the axes, and with `beside(pen, axes, x, y)` around them; x and
     y turn numbers of the axes into pixels. */
  function show(id, paint, beside) {
    const chart = chartOf(id);
    if (!chart || !chart._fullLayout || !chart._fullLayout.xaxis) return;
    const { xaxis, yaxis } = chart._fullLayout;
    const pen = canvasOver(chart);
    pen.save();
    pen.beginPath();
    pen.rect(xaxis._offset, yaxis._offset, xaxis._length, yaxis._length);
    pen.clip();
    paint(pen, scaleOf(xaxis), scaleOf(yaxis));
    pen.restore();
    if (beside) beside(pen, { xaxis, yaxis }, scaleOf(xaxis), scaleOf(yaxis));
  }

  function hide(id) {
    const chart = chartOf(id);
    const box = chart && chart.closest(".plot");
    if (box) box.classList.remove("moving");
  }

  function path(pen, xs, ys, x, y) {
    pen.beginPath();
    let open = false;
    for (let i = 0; i < xs.length; i++) {
      if (ys[i] === null || xs[i] === null) continue;
      const px = x(xs[i]), py = y(ys[i]);
      if (open) pen.lineTo(px, py); else { pen.moveTo(px, py); open = true; }
    }
    pen.stroke();
  }

  pricewake.ghost = { chartOf, show, hide, path };
})();
