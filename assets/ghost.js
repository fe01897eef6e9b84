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
    const { width, height } = chart._fullLayout; // asking the page itself would lay it out anew
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

  let inside = null; // the axes of the chart that is drawn: [left, top, width, height]

  /* Draw with `paint(pen, x, y)` inside the axes, and with `beside(pen, axes, x, y)` around them; x and
     y turn numbers of the axes into pixels. */
  function show(id, paint, beside) {
    const chart = chartOf(id);
    if (!chart || !chart._fullLayout || !chart._fullLayout.xaxis) return;
    const { xaxis, yaxis } = chart._fullLayout;
    const pen = canvasOver(chart);
    inside = [xaxis._offset, yaxis._offset, xaxis._length, yaxis._length];
    pen.save();
    pen.beginPath();
    pen.rect(...inside);
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

  /* A line 1.8 pixels wide, as three hairlines; `on` pixels of it are drawn and `off` left out in
     turn. One wide stroke with dashes keeps a canvas without a graphics card five times as long. */
  const STRANDS = [[0, 0], [0.8, 0], [0, 0.8]];
  function line(pen, xs, ys, x, y, on = Infinity, off = 0) {
    const course = []; // x, y, and whether it is drawn to
    let open = false, drawn = true, left = on, px = 0, py = 0;
    for (let i = 0; i < xs.length; i++) {
      if (ys[i] === null || xs[i] === null) continue;
      const toX = x(xs[i]), toY = y(ys[i]);
      if (open && off) {
        const long = Math.hypot(toX - px, toY - py);
        let at = 0;
        while (long - at > left) {
          at += left;
          course.push(px + ((toX - px) * at) / long, py + ((toY - py) * at) / long, drawn);
          drawn = !drawn;
          left = drawn ? on : off;
        }
        left -= long - at;
      }
      course.push(toX, toY, open && drawn);
      open = true;
      px = toX; py = toY;
    }
    pen.lineWidth = 1;
    pen.beginPath();
    for (const [right, down] of STRANDS) {
      for (let k = 0; k < course.length; k += 3) {
        if (course[k + 2]) pen.lineTo(course[k] + right, course[k + 1] + down);
        else pen.moveTo(course[k] + right, course[k + 1] + down);
      }
    }
    pen.stroke();
  }

  /* The pixels that a disc around the middle of one touches, with the share of each that it covers. */
  function disc(radius) {
    const reach = Math.ceil(radius), found = { reach, right: [], down: [], share: [] };
    for (let down = -reach; down <= reach; down++) {
      for (let right = -reach; right <= reach; right++) {
        const share = Math.min(1, radius + 0.5 - Math.hypot(right, down));
        if (share <= 0) continue;
        found.right.push(right); found.down.push(down); found.share.push(share);
      }
    }
    return found;
  }

  /* Discs at points, each laid over those before it in its colour, [red, green, blue] of `colourOf(i)`: written into
     the pixels themselves, as an arc for each takes ten times as long. To be drawn first. */
  let sheet = null;
  function dots(pen, xs, ys, x, y, colourOf, radius, opacity) {
    const ratio = window.devicePixelRatio || 1;
    const [left, top, width, height] = inside.map((value) => Math.round(value * ratio));
    if (!sheet || sheet.width !== width || sheet.height !== height) sheet = new ImageData(width, height);
    const pixels = sheet.data.fill(0), { reach, right, down, share } = disc(radius * ratio);
    for (let i = 0; i < xs.length; i++) {
      const column = Math.floor(x(xs[i]) * ratio) - left, row = Math.floor(y(ys[i]) * ratio) - top;
      const inner = column >= reach && row >= reach && column < width - reach && row < height - reach;
      const [red, green, blue] = colourOf(i);
      for (let k = 0; k < share.length; k++) {
        const across = column + right[k], along = row + down[k];
        if (!inner && (across < 0 || along < 0 || across >= width || along >= height)) continue;
        const at = 4 * (along * width + across), over = share[k] * opacity, before = pixels[at + 3];
        if (before === 0) {
          pixels[at] = red; pixels[at + 1] = green; pixels[at + 2] = blue; pixels[at + 3] = 255 * over;
          continue;
        }
        const under = (before / 255) * (1 - over), all = over + under;
        pixels[at] = (red * over + pixels[at] * under) / all;
        pixels[at + 1] = (green * over + pixels[at + 1] * under) / all;
        pixels[at + 2] = (blue * over + pixels[at + 2] * under) / all;
        pixels[at + 3] = 255 * all;
      }
    }
    pen.putImageData(sheet, left, top);
  }

  pricewake.ghost = { chartOf, show, hide, path, line, dots };
})();
