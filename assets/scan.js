/* The Scan page: paint the small maps from the numbers of their chart; open a result file; show the
   invented panel. */
(function () {
  "use strict";
  const pricewake = window.pricewake;
  const SCALE = ["low-3", "low-2", "low-1", "zero", "high-1", "high-2", "high-3"];

  /* Numbers of a trace as the server sends them: packed in base 64, or a plain table. */
  function numbers(z) {
    if (!z || !z.bdata) return (z || []).flat();
    const bytes = Uint8Array.from(atob(z.bdata), (letter) => letter.charCodeAt(0));
    return z.dtype === "i1" ? new Int8Array(bytes.buffer) : new Float32Array(bytes.buffer);
  }

  const channels = (hex) => [1, 3, 5].map((at) => parseInt(hex.slice(at, at + 2), 16));

  function colours() {
    const steps = SCALE.map((name) => channels(pricewake.theme.colour(name)));
    return Array.from({ length: 201 }, (_, i) => {
      const at = (i / 200) * (steps.length - 1), low = Math.min(Math.floor(at), steps.length - 2);
      return steps[low].map((value, k) => value + (at - low) * (steps[low + 1][k] - value));
    });
  }

  function paint(canvas, trace, scale) {
    const { width, height } = canvas, cells = numbers(trace.z);
    if (cells.length !== width * height) return;
    const image = new ImageData(width, height);
    for (let row = 0; row < height; row += 1) {
      for (let column = 0; column < width; column += 1) {
        const value = cells[(height - 1 - row) * width + column], at = 4 * (row * width + column);
        if (!Number.isFinite(value)) continue;
        const colour = scale[Math.round(value) + 100];
        image.data.set([colour[0], colour[1], colour[2], 255], at);
      }
    }
    canvas.getContext("2d").putImageData(image, 0, 0);
  }

  let painted = "";
  function paintAll() {
    const list = document.querySelector(".small-maps");
    if (!list) { painted = ""; return; }
    const figure = pricewake.theme.figures.get("scan-surfaces");
    const stamp = list.dataset.stamp, wanted = `${stamp} ${document.documentElement.dataset.theme}`;
    if (wanted === painted && list.dataset.painted === wanted) return;
    if (!figure || (figure.layout.meta || {}).stamp !== stamp) { setTimeout(paintAll, 60); return; }
    const maps = figure.data.filter((trace) => trace.type === "heatmap"), scale = colours();
    for (const canvas of list.querySelectorAll("canvas[data-map]")) paint(canvas, maps[Number(canvas.dataset.map)], scale);
    painted = list.dataset.painted = wanted;
  }

  /* The way back from a result file is there while one is looked at. */
  function follow() {
    const back = document.getElementById("scan-back"), state = pricewake.plain.state;
    if (back && state && back.hidden === Boolean(state.result)) back.hidden = !state.result;
    paintAll();
  }

  const say = (words) => window.dash_clientside.set_props("scan-message", { children: words });

  async function open(file) {
    if (!file || !pricewake.plain.state) return;
    say(`Reading ${file.name}`);
    const address = `/scan/result?name=${encodeURIComponent(file.name)}`;
    const headers = { "Content-Type": "application/octet-stream" };
    const answer = await fetch(address, { method: "POST", headers, body: file }).catch(() => null);
    const found = answer ? await answer.json().catch(() => ({})) : {};
    if (!found.result) return say(found.message || `${file.name} could not be sent; is Pricewake still running?`);
    if (found.result === pricewake.plain.state.result) return say("");
    pricewake.plain.choose("result", found.result);
  }

  document.addEventListener("click", (event) => {
    if (event.target.id !== "scan-open") return;
    const field = Object.assign(document.createElement("input"), { type: "file", accept: ".csv", id: "scan-file" });
    field.className = "hidden-label";
    field.setAttribute("aria-label", "Result file");
    document.getElementById("scan-file")?.remove();
    event.target.after(field);
    field.click();
  });
  document.addEventListener("change", (event) => {
    if (event.target.id === "scan-file") open(event.target.files[0]);
  });

  new MutationObserver(follow).observe(document.documentElement, {
    childList: true, subtree: true, attributes: true, attributeFilter: ["data-stamp", "data-theme"],
  });

  document.addEventListener("click", async (event) => {
    if (event.target.id !== "scan-panel") return;
    event.target.disabled = true;
    const answer = await fetch("/scan/panel", { method: "POST" }).catch(() => null);
    if (answer && answer.ok) window.dash_clientside.set_props("scan-tick", { data: Date.now() });
    else event.target.disabled = false;
  });
})();
