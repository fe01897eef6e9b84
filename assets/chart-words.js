/* What a chart shows, in words and as a table, read from the numbers that are drawn. Works for every
   chart of every page; chart-table.js puts both on the page. */
(function () {
  "use strict";
  const pricewake = (window.pricewake = window.pricewake || {});
  const MONTHS = ["Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec"];
  const LISTED = 14; // bars that are named one by one
  const DESCRIBED = 6; // traces that are described one by one

  const bare = (text) => String(text ?? "").replace(/<br\s*\/?>/g, ", ").replace(/<[^>]*>/g, "")
    .replaceAll("&lt;", "<").replaceAll("&gt;", ">").replaceAll("&amp;", "&");

  /* At most three decimals; two figures where a number would vanish. */
  function plain(value) {
    if (typeof value !== "number" || !Number.isFinite(value)) return "";
    const small = value !== 0 && Math.abs(value) < 0.001;
    const text = small ? value.toPrecision(2) : String(Number(value.toFixed(3)));
    return text.replace("-", "−");
  }

  /* A date, a code such as 2024-03 or a name, as people read it. */
  function label(value) {
    const text = value instanceof Date ? value.toISOString() : String(value);
    const found = /^(\d{4})-(\d{2})(-\d{2})?([T ].*)?$/.exec(text);
    return found ? `${MONTHS[found[2] - 1]} ${found[1]}` : bare(text);
  }

  const given = (title) => (title && title.text && !title.text.startsWith("Click to enter") ? bare(title.text) : "");
  const titleOf = (axis) => given(axis && axis.title);
  const list = (values) => (values ? Array.from(values) : []);
  const dated = (axis) => axis && axis.type === "date";
  const said = (value, axis) => (axis && (axis.type === "date" || axis.type === "category") ? label(value) : plain(Number(value)));

  function axesOf(chart, trace) {
    const at = (letter) => chart._fullLayout[`${letter}axis${(trace[`${letter}axis`] || letter).slice(1)}`];
    return { x: at("x"), y: at("y") };
  }

  /* The points of a trace: [{key, label, value, x, y}]; `key` sorts, `value` is what is measured. */
  function pointsOf(chart, place) {
    const trace = chart._fullData[place];
    const { x: across, y: up } = axesOf(chart, trace);
    if (trace.type === "histogram") {
      return list(chart.calcdata[place]).map((bin) => ({ key: bin.p, label: plain(bin.p), value: bin.s, x: bin.p, y: bin.s }));
    }
    const xs = list(trace.x), ys = list(trace.y), texts = Array.isArray(trace.text) ? trace.text : [];
    const flat = trace.type === "bar" && trace.orientation === "h";
    return ys.map((y, i) => {
      const [at, value, axis] = flat ? [y, xs[i], up] : [xs[i], y, across];
      const text = typeof texts[i] === "string" && dated(axis) && /^[^→]*\d{4}[^→]*$/.test(texts[i]) ? label(texts[i]) : null;
      return { key: at, label: text || said(at, axis), note: texts[i], value, x: xs[i], y };
    }).filter((point) => Number.isFinite(Number(point.value)) && point.value !== null);
  }

  const nameOf = (chart, place, fallback) => {
    const { name } = chart._fullData[place];
    return !name || /^trace \d+$/.test(name) ? fallback : bare(name);
  };

  const extremes = (points, of) => points.reduce(
    ([low, high], point) => [of(point) < of(low) ? point : low, of(point) > of(high) ? point : high],
    [points[0], points[0]],
  );

  function mapWords(chart, trace) {
    const { x: across, y: up } = axesOf(chart, trace);
    const cells = [];
    trace.z.forEach((row, i) => list(row).forEach((z, j) => { if (Number.isFinite(z)) cells.push({ z, x: trace.x[j], y: trace.y[i] }); }));
    if (!cells.length || cells.every((cell) => cell.z === cells[0].z)) return ""; // a veil, not a map
    const [low, high] = extremes(cells, (cell) => cell.z);
    const where = ({ x, y }) => `${said(x, across)} across, ${said(y, up)} up`;
    const what = given(trace.colorbar && trace.colorbar.title) || "value";
    return `A map of ${cells.length} cells: ${what} is lowest, ${plain(low.z)}, at ${where(low)}, and highest, ${plain(high.z)}, at ${where(high)}.`;
  }

  function traceWords(chart, place, what) {
    const trace = chart._fullData[place];
    if (trace.type === "heatmap") return mapWords(chart, trace);
    const points = pointsOf(chart, place);
    const name = nameOf(chart, place, what);
    const head = name ? `${name[0].toUpperCase()}${name.slice(1)}: ` : "";
    if (!points.length) return "";
    if (points.length === 1) return `${head}${plain(Number(points[0].value))} at ${points[0].label}.`;
    if (trace.type === "bar" && points.length <= LISTED) {
      return `${head}${points.map((p) => `${p.label} ${plain(Number(p.value))}`).join(", ")}.`;
    }
    const { x: across } = axesOf(chart, trace);
    const first = points[0], last = points[points.length - 1];
    if (trace.fill === "toself" && dated(across)) {
      const [left, right] = extremes(points, (p) => String(p.x));
      return `${label(name)}: marked from ${left.label} to ${right.label}.`;
    }
    if (points.length === 2) return `${head}from ${plain(Number(first.value))} at ${first.label} to ${plain(Number(last.value))} at ${last.label}.`;
    const closed = first.x === last.x && first.y === last.y;
    if (closed || !String(trace.mode || "lines").includes("lines") && trace.type.startsWith("scatter") && !dated(across)) {
      const [left, right] = extremes(points, (p) => p.x), [bottom, top] = extremes(points, (p) => p.y);
      return `${head}${closed ? "a closed line" : `${points.length} points`}, ${said(left.x, across)} to ${said(right.x, across)} across and ${plain(bottom.y)} to ${plain(top.y)} up.`;
    }
    const [low, high] = extremes(points, (p) => Number(p.value));
    return `${head}from ${points[0].label} to ${last.label}, lowest ${plain(Number(low.value))} at ${low.label}, highest ${plain(Number(high.value))} at ${high.label}, last ${plain(Number(last.value))}.`;
  }

  /* What a reader would count as drawn: no outlines of regions, no guide lines under a named point. */
  function drawn(chart) {
    const { _fullData: all } = chart;
    const guide = (trace) => trace.hoverinfo === "skip" && list(trace.x).length <= 3 && all.some((other) => other !== trace && other.name === trace.name);
    return list(all.keys()).filter((place) => all[place].visible === true && all[place].type !== "contour" && !guide(all[place]));
  }

  /* The chart in a few sentences. */
  function sentences(chart, heading) {
    if (!chart._fullLayout || !chart._fullData || !chart._fullData.length) return `${heading}: nothing is drawn.`;
    const { xaxis, yaxis } = chart._fullLayout;
    const places = drawn(chart);
    const across = titleOf(xaxis) || (dated(xaxis) ? "time" : ""), up = titleOf(yaxis);
    const axes = [across && `across: ${across}`, up && `up: ${up}`].filter(Boolean).join("; ");
    const words = places.slice(0, DESCRIBED).map((place) => traceWords(chart, place, places.length === 1 ? up : "")).filter(Boolean);
    const more = places.length > DESCRIBED ? `${places.length - DESCRIBED} more are in the table.` : "";
    return [`${heading}, a chart.`, axes && `${axes[0].toUpperCase()}${axes.slice(1)}.`, ...words, more].filter(Boolean).join(" ");
  }

  /* The numbers of the chart: [{caption, head, rows}]. */
  function tables(chart) {
    const places = drawn(chart), found = [];
    const maps = places.filter((place) => chart._fullData[place].type === "heatmap");
    for (const place of maps) {
      const trace = chart._fullData[place], { x, y } = axesOf(chart, trace);
      const what = given(trace.colorbar && trace.colorbar.title) || "value";
      found.push({
        caption: `${what}; down: ${titleOf(y) || "rows"}; across: ${titleOf(x) || "time"}`,
        head: ["", ...list(trace.x).map((each) => said(each, x))],
        rows: trace.z.map((row, i) => [said(trace.y[i], y), ...list(row).map(plain)]),
      });
    }
    const others = places.filter((place) => !maps.includes(place));
    const joined = others.filter((place) => {
      const { x, y } = axesOf(chart, chart._fullData[place]);
      return [x, y].some((axis) => axis && (axis.type === "date" || axis.type === "category")) && pointsOf(chart, place).length > 1;
    });
    if (joined.length) {
      const keys = new Map();
      const columns = joined.map((place) => {
        const column = new Map();
        for (const point of pointsOf(chart, place)) {
          if (!keys.has(point.label)) keys.set(point.label, point.key);
          column.set(point.label, plain(Number(point.value)));
        }
        return column;
      });
      const { x } = axesOf(chart, chart._fullData[joined[0]]);
      const order = [...keys.keys()];
      if (dated(x)) order.sort((a, b) => (keys.get(a) < keys.get(b) ? -1 : keys.get(a) > keys.get(b) ? 1 : 0));
      const up = titleOf(chart._fullLayout.yaxis) || titleOf(chart._fullLayout.xaxis) || "value";
      found.push({
        caption: titleOf(chart._fullLayout.yaxis) || titleOf(chart._fullLayout.xaxis),
        head: [dated(x) ? "period" : "", ...joined.map((place) => nameOf(chart, place, up))],
        rows: order.map((key) => [key, ...columns.map((column) => column.get(key) ?? "")]),
      });
    }
    for (const place of others.filter((each) => !joined.includes(each))) {
      const points = pointsOf(chart, place);
      if (!points.length) continue;
      const { x, y } = axesOf(chart, chart._fullData[place]);
      const noted = points.some((point) => typeof point.note === "string");
      found.push({
        caption: nameOf(chart, place, titleOf(y)),
        head: [...(noted ? ["point"] : []), titleOf(x) || "across", titleOf(y) || "up"],
        rows: points.map((p) => [...(noted ? [bare(p.note)] : []), said(p.x, x), said(p.y, y)]),
      });
    }
    return found;
  }

  pricewake.chartWords = { sentences, tables };
})();
