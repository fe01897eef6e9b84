/* The chosen cell and both series through time, from what the server sent: page.data. */
(function () {
  "use strict";
  const pricewake = (window.pricewake = window.pricewake || {});

  /* The part of the sample that a cell may use: compute.cell_span. */
  function span(data, window, shift) {
    const n = data.driver.values.length;
    if (!data.same) return [0, n];
    const first = data.windows[1] - 1 + Math.max(0, -data.shifts[0]);
    const last = n - 1 - Math.max(0, data.shifts[1]);
    return [
      Math.max(0, first - window + 1 + Math.min(0, shift)),
      Math.min(n, last + 1 + Math.max(0, shift)),
    ];
  }

  /* Which months may be read: lag/left_out.kept_months; null where none is left out. */
  function keptMonths({ driver, leftOut }) {
    if (!leftOut.length) return null;
    const kept = new Array(driver.values.length).fill(true);
    for (const [low, stop] of leftOut) kept.fill(false, low, stop);
    return kept;
  }

  /* The cell; `months` are places in the calendar of the pair. */
  function cellAt(data, window, shift) {
    const [from, to] = span(data, window, shift);
    const cut = (values) => (data.same ? values.slice(from, to) : values);
    const kept = keptMonths(data);
    const cell = pricewake.numbers.cell(
      cut(data.driver.values), cut(data.response.values), window, shift, data.minPairs, 8, kept && cut(kept),
    );
    if (!cell) return null;
    cell.start += from;
    if (from) cell.months = cell.months.map((month) => month + from);
    return cell;
  }

  /* Both smoothed series on the driver's calendar: compute.Bridge.overlay. */
  function overlayAt(data, window, shift) {
    const driver = pricewake.numbers.trailingMean(data.driver.values, window);
    const response = pricewake.numbers.trailingMean(data.response.values, window);
    const low = Math.min(0, -shift), high = driver.length - 1 + Math.max(0, -shift);
    const ordinals = [], d = [], r = [];
    for (let k = low; k <= high; k++) {
      if (!(k < driver.length && k >= 0) && !(k + shift >= 0 && k + shift < response.length)) continue;
      ordinals.push(data.ordinal + window - 1 + k);
      d.push(k >= 0 && k < driver.length ? driver[k] : null);
      r.push(k + shift >= 0 && k + shift < response.length ? response[k + shift] : null);
    }
    return { ordinals, driver: d, response: r };
  }

  const endsOf = (values) => values.reduce(([a, b], v) => [Math.min(a, v), Math.max(b, v)], [Infinity, -Infinity]);

  pricewake.lagCell = { cellAt, overlayAt, endsOf };
})();
